namespace WearWatch.Diagnosis.Steering;

/// <summary>Scaling of the stability controller's message VDC2 (PGN 61449), SAE J1939-71 as in public decoders. Signs are to be checked from the data.</summary>
public static class J1939Signals
{
    /// <summary>SPN 1807, steering-wheel angle, rad; null for the codes that mean 'error' and 'not available'.</summary>
    public static double? SteeringWheelAngleRad(ushort raw) => raw > 0xFAFF ? null : raw / 1024.0 - 31.374;

    /// <summary>SPN 1808, yaw rate, rad/s.</summary>
    public static double? YawRateRadS(ushort raw) => raw > 0xFAFF ? null : raw / 8192.0 - 3.92;

    /// <summary>SPN 1809, lateral acceleration, m/s².</summary>
    public static double? LateralAcceleration(ushort raw) => raw > 0xFAFF ? null : raw / 2048.0 - 15.687;

    /// <summary>SPN 1810, longitudinal acceleration, m/s².</summary>
    public static double? LongitudinalAcceleration(byte raw) => raw > 0xFA ? null : raw * 0.1 - 12.5;
}
