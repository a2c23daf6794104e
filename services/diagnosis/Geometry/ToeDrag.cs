namespace WearWatch.Diagnosis.Geometry;

/// <summary>Rolling drag of tyres that run at a steady slip angle.</summary>
public static class ToeDrag
{
    /// <summary>Litres per 100 km for each newton of drag: engine efficiency 0.38, 35.8 MJ/L of diesel.</summary>
    public const double LitresPer100KmPerN = 100e3 / (0.38 * 35.8e6);

    /// <summary>kWh per 100 km for each newton of drag, from the battery: drive efficiency 0.88 (from memory).</summary>
    public const double KWhPer100KmPerN = 100e3 / (0.88 * 3.6e6);

    /// <summary>Drag of one tyre, N: C·α².</summary>
    /// <param name="tyreStiffnessNPerRad">Cornering stiffness of one tyre, N/rad.</param>
    /// <param name="slipDeg">Steady slip angle, deg, within about ±3.</param>
    public static double TyreN(double tyreStiffnessNPerRad, double slipDeg)
    {
        var alpha = Toe.Radians(slipDeg);
        return tyreStiffnessNPerRad * alpha * alpha;
    }

    /// <summary>Drag of an axle of two tyres with a total toe error, N: C·T²/2.</summary>
    public static double AxleN(double tyreStiffnessNPerRad, double totalToeDeg) => 2 * TyreN(tyreStiffnessNPerRad, totalToeDeg / 2);

    /// <summary>Steady driving resistance on the level, N: rolling plus air.</summary>
    /// <param name="massKg">kg.</param>
    /// <param name="rollingCoefficient">0.004 to 0.015.</param>
    /// <param name="dragAreaM2">Drag coefficient × frontal area, m².</param>
    /// <param name="speedMS">m/s.</param>
    /// <param name="airDensity">kg/m³.</param>
    public static double RoadLoadN(double massKg, double rollingCoefficient, double dragAreaM2, double speedMS, double airDensity = 1.2) =>
        massKg * RoadBank.Gravity * rollingCoefficient + airDensity / 2 * dragAreaM2 * speedMS * speedMS;
}
