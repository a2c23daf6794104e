namespace WearWatch.Diagnosis.Geometry;

/// <summary>Levers of the contact patch about the steering axis.</summary>
public static class Trail
{
    /// <summary>Mechanical trail, mm: wheel radius × tan(caster).</summary>
    /// <param name="radiusM">Loaded radius, m, 0.25 to 0.6.</param>
    /// <param name="casterDeg">Caster, deg, positive with the axis leaning rearward at its top.</param>
    public static double MechanicalMm(double radiusM, double casterDeg) => 1000 * radiusM * Math.Tan(Toe.Radians(casterDeg));

    /// <summary>Scrub radius, mm, positive with the contact centre outboard of the steering axis: q − R·tan(inclination).</summary>
    /// <param name="hubOffsetMm">Lateral offset of the wheel centre plane from the axis at hub height, mm.</param>
    /// <param name="radiusMm">Loaded radius, mm.</param>
    /// <param name="inclinationDeg">Steering axis inclination, deg, 0 to 18.</param>
    public static double ScrubRadiusMm(double hubOffsetMm, double radiusMm, double inclinationDeg) =>
        hubOffsetMm - radiusMm * Math.Tan(Toe.Radians(inclinationDeg));

    /// <summary>Set-back of one front wheel as an angle, deg: atan(longitudinal offset ÷ track).</summary>
    public static double SetBackDeg(double offsetMm, double trackMm) => Math.Atan(offsetMm / trackMm) * 180 / Math.PI;
}
