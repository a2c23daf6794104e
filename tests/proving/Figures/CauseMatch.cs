using WearWatch.Contracts.V1;
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

    public static bool Is(Cause cause, TrueQuantity truth, string signals)
    {
        var said = Case.WireName(cause.Quantity);
        if (said == truth.Quantity) return (!cause.HasAxle || truth.Axle is null || cause.Axle == truth.Axle) && Case.WireName(cause.Side) == truth.Side;
        var apart = signals == "torque" ? s_group[..2] : s_group;
        return apart.Contains(said) && apart.Contains(truth.Quantity);
    }

    /// <summary>Whether the largest true quantity is among the first causes named.</summary>
    public static bool Among(Case c, int first) => c.Diagnosis!.Causes.Take(first).Any(cause => Is(cause, c.Truth.Quantities[0], c.Truth.Signals));

    /// <summary>What the product says of exactly this quantity.</summary>
    public static Cause? Of(Case c, TrueQuantity truth) => c.Diagnosis?.Causes.FirstOrDefault(cause =>
        Case.WireName(cause.Quantity) == truth.Quantity && (!cause.HasAxle || truth.Axle is null || cause.Axle == truth.Axle) && Case.WireName(cause.Side) == truth.Side);
}
