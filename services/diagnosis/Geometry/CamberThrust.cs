namespace WearWatch.Diagnosis.Geometry;

/// <summary>Side force of a leaning tyre.</summary>
public static class CamberThrust
{
    /// <summary>Side force, N, toward the lean: Cγ·γ.</summary>
    /// <param name="camberStiffnessNPerRad">N/rad; radial tyres 0.05 to 0.10 of the cornering stiffness (from memory).</param>
    /// <param name="camberDeg">deg.</param>
    public static double ForceN(double camberStiffnessNPerRad, double camberDeg) => camberStiffnessNPerRad * Toe.Radians(camberDeg);
}
