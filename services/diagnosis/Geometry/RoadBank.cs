namespace WearWatch.Diagnosis.Geometry;

/// <summary>Bank of the road and what it asks of the vehicle. Bank is positive with the left side higher.</summary>
public static class RoadBank
{
    /// <summary>Standard value used throughout, m/s².</summary>
    public const double Gravity = 9.81;

    /// <summary>Bank, deg, from what the sensors feel beyond cornering: sin φ = (ay − v·r)/g, less body roll.</summary>
    /// <param name="lateralAcceleration">Specific force to the left, m/s², sensor bias removed.</param>
    /// <param name="speed">m/s.</param>
    /// <param name="yawRate">rad/s, + left, bias removed.</param>
    /// <param name="rollGain">Body roll per bank, 0 to 0.1 (from memory).</param>
    /// <remarks>H. E. Tseng, Vehicle System Dynamics 36 (2001), steady form.</remarks>
    public static double AngleDeg(double lateralAcceleration, double speed, double yawRate, double rollGain = 0) =>
        Math.Asin(Math.Clamp((lateralAcceleration - speed * yawRate) / Gravity, -1, 1)) / (1 + rollGain) * 180 / Math.PI;

    /// <summary>Side force down a cross-slope, N: m·g·sin(atan slope).</summary>
    /// <param name="massKg">kg.</param>
    /// <param name="crossSlope">Rise over run, such as 0.02.</param>
    public static double SideForceN(double massKg, double crossSlope) => massKg * Gravity * Math.Sin(Math.Atan(crossSlope));
}
