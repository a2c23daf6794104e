using WearWatch.Simulator.Best;

namespace WearWatch.Simulator;

/// <summary>The tyres of one vehicle through the window: how they wear, when they are changed, moved or turned, and what of it is written down.</summary>
public sealed class TyreSet
{
    private const double RecordedShare = 0.8;
    private readonly FleetVehicle _vehicle;
    private readonly Scenario _scenario;
    private readonly RandomStream _random;
    private readonly double[] _months;
    private readonly Rows _rows;
    private readonly VehicleLog? _log;
    private readonly Dictionary<int, double[]> _profiles = [];
    private readonly double _changeAtMm;
    private readonly double _moveDay;
    private readonly double _seasonDay = double.NaN;
    private int _fitted, _event;

    public Tyre[] Tyres { get; }
    /// <summary>Days on which each position's tyre came there and the vehicle's distance then.</summary>
    public double[] SinceKm { get; }
    public bool[] Winter { get; }
    public List<string> Unrecorded { get; } = [];

    public TyreSet(FleetVehicle vehicle, Scenario scenario, double[] months, Rows rows, VehicleLog? log)
    {
        (_vehicle, _scenario, _months, _rows, _log) = (vehicle, scenario, months, rows, log);
        _random = new RandomStream(scenario.Seed, 3, vehicle.Index);
        var light = vehicle.Type.Class is VehicleClass.Car or VehicleClass.Van;
        var limit = vehicle.Depot.LimitMm(vehicle.Type);
        _changeAtMm = limit + (_random.Chance(0.07) ? -0.5 : _random.Between(0.6, light ? 1.4 : 2.0));
        _moveDay = _random.Chance(0.2) ? Math.Floor(_random.Between(0.25, 0.75) * scenario.Days) : double.NaN;
        if (light && vehicle.Depot.Jurisdiction != "GB" && _random.Chance(0.25))
        {
            // Winter tyres go on between mid October and early November.
            var october = new DateOnly(scenario.End.AddDays(-60).Year, 10, 12).DayNumber - scenario.Start.DayNumber + _random.Whole(0, 24);
            if (october > 60 && october < scenario.Days - 10) _seasonDay = october;
        }
        var n = vehicle.Positions.Length;
        (Tyres, SinceKm, Winter) = (new Tyre[n], new double[n], new bool[n]);
        Age();
        log?.Opens(vehicle.Positions, Tyres);
    }

    private double KmPerDay => _vehicle.KmPerWeek / 7;

    private string PatternOf(int axle)
    {
        var type = _vehicle.Type;
        var role = type.Class switch
        {
            VehicleClass.Car => "TOUR",
            VehicleClass.Van => "CARGO",
            VehicleClass.Trailer => "TRAIL",
            VehicleClass.Bus => type.Axles[axle].Steered ? "CITY-S" : "CITY-D",
            _ => type.Axles[axle].Steered || type.Axles[axle].Lifting ? "STEER" : "DRIVE",
        };
        return $"{role}-{(char)('A' + _vehicle.Index / 3 % 2)}";
    }

    /// <summary>Wear profile of the pattern on this kind of axle, the same for the whole fleet.</summary>
    public double[] Profile(int axle)
    {
        if (_profiles.TryGetValue(axle, out var profile)) return profile;
        var role = _vehicle.Type.IsTrailer ? 0 : axle == 0 ? 1 : 2;
        var key = PatternOf(axle).Aggregate(role, (h, c) => h * 31 + c);
        var random = new RandomStream(_scenario.Seed, 4, key);
        return _profiles[axle] = TreadWear.Profile(random.Between(0.08, 0.3), random.Between(0, 0.05));
    }

    private double ConicitySd => _vehicle.Type.Class is VehicleClass.Car or VehicleClass.Van ? 14 : 45;

    private Tyre New(Position p)
    {
        var axle = _vehicle.Type.Axles[p.Axle];
        var tyre = Tyre.Draw($"{_vehicle.Id}-{++_fitted:D2}", PatternOf(p.Axle), axle.NewDepthMm, ConicitySd, _random);
        var conicity = _vehicle.LookAlikes.FirstOrDefault(l => l.Kind == "conicity");
        if (conicity is not null && p.Axle == 0 && _fitted <= 2 * _vehicle.Positions.Length) tyre.SetConicity(p.Sign * conicity.Size);
        return tyre;
    }

