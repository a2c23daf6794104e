namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// The first millimetre or two of a tread goes faster than the rest. Loss is therefore counted as a settled tread would
/// have lost it over the same distance.
/// </summary>
/// <remarks>That the first 1 to 2 mm are not typical: common practice, no source. Size and its spread from memory.</remarks>
internal static class RunningIn
{
    private const double Excess = 0.2, DepthMm = 1.5;

    /// <summary>Spread of the excess from tyre to tyre.</summary>
    public const double ExcessSd = 0.1;

    /// <summary>What a settled tread would have lost where this one lost so much since new, mm.</summary>
    /// <remarks>∫ dw / (1 + e·exp(−w/d)) = d·ln((exp(w/d) + e)/(1 + e)).</remarks>
    public static double SettledMm(double lossMm) =>
        lossMm <= 0 ? lossMm / (1 + Excess) : lossMm + DepthMm * Math.Log((1 + Excess * Math.Exp(-lossMm / DepthMm)) / (1 + Excess));

    /// <summary>How much of that hangs on the excess, mm per unit of it.</summary>
    public static double PerExcessMm(double lossMm) => DepthMm * (1 - Math.Exp(-Math.Max(0, lossMm) / DepthMm));
}
