using MathNet.Numerics;

namespace WearWatch.Diagnosis.Geometry;

/// <summary>How a steady slip angle adds to the wear of ordinary service.</summary>
/// <remarks>Frictional-energy wear at controlled slip grows with the square of slip: Schallamach &amp; Turner, Wear 3 (1960).</remarks>
public static class WearMultiplier
{
    /// <summary>Wear rate over that of the same tyre in alignment: 1 + (α/σα)^n.</summary>
    /// <param name="slipDeg">Steady slip angle from misalignment, deg.</param>
    /// <param name="serviceSlipDeg">RMS slip angle of ordinary service, deg, 0.1 to 0.5.</param>
    /// <param name="exponent">2 by frictional energy; 2 to 3 observed.</param>
    public static double Of(double slipDeg, double serviceSlipDeg, double exponent = 2) => 1 + Math.Pow(Math.Abs(slipDeg) / serviceSlipDeg, exponent);

    /// <summary>Signed wear E[(z+n)|z+n|] of a steady slip z under service slip n ~ N(0,1): 4φ(0)·z near zero, z² far out.</summary>
    /// <param name="z">Steady slip over RMS service slip.</param>
    /// <remarks>(1+z²)·erf(z/√2) + 2z·φ(z), by parts.</remarks>
    public static double Signed(double z) => (1 + z * z) * SpecialFunctions.Erf(z / Math.Sqrt(2)) + 2 * z * Density(z);

    /// <summary>Derivative of <see cref="Signed"/>: 2·E|z+n|.</summary>
    public static double SignedSlope(double z) => 2 * (z * SpecialFunctions.Erf(z / Math.Sqrt(2)) + 2 * Density(z));

    private static double Density(double z) => Math.Exp(-z * z / 2) / Math.Sqrt(2 * Math.PI);
}
