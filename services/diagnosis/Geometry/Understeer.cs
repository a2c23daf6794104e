namespace WearWatch.Diagnosis.Geometry;

/// <summary>Linear two-wheel vehicle in a steady turn.</summary>
/// <remarks>Gillespie, Fundamentals of Vehicle Dynamics, SAE 1992; ISO 4138.</remarks>
public static class Understeer
{
    /// <summary>Understeer gradient, rad per g: Wf/Cf − Wr/Cr.</summary>
    /// <param name="frontLoadN">Load of the front axle, N.</param>
    /// <param name="frontStiffnessNPerRad">Cornering stiffness of the front axle, N/rad.</param>
    /// <param name="rearLoadN">N.</param>
    /// <param name="rearStiffnessNPerRad">N/rad.</param>
    public static double GradientRadPerG(double frontLoadN, double frontStiffnessNPerRad, double rearLoadN, double rearStiffnessNPerRad) =>
        frontLoadN / frontStiffnessNPerRad - rearLoadN / rearStiffnessNPerRad;

    /// <summary>Yaw rate per road-wheel angle, 1/s: v ÷ (L + K·v²/g).</summary>
    public static double YawGain(double wheelbaseM, double gradientRadPerG, double speedMS) =>
        speedMS / (wheelbaseM + gradientRadPerG * speedMS * speedMS / RoadBank.Gravity);

    /// <summary>Speed at which twice the neutral steer is needed, m/s: √(gL/K); NaN for a gradient of zero or less.</summary>
    public static double CharacteristicSpeed(double wheelbaseM, double gradientRadPerG) =>
        gradientRadPerG > 0 ? Math.Sqrt(RoadBank.Gravity * wheelbaseM / gradientRadPerG) : double.NaN;
}
