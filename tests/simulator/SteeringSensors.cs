namespace WearWatch.Simulator;

/// <summary>One channel of a vehicle as it is declared: name, unit, and the sensor's smallest step.</summary>
public sealed record Channel(string Name, string Unit, double Resolution);

/// <summary>The steering signals of one vehicle and how they err.</summary>
public sealed record SteeringSensors
{
    public required Channel[] Channels { get; init; }
    /// <summary>Reading of the angle sensor when the wheels stand straight, deg.</summary>
    public double AngleZeroDeg { get; init; }
    /// <summary>Zero of the torsion bar, N·m.</summary>
    public double TorqueZeroNm { get; init; }
    /// <summary>Lateral accelerometer's bias, m/s².</summary>
    public double LateralBias { get; init; }
    /// <summary>What body roll adds to lateral acceleration, share.</summary>
    public double RollGain { get; init; }
    public double YawBiasDegS { get; init; }
    /// <summary>Assist torque per driver torque near the centre; 0 without assist.</summary>
    public double Boost { get; init; }
    /// <summary>Whether the assist learns a steady pull and takes it over.</summary>
    public bool PullCompensation { get; init; }
    /// <summary>Raw units of driver torque per N·m; 0 where it is in N·m.</summary>
    public double RawPerNm { get; init; }
    /// <summary>Coulomb friction of the steering, at the wheel, N·m.</summary>
    public double FrictionNm { get; init; }
    /// <summary>Driver's straight-running torque noise, N·m at the column, 10 Hz.</summary>
    public double TorqueNoiseNm { get; init; }
    /// <summary>Driver's straight-running angle noise, deg.</summary>
    public double AngleNoiseDeg { get; init; }
    /// <summary>Extra holding torque per m/s² of braking from uneven brakes, N·m at the wheel.</summary>
    public double BrakePullNm { get; init; }

    public bool Has(string channel) => Channels.Any(c => c.Name == channel);

    /// <summary><c>torque</c>, <c>angle</c> or <c>gauge_only</c>.</summary>
    public string Kind => Has("driver_torque") && RawPerNm == 0 ? "torque" : Has("steering_wheel_angle") ? "angle" : "gauge_only";

    /// <summary>
    /// Draws the signals of a vehicle. <paramref name="slot"/> is its place among the fleet's vehicles of its kind, so that
    /// the shares of torque, raw and silent vehicles hold in a small fleet too.
    /// </summary>
    public static SteeringSensors Draw(VehicleType type, int slot, RandomStream random)
    {
        if (type.IsTrailer) return new() { Channels = [] };
        var light = type.Class is VehicleClass.Car or VehicleClass.Van;
        var heavyUnit = !light && random.Chance(0.5);
        var torque = light && type.Assist == "electric" && slot % 8 is 0 or 1 or 2 or 5 or 7;
        var silent = light ? slot % 12 == 11 : slot % 9 == 5;
        var channels = silent ? [] : Declare(type, slot, light, torque, heavyUnit, random);
        return new()
        {
            Channels = [.. channels],
            AngleZeroDeg = random.Within(light ? 0.7 : 1.1, light ? 1.6 : 2.5),
            TorqueZeroNm = random.Within(0.03, 0.08),
            LateralBias = random.Within(0.14, 0.35),
            RollGain = random.Between(0.05, 0.10),
            YawBiasDegS = random.Within(0.15, 0.4),
            Boost = torque ? random.Between(0.7, 1.5) : 0,
            PullCompensation = torque && slot % 8 == 2 && slot < 8,
            RawPerNm = torque && slot % 8 == 5 && slot < 8 ? 57 : 0,
            FrictionNm = random.Between(0.12, 0.3),
            TorqueNoiseNm = random.Between(0.3, 0.55),
            AngleNoiseDeg = random.Between(0.4, 0.9),
            BrakePullNm = random.Within(0.08, 0.2),
        };
    }

    private static List<Channel> Declare(VehicleType type, int slot, bool light, bool torque, bool heavyUnit, RandomStream random)
    {
        // VDC2 steps: angle 1/1024 rad, yaw rate 1/8192 rad/s, lateral acceleration 1/2048 m/s² (SAE J1939-71, public decoders).
        List<Channel> channels =
        [
            new("speed", "km/h", heavyUnit ? 1.0 / 256 : 0.1),
            new("steering_wheel_angle", "deg", heavyUnit ? 0.055953 : slot % 7 == 3 ? 1 : 0.1),
        ];
        if (torque) channels.Add(new("driver_torque", slot % 8 == 5 && slot < 8 ? "raw" : "N·m", slot % 8 == 5 && slot < 8 ? 1 : slot % 2 == 0 ? 0.01 : 0.1));
        if (torque && slot % 8 is 0 or 2 or 5) channels.Add(new("assist_torque", "N·m", 0.05));
        channels.Add(new("yaw_rate", "deg/s", heavyUnit ? 0.006994 : 0.01));
        if (!random.Chance(0.15)) channels.Add(new("lateral_acceleration", "m/s²", heavyUnit ? 1.0 / 2048 : 0.01));
        channels.Add(new("longitudinal_acceleration", "m/s²", heavyUnit ? 0.1 : 0.01));
        channels.Add(new("brake", "1", 1));
        if (!random.Chance(0.2))
        {
            channels.Add(new("latitude", "deg", 0.000001));
            channels.Add(new("longitude", "deg", 0.000001));
        }
        if (type.Class == VehicleClass.Truck && random.Chance(0.6)) channels.Add(new("load", "kg", 10));
        if (!light && random.Chance(0.3)) channels.Add(new("drive_torque", "N·m", 10));
        if (light && torque && slot % 8 == 1) channels.Add(new("lane_keeping", "1", 1));
        return channels;
    }
}
