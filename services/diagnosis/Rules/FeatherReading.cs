using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>Feather of one tyre from its measured rib edges and the hand rubs together.</summary>
public static class FeatherReading
{
    /// <summary>
    /// Step of the rib edges, mm, positive with the sharp edge inboard (toe-in). A hand rub counts as a rough reading of
    /// the step a hand can feel; both kinds are weighed by their errors. Null when neither was taken.
    /// </summary>
    public static Estimate? Of(TyreFigures tyre)
    {
        var felt = Felt(tyre);
        if (tyre.FeatherMm is not { StandardError: > 0 } measured || felt is not { } rubs) return tyre.FeatherMm ?? felt;
        var (a, b) = (1 / (measured.StandardError * measured.StandardError), 1 / (rubs.StandardError * rubs.StandardError));
        return new((a * measured.Value + b * rubs.Value) / (a + b), 1 / Math.Sqrt(a + b));
    }

    /// <summary>The hand rubs alone, mm.</summary>
    private static Estimate? Felt(TyreFigures tyre)
    {
        if (tyre.FeltMm is not null) return tyre.FeltMm;
        var rubs = tyre.RubsCatchingOutward + tyre.RubsCatchingInward + tyre.RubsCatchingNeither;
        if (rubs == 0) return null;
        var net = (tyre.RubsCatchingOutward - tyre.RubsCatchingInward) / (double)rubs;
        return new(net * RuleLimits.FeltStep.Value, RuleLimits.FeltStepError.Value / Math.Sqrt(rubs));
    }

    /// <summary>Whether the edges were looked at and found clean.</summary>
    public static bool Clean(TyreFigures? tyre) =>
        tyre is not null && Of(tyre) is { } step && Math.Abs(step.Value) + step.StandardError < RuleLimits.Feather.Value;
}
