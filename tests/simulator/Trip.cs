using WearWatch.Simulator.Best;

namespace WearWatch.Simulator;

/// <summary>How a vehicle holds straight: torque (N·m at the wheel, before assist) and road-wheel steer (deg) on the flat and per sine of bank.</summary>
public readonly record struct StraightLaw(double TorqueNm, double TorquePerBank, double SteerDeg, double SteerPerBankDeg)
{
    public static StraightLaw Of(VehicleType type, Position[] positions, Geometry g, WheelState[] wheels)
    {
        const double bank = 0.02;
        var flat = StraightRunning.Solve(type, positions, g, wheels, 0);
        var up = StraightRunning.Solve(type, positions, g, wheels, bank);
        var down = StraightRunning.Solve(type, positions, g, wheels, -bank);
        return new(flat.HoldingTorqueNm, (up.HoldingTorqueNm - down.HoldingTorqueNm) / (2 * bank), flat.SteerDeg, (up.SteerDeg - down.SteerDeg) / (2 * bank));
    }
}

/// <summary>What is special about one trip.</summary>
public sealed record TripPlan
{
    public required int Rows { get; init; }
    public required StraightLaw Law { get; init; }
    /// <summary>Row of a kerb strike, after which <see cref="LawAfter"/> holds; none where negative.</summary>
    public int StrikeRow { get; init; } = -1;
    public StraightLaw LawAfter { get; init; }
    public double LoadKg { get; init; }
    /// <summary>Cold dragging brake's share of its torque at the start of the trip; it warms up within some 200 s.</summary>
    public double DragTorqueNm { get; init; }
}

/// <summary>
/// Drives one trip at 10 Hz and writes what the sensors say. The driver holds the lane with a delay-free feedback
/// on heading and offset plus correlated steering noise, so the noise has no lasting mean; torsion-bar noise of
/// 0.3 to 0.6 N·m at 10 Hz with some 1 s of memory, means over 60 s scatter by about 0.1 N·m (from memory).
/// </summary>
public sealed class Trip(VehicleType type, SteeringSensors sensors, Depot depot, Drive drive, TripPlan plan, RandomStream random)
{
    private const double Dt = 0.1, G = 9.81, Deg = Math.PI / 180;
    private readonly double _ratio = type.SteeringRatio;
    private readonly double _wheelbase = type.FixedAxles.Average(a => type.Axles[a].PositionM);
    private readonly bool _keepsLane = sensors.Has("lane_keeping");
    private readonly bool _heavy = type.Class is VehicleClass.Truck or VehicleClass.Bus;

    private double _v, _a, _s, _yaw, _dwell = 22, _lastStop = -1;
    private double _heading, _offset, _angleNoise, _torqueNoise, _wind, _friction, _lastAngle, _assist, _east, _north, _yawDrift;

    /// <summary>Takes what the samples tell of straight running once everything else is known; null where nobody asks.</summary>
    public TripRemainder? Remainder { get; init; }

    /// <returns>Rows written.</returns>
    public int Write(string path)
    {
        var written = 0;
        using var file = new SampleFile(path, sensors.Channels);
        var values = new double[sensors.Channels.Length];
        var last = new double[values.Length];
        var faults = SignalFaults.Draw(values.Length, plan.Rows, random);
        _wind = 0.09 * random.Normal();
        _yawDrift = 0.02 * random.Normal();
        var yawBias = sensors.YawBiasDegS + 0.03 * random.Normal();
        for (var row = 0; row < plan.Rows && _s < (drive.Points - 3) * Road.StepM; row++)
        {
            Move();
            Sense(row, yawBias, values);
            faults.Apply(row, values, last, random);
            if (faults.InGap(row)) continue;
            file.Row(row, values);
            written++;
        }
        return written;
    }

    private void Move()
    {
        var at = (int)(_s / Road.StepM);
        if (_dwell > 0)
        {
            _dwell -= Dt;
            (_v, _a) = (0, 0);
            return;
        }
        if (at != _lastStop && _v < 1.2 && drive.Stops.TryGetValue(at, out var wait))
        {
            (_dwell, _lastStop) = (wait, at);
            return;
        }
        var wanted = Math.Min(drive.Cap[at], drive.Cap[Math.Min(at + 1, drive.Points - 1)]);
        var most = (_heavy ? 0.75 : 1.4) * Math.Max(0.25, 1 - _v / 40);
        var a = Math.Clamp((wanted - _v) / 0.8, -2.5, most);
        _a += (a - _a) * 0.35;
        _v = Math.Max(0.3, _v + _a * Dt);
        _s += _v * Dt;
    }

