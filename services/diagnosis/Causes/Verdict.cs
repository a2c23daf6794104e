using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Causes;

/// <summary>The joint verdict on one vehicle.</summary>
public sealed record Verdict
{
    /// <summary>Probability that at least one alignment quantity is beyond its tolerance.</summary>
    public required double MisalignedProbability { get; init; }
    /// <summary>Every cause considered, alignment quantities and look-alikes, most probable first.</summary>
    public required IReadOnlyList<Cause> Causes { get; init; }
    public IReadOnlyList<CannotTell> CannotTell { get; init; } = [];
    /// <summary>What an alignment would save under each story and magnitude, for the cost of waiting; the rest of the probability saves nothing.</summary>
    public IReadOnlyList<StoryEffect> Effects { get; init; } = [];
}

/// <param name="Quantity">What.</param>
/// <param name="Axle">Axle it belongs to; null for the whole vehicle.</param>
/// <param name="Side">Wheel it belongs to; null for the axle.</param>
/// <param name="Value">Posterior mean and 90 % interval, given that it is the cause, in the quantity's unit.</param>
/// <param name="OutsideTolerance">Whether the value lies beyond tolerance.</param>
/// <param name="Probability">Posterior probability of this story.</param>
/// <param name="TolerancePlusMinus">The tolerance used, in the same unit; null for look-alikes.</param>
public sealed record Cause(Quantity Quantity, int? Axle, Side? Side, Interval Value, bool OutsideTolerance, double Probability, double? TolerancePlusMinus = null);

/// <summary>Something the data cannot say, why, and what would help.</summary>
public sealed record CannotTell(string What, string Because, string WouldHelp);
