namespace WearWatch.Diagnosis.Geometry;

/// <summary>Angle between the two axles of a tandem.</summary>
public static class TandemScrub
{
    /// <summary>Tandem skew, deg: atan(ΔL ÷ W).</summary>
    /// <param name="spacingDifferenceMm">Right less left axle-to-axle spacing, mm.</param>
    /// <param name="measuringWidthMm">Lateral distance between the measuring points, mm.</param>
    public static double AngleDeg(double spacingDifferenceMm, double measuringWidthMm) =>
        Math.Atan(spacingDifferenceMm / measuringWidthMm) * 180 / Math.PI;

    /// <summary>Effective wheelbase of a vehicle with a rear tandem, m: L + s²/(4L)·(1 + Cr/Cf).</summary>
    /// <param name="wheelbaseM">Front axle to the middle of the tandem, m.</param>
    /// <param name="spacingM">Spacing of the tandem, m.</param>
    /// <param name="rearToFrontStiffness">Cornering stiffness of the whole tandem over that of the front axle.</param>
    /// <remarks>Gillespie &amp; Winkler 1978; Winkler, Vehicle System Dynamics 29 (1998) 141.</remarks>
    public static double EffectiveWheelbaseM(double wheelbaseM, double spacingM, double rearToFrontStiffness) =>
        wheelbaseM + spacingM * spacingM / (4 * wheelbaseM) * (1 + rearToFrontStiffness);
}