    private void Sense(int row, double yawBias, double[] values)
    {
        var at = (int)(_s / Road.StepM);
        var share = _s / Road.StepM - at;
        double Along(List<double> of) => of[at] + share * (of[at + 1] - of[at]);
        var (curvature, bank) = (Along(drive.Curvature), Along(drive.Bank));
        var struck = plan.StrikeRow >= 0 && row >= plan.StrikeRow;
        var law = struck ? plan.LawAfter : plan.Law;
        var steerNoise = KeepLane(law);
        var perG = law.SteerPerBankDeg * Deg;
        var understeer = _wheelbase + perG * _v * _v / G;
        var moving = _v > 0.2 ? 1.0 : 0;
        var r = moving * _v * (curvature + steerNoise * Deg / _ratio / Math.Max(2, understeer));
        _yaw += (r - _yaw) * 0.5;
        var angle = _ratio * (law.SteerDeg + law.SteerPerBankDeg * bank + curvature * understeer / Deg) + steerNoise;
        var sideG = Math.Clamp(_v * _yaw / G, -0.25, 0.25);
        var torque = Torque(law, bank, sideG, angle);
        var jolt = struck && row < plan.StrikeRow + 4 ? (row % 2 == 0 ? 1 : -0.7) : 0;
        var (bar, assist) = Split(torque + 6 * jolt, sideG);
        // Lane keeping that steers leaves the driver little to hold.
        if (_keepsLane && LaneKeeping(row)) bar *= 0.3;
        var lateral = (_v * _yaw + G * bank) * (1 + sensors.RollGain) + sensors.LateralBias
            + (_v > 0.2 ? 0.12 + 0.006 * _v : 0.01) * random.Normal() + 4.5 * jolt;
        _east += (0 - _east) * 0.004 + 0.09 * random.Normal();
        _north += (0 - _north) * 0.004 + 0.09 * random.Normal();
        for (var c = 0; c < values.Length; c++)
            values[c] = sensors.Channels[c].Name switch
            {
                "speed" => Math.Max(0, _v * 3.6 * moving + (_v > 0.2 ? 0.08 * random.Normal() : 0)),
                "steering_wheel_angle" => angle + sensors.AngleZeroDeg + 0.03 * random.Normal() + 8 * jolt,
                "driver_torque" => (bar + sensors.TorqueZeroNm + (_v > 0.2 ? 0.02 : 0.005) * random.Normal()) * (sensors.RawPerNm > 0 ? sensors.RawPerNm : 1),
                "assist_torque" => assist + 0.03 * random.Normal(),
                "yaw_rate" => _yaw / Deg + yawBias + _yawDrift * row / plan.Rows + (_v > 0.2 ? 0.12 : 0.03) * random.Normal(),
                "lateral_acceleration" => lateral,
                "longitudinal_acceleration" => _a + (_v > 0.2 ? 0.08 : 0.01) * random.Normal(),
                "brake" => _a < -0.45 || _v < 0.2 ? 1 : 0,
                "drive_torque" => Math.Max(0, (_a + 0.12 + 0.0004 * _v * _v) * (type.GrossMassKg * 0.7) * 0.5),
                "latitude" => depot.Latitude + (Along(drive.North) + _north) / 111_200,
                "longitude" => depot.Longitude + (Along(drive.East) + _east) / (111_320 * Math.Cos(depot.Latitude * Deg)),
                "load" => plan.LoadKg,
                "lane_keeping" => LaneKeeping(row) ? 1 : 0,
                _ => double.NaN,
            };
        if (Remainder is null || jolt != 0 || _v <= 3) return;
        var knownTorque = torque - law.TorqueNm - _torqueNoise - _wind * _v * _v / 500 - sensors.Boost * sensors.TorqueZeroNm - (sensors.PullCompensation ? _assist : 0);
        Remainder.Row(values, struck || row >= plan.Rows / 3, angle - steerNoise - _ratio * law.SteerDeg, _keepsLane && LaneKeeping(row) ? double.NaN : knownTorque, _v);
    }

