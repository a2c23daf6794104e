namespace WearWatch.Diagnosis.Geometry;

/// <summary>Toe in its three customary units: degrees, mm per m, and mm across a reference diameter. Toe is positive inward.</summary>
public static class Toe
{
    /// <summary>Small-angle slope (mm per m, equal to mrad) as an angle, deg.</summary>
    /// <param name="mmPerM">mm per m, within ±100.</param>
    /// <remarks>1 mm/m = 1 mrad (small-angle convention of the trade).</remarks>
    public static double DegreesFromMmPerM(double mmPerM) => mmPerM * 1e-3 * 180 / Math.PI;

    /// <summary>Angle as a slope, mm per m.</summary>
    /// <param name="degrees">deg, within ±10.</param>
    public static double MmPerM(double degrees) => 1000 * Math.Tan(Radians(degrees));

    /// <summary>Toe across a reference diameter, mm: D·tan(toe).</summary>
    /// <param name="degrees">Toe, deg.</param>
    /// <param name="diameterMm">Diameter at which the distance is taken, mm; a toe in mm means nothing without it.</param>
    public static double Mm(double degrees, double diameterMm) => diameterMm * Math.Tan(Radians(degrees));

    /// <summary>Toe in deg from a distance across a reference diameter.</summary>
    public static double DegreesFromMm(double mm, double diameterMm) => Math.Atan(mm / diameterMm) * 180 / Math.PI;

    internal static double Radians(double degrees) => degrees * Math.PI / 180;
}
