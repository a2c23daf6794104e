using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Causes;

/// <summary>The joint verdict on one vehicle.</summary>
public sealed record Verdict
{
    /// <summary>Probability that at least one alignment quantity is beyond its tolerance.</summary>
    public required double MisalignedProbability { get; init; }
    /// <summary>Every cause considered, alignment quantities and look-alikes, most probable first.</summary>
    public required IReadOnlyList<Cause> Causes { get; init; }
    /// <summary>The most probable angle against its rivals, in words.</summary>
    public IReadOnlyList<string> Odds { get; init; } = [];
    /// <summary>Probability of misalignment by the tread alone and by the steering alone; null where one of them is missing or the case is clear.</summary>
    public (double Tread, double Steering)? ByWitness { get; init; }
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
/// <param name="Since">Since when, given that it is the cause; null for look-alikes and where nothing is dated.</param>
public sealed record Cause(
    Quantity Quantity, int? Axle, Side? Side, Interval Value, bool OutsideTolerance, double Probability, double? TolerancePlusMinus = null, Since? Since = null);

/// <summary>When a fault began: as likely before as after <see cref="Likely"/>, with a 90 % range; null where it may have been there before anything that was measured.</summary>
public sealed record Since(DateOnly? Likely, DateOnly? Earliest, DateOnly Latest)
{
    /// <param name="asOf">Day from which the onsets count back.</param>
    /// <param name="shares">Posterior share of each of <see cref="Wear.Onsets.DaysAgo"/>.</param>
    internal static Since Of(DateOnly asOf, IReadOnlyList<double> shares)
    {
        return new(Day(Ago(0.5)), Day(Ago(0.05)), Day(Ago(0.95)) ?? asOf);

        DateOnly? Day(double daysAgo) => double.IsFinite(daysAgo) ? asOf.AddDays(-(int)Math.Round(daysAgo)) : null;
        double Ago(double share)
        {
            var (total, before) = (shares.Sum(), 0.0);
            for (var o = 0; o < shares.Count; o++)
            {
                var here = shares[o] / total;
                var (latest, earliest) = Onsets.Stretch(o);
                // Within the first stretch the date is open, unless the fault is certain to have begun before it ends.
                if (before + here >= share && here > 0) return o == 0 ? (share > 0.9 ? latest : double.PositiveInfinity) : earliest - (share - before) / here * (earliest - latest);
                before += here;
            }
            return 0;
        }
    }
}

/// <summary>Something the data cannot say, why, and what would help.</summary>
public sealed record CannotTell(string What, string Because, string WouldHelp);
