using WearWatch.Proving.Run;

namespace WearWatch.Proving.Figures;

/// <summary>When a cause that the product names is the true quantity.</summary>
internal static class CauseMatch
{
    /// <summary>
    /// Caster split and conicity pull alike and wear nothing, unless tyres are exchanged left to right, which nobody in the
    /// simulated fleets does: one group. Camber split leaves wear too and belongs to them only where no torque tells the pull.
    /// </summary>
    private static readonly string[] s_group = ["caster_split", "conicity", "camber_split"];

    public static bool Is(SaidCause said, TrueQuantity truth, string signals)
    {
        if (said.Quantity == truth.Quantity) return Same(said, truth);
        var apart = signals == "torque" ? s_group[..2] : s_group;
        return apart.Contains(said.Quantity) && apart.Contains(truth.Quantity);
    }

    private static bool Same(SaidCause said, TrueQuantity truth) =>
        said.Quantity == truth.Quantity && (said.Axle is null || truth.Axle is null || said.Axle == truth.Axle) && said.Side == truth.Side;

    /// <summary>Whether the largest true quantity is among the first causes named.</summary>
    public static bool Among(Case c, IReadOnlyList<SaidCause> causes, int first) => causes.Take(first).Any(cause => Is(cause, c.Truth.Quantities[0], c.Truth.Signals));

    /// <summary>What is said of exactly this quantity.</summary>
    public static SaidCause? Of(IReadOnlyList<SaidCause> causes, TrueQuantity truth) => causes.FirstOrDefault(cause => Same(cause, truth));
}