    /// <summary>Brings every tyre to the age it has when the window opens.</summary>
    private void Age()
    {
        var v = _vehicle;
        for (var axle = 0; axle < v.Type.Axles.Length; axle++)
        {
            var here = v.Positions.Where(p => p.Axle == axle).ToArray();
            var share = _random.Between(0.03, 0.6);
            while (true)
            {
                foreach (var p in here) Tyres[p.Index] = New(p);
                var rate = v.Type.Axles[axle].BaseRate * v.Duty.Driver * 1.15;
                var km = Math.Max(800, share * (v.Type.Axles[axle].NewDepthMm - _changeAtMm) / rate * 1000);
                foreach (var p in here) SinceKm[p.Index] = v.OdometerKm - km;
                RunBefore(here, km);
                if (here.All(p => Tyres[p.Index].DepthMm.Min() > _changeAtMm + 0.3) || share < 0.02) break;
                share *= 0.6;
            }
        }
        RecordFirstFittings();
    }

    private void RunBefore(Position[] here, double km)
    {
        var weeks = Math.Max(1, (int)Math.Ceiling(km / _vehicle.KmPerWeek));
        var stand = Array.ConvertAll(_vehicle.Positions, p => Tyres[p.Index] ?? New(p));
        foreach (var p in here) stand[p.Index] = Tyres[p.Index];
        for (var w = weeks; w > 0; w--)
        {
            var g = _vehicle.GeometryAt(-7.0 * w + 3);
            var slip = _vehicle.MeanSlip(g, stand);
            if (w == (weeks + 1) / 2 && _log is not null) _log.Earlier[here[0].Axle] = new(weeks, km, _vehicle.Wheels(stand));
            foreach (var p in here) RunOne(p, g, slip[p.Index], km / weeks, 1);
        }
    }

    private void RecordFirstFittings()
    {
        foreach (var axle in _vehicle.Positions.GroupBy(p => p.Axle))
        {
            if (_random.Chance(0.3)) continue;
            foreach (var p in axle)
            {
                var day = (SinceKm[p.Index] - _vehicle.OdometerKm) / KmPerDay;
                Record("fitted", p, null, Math.Floor(day) + 0.45, SinceKm[p.Index]);
            }
        }
    }

    private void RunOne(Position p, Geometry g, double slipDeg, double km, double month)
    {
        var rates = RatesAt(p, g, slipDeg, month);
        var tyre = Tyres[p.Index];
        tyre.Run(km * _vehicle.Type.Axles[p.Axle].DownShare, rates, -p.Sign * slipDeg);
        if (_vehicle.CuppedPosition == p.Index) tyre.CuppingMm = Math.Min(1.4, tyre.CuppingMm + km * 6e-5);
    }

    /// <summary>Rates by strip, mm per 1000 km on the road, before what the casting adds.</summary>
    public double[] RatesAt(Position p, Geometry g, double slipDeg, double month = 1) => TreadWear.Rates(
        _vehicle.Type.Axles[p.Axle], _vehicle.Duty, -p.Sign * slipDeg, g.Camber(p.Axle, p.Left), _vehicle.PressureShare[p.Index], month, Profile(p.Axle));

    /// <summary>One day of driving.</summary>
    public void Run(double day, double km)
    {
        var g = _vehicle.GeometryAt(day + 0.5);
        var slip = _vehicle.MeanSlip(g, Tyres);
        var month = _months[_scenario.At(day).Month - 1];
        _log?.Days.Add((km, month, _vehicle.Wheels(Tyres)));
        foreach (var p in _vehicle.Positions) RunOne(p, g, slip[p.Index], km, month);
    }

    /// <summary>What the depot does to the tyres at the end of a day.</summary>
    public void Evening(int day, double odometerKm)
    {
        Serve(day, odometerKm);
        _log?.Evening(day, _vehicle.Positions, Tyres);
    }

    private void Serve(int day, double odometerKm)
    {
        if (day == _seasonDay)
        {
            foreach (var p in _vehicle.Positions) Replace(p, day, odometerKm, written: true, winter: true);
            return;
        }
        if (day == _moveDay) Move(day, odometerKm);
        foreach (var axle in _vehicle.Positions.GroupBy(p => p.Axle))
        {
            if (!axle.Any(p => LeastDepth(p) < _changeAtMm) || !_random.Chance(0.12)) continue;
            var written = _random.Chance(RecordedShare);
            foreach (var p in axle) Replace(p, day, odometerKm, written, Winter[p.Index]);
            if (!written) Unrecorded.Add($"{_scenario.Date(day)} tyres changed on axle {axle.Key + 1}");
        }
    }

    public double LeastDepth(Position p) =>
        Enumerable.Range(0, _vehicle.Type.Grooves).Min(k => Tyres[p.Index].SmoothDepth(k, _vehicle.Type.Grooves));

