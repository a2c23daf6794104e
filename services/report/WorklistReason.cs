using WearWatch.Contracts.V1;

namespace WearWatch.Report;

/// <summary>The one plain sentence that says why a vehicle stands where it does.</summary>
internal static class WorklistReason
{
    /// <summary>The strongest finding that an alignment mends.</summary>
    public static Finding? LeadingFinding(Contracts.V1.Diagnosis d) => d.Findings.Where(f => f.AlignmentMends).MaxBy(f => f.Strength);

    public static string Why(Contracts.V1.Diagnosis d, ListedBecause because)
    {
        var cause = d.Causes.FirstOrDefault(c => c.OutsideTolerance && c.Quantity is > Quantity.Unspecified and < Quantity.Conicity);
        var start = because == ListedBecause.Pull && d.SteeringPull is { } pull
            ? FormattableString.Invariant($"The driver has to hold {Math.Abs(pull.Value):0.0} N·m against a pull to the {(pull.Value > 0 ? "right" : "left")} ({Math.Abs(pull.Low):0.0} to {Math.Abs(pull.High):0.0}); ")
            : "";
        if (cause is not null && d.MisalignedProbability >= 0.2)
        {
            var share = cause.Probability >= 0.5 * d.MisalignedProbability ? "most likely" : "among several causes";
            return FormattableString.Invariant($"{start}{share} {Name(cause)} {cause.Value:0.00} {cause.Unit} ({cause.Low:0.00} to {cause.High:0.00}), probability {cause.Probability:0.00}.") is var text
                ? char.ToUpperInvariant(text[0]) + text[1..] + Sentence(d)
                : "";
        }
        return FormattableString.Invariant($"Both witnesses agree with a vehicle in order: probability of misalignment {d.MisalignedProbability:0.00}; expected cost of waiting {d.CostOfWaitingPerWeek?.Low ?? 0:0} to {d.CostOfWaitingPerWeek?.High ?? 0:0} {d.CostOfWaitingPerWeek?.Unit} a week.");
    }

    private static string Sentence(Contracts.V1.Diagnosis d) => LeadingFinding(d) is { } finding ? " " + finding.Sentence : "";

    private static string Name(Cause cause) => cause.Quantity switch
    {
        Quantity.FrontTotalToe => "front total toe",
        Quantity.RearTotalToe => $"total toe of axle {cause.Axle}",
        Quantity.Camber => $"camber of {cause.Axle}{(cause.Side == Side.Left ? 'L' : 'R')}",
        Quantity.CamberSplit => "front camber, left less right,",
        Quantity.CasterSplit => "front caster, left less right,",
        Quantity.Thrust => cause.HasAxle ? $"direction of axle {cause.Axle}" : "direction of the rear axle",
        Quantity.TandemSkew => "angle between the tandem's axles",
        _ => "direction of the trailer's axles",
    };
}
