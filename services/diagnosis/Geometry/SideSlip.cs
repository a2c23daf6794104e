namespace WearWatch.Diagnosis.Geometry;

/// <summary>Side slip as plate testers show it.</summary>
public static class SideSlip
{
    /// <summary>Sideways travel, m per km (mm per m): 1000·tan(angle).</summary>
    /// <param name="degrees">deg.</param>
    public static double MPerKm(double degrees) => 1000 * Math.Tan(Toe.Radians(degrees));
}
