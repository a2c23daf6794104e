using WearWatch.Simulator.Best;

namespace WearWatch.Simulator;

/// <summary>A sudden change of a vehicle's steering pull or off-centre angle.</summary>
public sealed record Step(double Day, double PullNm, double OffCentreDeg, string Because);

/// <summary>Lives one vehicle through the window, day by day, and writes what is seen of it.</summary>
public sealed class VehicleHistory
{
    private readonly FleetVehicle _v;
    private readonly Scenario _s;
    private readonly RoadNetwork _roads;
    private readonly double[] _odometer;
    private readonly List<(double Pull, double OffCentre)> _days = [];
    private readonly double _rowsPerTrip;
    private long _budget;

    public Rows Rows { get; } = new();
    public TyreSet Tyres { get; }
    public TreadSurveys Surveys { get; }
    public List<Step> Steps { get; } = [];
    public FleetVehicle Vehicle => _v;
    public long Samples { get; private set; }
    /// <summary>What the best possible is told; null where it is not asked for.</summary>
    public VehicleLog? Log { get; }
    public double OdometerKm => _odometer[^1];
    public (double Pull, double OffCentre) Steering => _days[^1];

    /// <param name="samples">Most samples this vehicle may write.</param>
    public VehicleHistory(FleetVehicle vehicle, Scenario scenario, RoadNetwork roads, Technician[] technicians, double[] months, long samples)
    {
        (_v, _s, _roads, _budget) = (vehicle, scenario, roads, samples);
        Log = scenario.Best ? new() : null;
        _rowsPerTrip = Math.Min(6000, samples / (double)scenario.Weeks);
        Tyres = new(vehicle, scenario, months, Rows, Log);
        Surveys = new(vehicle, scenario, technicians, Rows, Log);
        var random = new RandomStream(scenario.Seed, 10, vehicle.Index);
        _odometer = new double[scenario.Days + 1];
        _odometer[0] = vehicle.OdometerKm;
        var week = 1.0;
        for (var day = 0; day < scenario.Days; day++)
        {
            if (day % 7 == 0) week = 1 + random.Within(0.15, 0.4);
            _odometer[day + 1] = _odometer[day] + vehicle.KmPerWeek / 7 * week * (day % 7 < 5 ? 1.3 : 0.25);
        }
    }

    private double Odometer(double day)
    {
        var whole = Math.Clamp((int)day, 0, _s.Days - 1);
        return _odometer[whole] + (day - whole) * (_odometer[whole + 1] - _odometer[whole]);
    }

    /// <summary>Day of the week on which the trip is logged.</summary>
    public static int TripDay(int index) => index % 5;

    public void Run(string folder)
    {
        Paperwork.Describe(_v, _s, Rows);
        foreach (var channel in _v.Sensors.Channels) Rows.Add("steering_channels", _v.Id, channel.Name, channel.Unit, channel.Resolution);
        for (var day = 0; day < _s.Days; day++)
        {
            if (Surveys.Days.Contains(day)) Surveys.Take(day, Odometer(day + 0.3), Tyres.Tyres);
            var morning = Law(day);
            if (_v.Sensors.Channels.Length > 0 && day % 7 == TripDay(_v.Index)) Drive(folder, day);
            Tyres.Run(day, _odometer[day + 1] - _odometer[day]);
            Tyres.Evening(day, _odometer[day + 1]);
            NoteStep(day, morning);
        }
        Paperwork.DriverReports(_v, _s, _days, Rows, Log);
        Paperwork.Workshop(_v, _s, Odometer, Rows, Log);
    }

    private StraightLaw Law(double day) => StraightLaw.Of(_v.Type, _v.Positions, _v.GeometryAt(day), _v.Wheels(Tyres.Tyres));

    private void NoteStep(int day, StraightLaw morning)
    {
        if (_v.Type.IsTrailer)
        {
            _days.Add((0, 0));
            return;
        }
        var evening = Law(day + 0.999);
        var (pull, off) = (evening.TorqueNm - morning.TorqueNm, _v.Type.SteeringRatio * (evening.SteerDeg - morning.SteerDeg));
        _days.Add((evening.TorqueNm, _v.Type.SteeringRatio * evening.SteerDeg + _v.Sensors.AngleZeroDeg));
        if (Math.Abs(pull) < 0.3 && Math.Abs(off) < 2) return;
        var because = _v.Fault is { } f && Math.Floor(f.RepairDay) == day ? "repair"
            : _v.Fault is { Mode: FaultMode.Sudden } g && Math.Floor(g.StartDay) == day ? "kerb_strike" : "tyres";
        Steps.Add(new(day, pull, off, because));
    }

    private void Drive(string folder, int day)
    {
        var random = new RandomStream(_s.Seed, 11, _v.Index, day);
        var rows = (int)Math.Min(_rowsPerTrip * random.Between(0.8, 1.2), _budget);
        if (rows < 600) return;
        var (route, loop) = (random.Pick(_v.Routes), _v.Type.Class == VehicleClass.Bus);
        var heavy = _v.Type.Class is VehicleClass.Truck or VehicleClass.Bus;
        var start = day + random.Between(0.4, 0.6);
        var drive = Simulator.Drive.Plan(_roads.Routes[route], loop, _v.Depot, _v.Type.CruiseKmH, rows / 10.0, heavy, random);
        if (_s.FlatTrips) drive.Flatten();
        var load = random.Between(0.55, 1);
        var plan = new TripPlan
        {
            Rows = rows,
            Law = Law(day),
            LoadKg = Math.Round(_v.Type.GrossMassKg * 0.6 * (load - 0.5)),
            DragTorqueNm = DragTorque(day),
        };
        if (_v.Fault is { Mode: FaultMode.Sudden } f && Math.Floor(f.StartDay) == day)
        {
            plan = plan with { LawAfter = Law(day + 0.999), StrikeRow = rows / 3 };
        }
        var name = $"steering/{_v.Id}/{_s.Date(day)}.csv.gz";
        Directory.CreateDirectory(Path.Combine(folder, "steering", _v.Id));
        var remainder = Log is null ? null : new TripRemainder(_v.Sensors);
        var written = new Trip(_v.Type, _v.Sensors, _v.Depot, drive, plan, random) { Remainder = remainder }.Write(Path.Combine(folder, name));
        if (remainder?.Of(day) is { } means) Log!.Trips.Add(means);
        Samples += written;
        _budget -= written;
        Rows.Add("steering_streams", $"{_v.Id}-{_s.Date(day)}", _v.Id, name, _s.Time(start), 10);
    }

    /// <summary>Part of the holding torque that a dragging brake makes, N·m at the wheel.</summary>
    private double DragTorque(double day)
    {
        if (_v.DragN[0] + _v.DragN[1] == 0) return 0;
        var wheels = _v.Wheels(Tyres.Tyres);
        var without = Array.ConvertAll(wheels, w => w with { DragN = 0 });
        var g = _v.GeometryAt(day);
        return StraightLaw.Of(_v.Type, _v.Positions, g, wheels).TorqueNm - StraightLaw.Of(_v.Type, _v.Positions, g, without).TorqueNm;
    }
}