    private void Replace(Position p, double day, double odometerKm, bool written, bool winter)
    {
        Tyres[p.Index] = New(p);
        SinceKm[p.Index] = odometerKm;
        Winter[p.Index] = winter;
        if (written) Record("fitted", p, null, day + 0.7, odometerKm, day == _seasonDay);
    }

    private void Move(double day, double odometerKm)
    {
        var written = _random.Chance(RecordedShare);
        var type = _vehicle.Type;
        var what = type.Class is VehicleClass.Car or VehicleClass.Van ? "front and rear exchanged"
            : type.IsTrailer ? "first and last axle exchanged" : "steer tyres turned on the rim";
        if (type.Class is VehicleClass.Truck or VehicleClass.Bus)
            foreach (var p in _vehicle.Positions.Where(p => p.Axle == 0))
            {
                Tyres[p.Index].TurnOnRim();
                if (written) Record("turned_on_rim", p, null, day + 0.7, odometerKm);
            }
        else
            foreach (var p in _vehicle.Positions.Where(p => p.Axle == 0)) Exchange(p, day, odometerKm, written);
        if (!written) Unrecorded.Add($"{_scenario.Date(day)} {what}");
    }

    private void Exchange(Position p, double day, double odometerKm, bool written)
    {
        var other = _vehicle.Positions.Last(q => q.Left == p.Left && q.Dual == p.Dual);
        (Tyres[p.Index], Tyres[other.Index]) = (Tyres[other.Index], Tyres[p.Index]);
        (SinceKm[p.Index], SinceKm[other.Index]) = (odometerKm, odometerKm);
        if (!written) return;
        Record("moved", p, other, day + 0.7, odometerKm);
        Record("moved", other, p, day + 0.7, odometerKm);
    }

    private void Record(string what, Position p, Position? from, double day, double odometerKm, bool seasonal = false)
    {
        var tyre = Tyres[p.Index];
        var known = what == "fitted" && _random.Chance(0.7);
        if (known)
            _rows.Add("tyres", $"ty-{tyre.Id}", tyre.Id, tyre.Pattern, _vehicle.Type.Axles[p.Axle].TyreSize, tyre.NewDepthMm, "mm");
        double? distance = _vehicle.DistanceSource == "none" || _random.Chance(0.1) || odometerKm < 0 ? null : Math.Round(odometerKm);
        _rows.Add("fittings", $"f-{_vehicle.Id}-{++_event:D2}", _vehicle.Id, _scenario.Time(day), what, p.Name, from?.Name,
            known ? tyre.Id : null, what == "fitted" ? tyre.Pattern : null, what == "fitted" ? tyre.NewDepthMm : null, distance,
            seasonal ? true : null, seasonal ? true : null);
    }

    /// <summary>Rate now, mean over the grooves, mm per 1000 km.</summary>
    public double MeanRate(Position p, Geometry g, double slipDeg)
    {
        var grooves = _vehicle.Type.Grooves;
        var loss = LossPer1000Km(p, RatesAt(p, g, slipDeg));
        return Enumerable.Range(0, grooves).Average(k => Tyre.AtGroove(loss, k, grooves));
    }

    private double[] LossPer1000Km(Position p, double[] rates) =>
        [.. rates.Select((r, s) => Tyres[p.Index].Loss(s, 1000, r) * _vehicle.Type.Axles[p.Axle].DownShare)];

    /// <summary>Distance, km, until the first groove reaches the limit if nothing changes; 0 when one already has.</summary>
    public double RemainingKm(Position p, Geometry g, double slipDeg, double limitMm)
    {
        const double step = 500;
        var share = _vehicle.Type.Axles[p.Axle].DownShare;
        var rates = RatesAt(p, g, slipDeg);
        var (tyre, grooves) = (Tyres[p.Index], _vehicle.Type.Grooves);
        var depth = (double[])tyre.DepthMm.Clone();
        double Least() => Enumerable.Range(0, grooves).Min(k => Tyre.AtGroove(depth, k, grooves));
        double before = Least(), km = 0;
        if (before <= limitMm) return 0;
        while (true)
        {
            for (var s = 0; s < depth.Length; s++)
            {
                var worn = tyre.NewDepthMm - depth[s];
                depth[s] -= step / 1000 * share * rates[s] * tyre.StripFactor[s] * Tyre.Stage(worn, tyre.NewDepthMm);
            }
            var after = Least();
            if (after <= limitMm) return km + step * (before - limitMm) / (before - after);
            (before, km) = (after, km + step);
        }
    }
}