    /// <summary>Driver's correction about the mean steering-wheel angle, deg: noise plus feedback on heading and offset in the lane.</summary>
    private double KeepLane(StraightLaw law)
    {
        _angleNoise += -0.1 * _angleNoise + Math.Sqrt(0.19) * sensors.AngleNoiseDeg * random.Normal();
        if (_v < 3) return 0.2 * _angleNoise;
        var gain = _v / (_wheelbase + law.SteerPerBankDeg * Deg * _v * _v / G) * Deg / _ratio;
        const double omega = 0.5;
        var correction = _angleNoise - 2 * 0.8 * omega / gain * _heading - omega * omega / (gain * _v) * _offset;
        _heading += gain * correction * Dt;
        _offset += _v * _heading * Dt;
        return correction;
    }

    /// <summary>Torque at the column before assist, N·m: holding against bank, curve and faults; friction; noise; wind.</summary>
    private double Torque(StraightLaw law, double bank, double sideG, double angle)
    {
        if (_v < 0.2) return 0.15 * _torqueNoise;
        _torqueNoise += -0.1 * _torqueNoise + Math.Sqrt(0.19) * sensors.TorqueNoiseNm * random.Normal();
        _wind += -0.0015 * _wind + 0.0049 * random.Normal(); // memory 67 s
        var rate = (angle - _lastAngle) / Dt;
        _lastAngle = angle;
        _friction += (Math.Tanh(rate / 3) - _friction) * 0.4;
        var warm = 1 - Math.Exp(-_s / 4000);
        var hold = law.TorqueNm + law.TorquePerBank * (bank + sideG) - plan.DragTorqueNm * (1 - warm) * 0.5;
        var braking = _a < -0.45 ? -_a * (sensors.BrakePullNm + 0.2 * plan.DragTorqueNm) : 0;
        return hold + braking + sensors.FrictionNm * _friction + _torqueNoise + _wind * _v * _v / 500;
    }

    /// <summary>Driver's part and the assist's part of the torque; pull compensation takes the steady part over within half a minute.</summary>
    private (double Bar, double Assist) Split(double torque, double sideG)
    {
        if (sensors.PullCompensation && _v > 11 && Math.Abs(sideG) < 0.03)
            _assist += (Math.Clamp(torque, -2, 2) - _assist) * Dt / 18;
        var offset = sensors.PullCompensation ? _assist : 0;
        // The assist acts on what the bar measures, its zero included.
        var bar = (torque - offset - sensors.Boost * sensors.TorqueZeroNm) / (1 + sensors.Boost);
        return (bar, torque - bar);
    }

    private bool LaneKeeping(int row) => _v > 17 && row / 900 % 3 == 1;
}

/// <summary>Missing samples, a frozen channel, a gap: what goes wrong between sensor and file on one trip.</summary>
public sealed class SignalFaults
{
    private int _frozen = -1, _frozenFrom, _frozenTo, _gapFrom, _gapTo;
    private double _missing;

    public static SignalFaults Draw(int channels, int rows, RandomStream random)
    {
        var faults = new SignalFaults { _missing = random.Chance(0.3) ? 0.002 : 0.0001 };
        if (random.Chance(0.03) && channels > 2)
        {
            faults._frozen = random.Whole(1, channels - 1);
            faults._frozenFrom = random.Whole(0, rows);
            faults._frozenTo = faults._frozenFrom + random.Whole(200, 900);
        }
        if (random.Chance(0.08))
        {
            faults._gapFrom = random.Whole(rows / 5, rows);
            faults._gapTo = faults._gapFrom + random.Whole(30, 600);
        }
        return faults;
    }

    public bool InGap(int row) => row >= _gapFrom && row < _gapTo;

    public void Apply(int row, double[] values, double[] last, RandomStream random)
    {
        if (_frozen >= 0 && row > _frozenFrom && row < _frozenTo) values[_frozen] = last[_frozen];
        values.CopyTo(last, 0);
        if (random.Chance(_missing * values.Length)) values[random.Whole(Math.Min(1, values.Length - 1), values.Length - 1)] = double.NaN;
    }
}
