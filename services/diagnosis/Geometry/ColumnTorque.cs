namespace WearWatch.Diagnosis.Geometry;

/// <summary>Moments about the steering axes seen as torque at the column, before assist.</summary>
public static class ColumnTorque
{
    /// <summary>From a side force on the steer axle, N·m: F·share·trail ÷ ratio.</summary>
    /// <param name="sideForceN">Side force on the whole vehicle, N.</param>
    /// <param name="frontShare">Share carried by the steer axle, 0 to 1.</param>
    /// <param name="trailM">Mechanical plus pneumatic trail, m.</param>
    /// <param name="steeringRatio">On-centre ratio.</param>
    public static double FromSideForceNm(double sideForceN, double frontShare, double trailM, double steeringRatio) =>
        sideForceN * frontShare * trailM / steeringRatio;

    /// <summary>From a caster split, N·m: Fz·q·Δν ÷ ratio; more caster on the left pulls right and is held with positive torque.</summary>
    /// <param name="wheelLoadN">Load of one front wheel, N.</param>
    /// <param name="hubOffsetM">Lateral offset of the wheel plane from the axis at hub height, m (not the scrub radius).</param>
    /// <param name="casterSplitDeg">Left less right, deg.</param>
    /// <param name="steeringRatio">On-centre ratio.</param>
    public static double FromCasterSplitNm(double wheelLoadN, double hubOffsetM, double casterSplitDeg, double steeringRatio) =>
        wheelLoadN * hubOffsetM * Toe.Radians(casterSplitDeg) / steeringRatio;
}
