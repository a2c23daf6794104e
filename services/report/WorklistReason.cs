using System.Globalization;
using WearWatch.Contracts.V1;

namespace WearWatch.Report;

/// <summary>The one plain sentence that says why a vehicle stands where it does, and what to check first.</summary>
internal static class WorklistReason
{
    /// <summary>Below this probability no angle is named in the list.</summary>
    private const double NamedFrom = 0.2;

    public static string Why(Contracts.V1.Diagnosis d, ListedBecause because)
    {
        var pull = because == ListedBecause.Pull && d.SteeringPull is { } p
            ? string.Create(CultureInfo.InvariantCulture, $"the driver holds {Math.Abs(p.Value):0.0} N·m against a pull to the {(p.Value > 0 ? "right" : "left")} (90 % {Math.Min(Math.Abs(p.Low), Math.Abs(p.High)):0.0} to {Math.Max(Math.Abs(p.Low), Math.Abs(p.High)):0.0}); ")
            : "";
        if (Leading(d) is not { } cause)
            return string.Create(CultureInfo.InvariantCulture, $"Nothing stands out beyond {d.MisalignedProbability:0.00} probability of misalignment; waiting costs {Rounded(d.CostOfWaitingPerWeek?.Low)} to {Rounded(d.CostOfWaitingPerWeek?.High)} {d.CostOfWaitingPerWeek?.Unit} a week.");
        var share = cause.Probability >= 0.5 * d.MisalignedProbability ? "most likely" : "among several causes";
        var text = string.Create(CultureInfo.InvariantCulture, $"{pull}{share} {Name(cause)} {cause.Value:0.00} {cause.Unit} (90 % {cause.Low:0.00} to {cause.High:0.00}), probability {cause.Probability:0.00}.");
        return char.ToUpperInvariant(text[0]) + text[1..] + (Supporting(d, cause) is { } finding ? $" {finding.Sentence}" : "");
    }

    public static string FirstCheck(Contracts.V1.Diagnosis d) => Leading(d) is not { } cause ? ""
        : Supporting(d, cause)?.FirstCheck is { Length: > 0 } check ? check
        : $"Cold pressures and matching tyres first; then bearings, joints and bushes of {(cause.HasAxle ? $"axle {cause.Axle}" : "the axle")}; then {Name(cause).TrimEnd(',')}.";

    /// <summary>The most probable angle, where it is probable enough to be named.</summary>
    private static Cause? Leading(Contracts.V1.Diagnosis d) =>
        d.MisalignedProbability >= NamedFrom ? d.Causes.FirstOrDefault(c => c.OutsideTolerance && c.Quantity is > Quantity.Unspecified and < Quantity.Conicity) : null;

    /// <summary>The strongest finding that speaks for this very cause.</summary>
    private static Finding? Supporting(Contracts.V1.Diagnosis d, Cause cause) => d.Findings
        .Where(f => f.Causes.Take(2).Contains(cause.Quantity) && (!f.HasAxle || !cause.HasAxle || f.Axle == cause.Axle || cause.Quantity == Quantity.TandemSkew) && (f.Side == Side.Unspecified || cause.Side == Side.Unspecified || f.Side == cause.Side))
        .MaxBy(f => f.Strength);

    private static string Rounded(double? money) => ((money is > -0.5 and < 0 ? 0 : money) ?? 0).ToString("0", CultureInfo.InvariantCulture);

    private static string Name(Cause cause) => cause.Quantity switch
    {
        Quantity.FrontTotalToe => "front total toe",
        Quantity.RearTotalToe => $"total toe of axle {cause.Axle}",
        Quantity.Camber => $"camber of {cause.Axle}{(cause.Side == Side.Left ? 'L' : 'R')}",
        Quantity.CamberSplit => "front camber, left less right,",
        Quantity.CasterSplit => "front caster, left less right,",
        Quantity.Thrust => "direction of the rear axle (+ left)",
        Quantity.TandemSkew => $"angle between axles {cause.Axle} and {cause.Axle + 1}",
        _ => "direction of the trailer's axles (+ left)",
    };
}
