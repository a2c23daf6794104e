namespace WearWatch.Diagnosis.Steering;

/// <summary>Bounds of straight driving, in one place. Common practice, no source, unless a line says otherwise.</summary>
public static class StraightGates
{
    /// <summary>Least speed, km/h.</summary>
    public const float SpeedKmH = 50;
    /// <summary>Least speed of a braking run, km/h (from memory).</summary>
    public const float BrakingSpeedKmH = 30;
    /// <summary>Largest yaw rate, bias removed, deg/s.</summary>
    public const float YawRateDegS = 0.5f;
    /// <summary>Without a yaw rate: largest departure of the wheel from its median while moving, deg (from memory).</summary>
    public const float AngleFromMedianDeg = 3;
    /// <summary>Steady driving: largest change of speed, m/s².</summary>
    public const float SteadyAcceleration = 0.3f;
    /// <summary>Driving run: largest change of speed, m/s² (from memory).</summary>
    public const float DriveAcceleration = 1.5f;
    /// <summary>Braking run: largest change of speed, m/s² (from memory).</summary>
    public const float BrakeAcceleration = 4;
    /// <summary>Largest movement of the wheel within one second, deg; the range in a block, since differences of samples are mostly the sensor's step.</summary>
    public const float SteeringRateDegS = 8;
    /// <summary>Shortest run, s.</summary>
    public const double ShortestRunS = 5;
    /// <summary>Longest run, s: near the length of a road cell at speed.</summary>
    public const double LongestRunS = 30;
    /// <summary>Steps from which a signal is too coarse unless its own noise moves it over more than two of them: torque N·m, angle deg (from memory).</summary>
    public const double CoarseTorqueNm = 0.5, CoarseAngleDeg = 0.5;
    /// <summary>A channel that does not change for this long while moving is frozen, s.</summary>
    public const double FrozenS = 30;
    /// <summary>Slower than this is standing, km/h (from memory).</summary>
    public const float StandstillKmH = 0.5f;
    /// <summary>Standing time from which the yaw bias is taken, s (from memory).</summary>
    public const int StandstillBlocks = 5;
    /// <summary>A block turning faster than this is a turn, deg/s (from memory).</summary>
    public const float TurnDegS = 3;
    /// <summary>Time a pull compensation takes to act in full after a turn, s: at most 45 (US 8,437,913).</summary>
    public const double CompensationS = 45;
    /// <summary>Share of the stream's largest drive torque from which a steady block counts as driven (from memory).</summary>
    public const float DriveTorqueShare = 0.4f;
}

/// <summary>
/// What the reduction must know of the vehicle, null where not known: wheelbase, m, 1.5 to 12; steering-wheel angle per road-wheel
/// angle, 10 to 30; understeer gradient, rad per g, 0 being neutral.
/// </summary>
public sealed record ReductionVehicle(double? WheelbaseM, double? SteeringRatio, Facts.SteeringAssist Assist = Facts.SteeringAssist.Unknown, double UndersteerRadPerG = 0)
{
    public static ReductionVehicle Of(Facts.Vehicle vehicle) => new(vehicle.WheelbaseM, vehicle.SteeringRatio, vehicle.Assist);
}
