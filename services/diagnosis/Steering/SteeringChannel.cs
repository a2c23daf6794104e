namespace WearWatch.Diagnosis.Steering;

/// <summary>What a steering chunk may carry. The numbers are stored: never renumber. Signs after ISO 8855, + left.</summary>
public enum SteeringChannel : byte
{
    /// <summary>km/h.</summary>
    Speed = 0,
    /// <summary>deg.</summary>
    SteeringWheelAngle = 1,
    /// <summary>Torque the driver holds, at the torsion bar, N·m.</summary>
    DriverTorque = 2,
    /// <summary>Assist, brought to the steering column, N·m.</summary>
    AssistTorque = 3,
    /// <summary>deg/s.</summary>
    YawRate = 4,
    /// <summary>m/s².</summary>
    LateralAcceleration = 5,
    /// <summary>m/s².</summary>
    LongitudinalAcceleration = 6,
    /// <summary>1 while the brake is on, else 0.</summary>
    Brake = 7,
    /// <summary>Torque at the driven wheels or the motor, N·m; only its size against its own largest is used.</summary>
    DriveTorque = 8,
    /// <summary>deg, double precision.</summary>
    Latitude = 9,
    /// <summary>deg, double precision.</summary>
    Longitude = 10,
    /// <summary>Distance run, km, double precision.</summary>
    Distance = 11,
    /// <summary>kg.</summary>
    Load = 12,
    /// <summary>1 while lane keeping steers, else 0.</summary>
    LaneKeeping = 13,
}

/// <summary>What the numbers in a torque column are. Only N·m is ever read as torque.</summary>
public enum TorqueUnit : byte { NewtonMetre = 0, Raw = 1, Unknown = 2 }

public static class SteeringChannels
{
    public const int Count = 14;

    /// <summary>Kept in double precision: a float's step is 1 m in longitude and 0.06 km in 1 000 000 km.</summary>
    public static bool IsPrecise(this SteeringChannel channel) =>
        channel is SteeringChannel.Latitude or SteeringChannel.Longitude or SteeringChannel.Distance;

    public static bool IsTorque(this SteeringChannel channel) =>
        channel is SteeringChannel.DriverTorque or SteeringChannel.AssistTorque;
}
