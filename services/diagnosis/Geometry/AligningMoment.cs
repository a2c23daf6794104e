namespace WearWatch.Diagnosis.Geometry;

/// <summary>Brush model of a tyre at small slip.</summary>
/// <remarks>Pacejka, Tire and Vehicle Dynamics, 3rd ed. 2012, brush model.</remarks>
public static class AligningMoment
{
    /// <summary>Pneumatic trail, in the unit of the half contact length: a/3.</summary>
    public static double BrushTrail(double halfContactLength) => halfContactLength / 3;

    /// <summary>Cornering stiffness, N/rad: 2·c·a².</summary>
    /// <param name="treadStiffness">Lateral tread stiffness per length, N/m².</param>
    /// <param name="halfContactLengthM">m.</param>
    public static double BrushStiffnessNPerRad(double treadStiffness, double halfContactLengthM) =>
        2 * treadStiffness * halfContactLengthM * halfContactLengthM;

    /// <summary>Moment about the steering axis, N·m: side force × (pneumatic + mechanical trail).</summary>
    public static double AboutAxisNm(double sideForceN, double pneumaticTrailM, double mechanicalTrailM) =>
        sideForceN * (pneumaticTrailM + mechanicalTrailM);
}
