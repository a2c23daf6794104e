namespace WearWatch.Diagnosis.Steering;

/// <summary>How the chunks of a stream follow each other: what its clock, its rate and its unit of torque did. Adds up over streams.</summary>
public sealed record StreamClock
{
    /// <summary>Times the clock went back by more than half a second; rows under a time seen before are left out.</summary>
    public int Backwards { get; init; }
    /// <summary>Rows left out because their time had been before, s.</summary>
    public double RepeatedS { get; init; }
    /// <summary>Gaps between chunks.</summary>
    public int Gaps { get; init; }
    /// <summary>Time that no row covers, s.</summary>
    public double MissingS { get; init; }
    /// <summary>Gaps of more than a day, which no trip has: the clock was set.</summary>
    public int Jumps { get; init; }
    /// <summary>Times the rate changed.</summary>
    public int RateChanges { get; init; }
    /// <summary>Times the declared unit of torque changed.</summary>
    public int TorqueUnitChanges { get; init; }

    private const double TrueGapS = 0.5, LongestPauseS = 86_400;

    /// <param name="chunks">In order of sequence.</param>
    internal static StreamClock Of(IReadOnlyList<SteeringColumns> chunks)
    {
        var clock = new StreamClock();
        var latest = chunks.Count > 0 ? chunks[0].End : default;
        for (var i = 1; i < chunks.Count; i++)
        {
            var (before, next) = (chunks[i - 1], chunks[i]);
            var gap = (next.Start - before.End).TotalSeconds;
            if (gap < -TrueGapS) clock = clock with { Backwards = clock.Backwards + 1 };
            if (gap > TrueGapS && gap > 1.5 / before.RateHz)
            {
                clock = clock with { Gaps = clock.Gaps + 1 };
                clock = gap > LongestPauseS ? clock with { Jumps = clock.Jumps + 1 } : clock with { MissingS = clock.MissingS + gap };
            }
            var again = Math.Min((latest - next.Start).TotalSeconds, (next.End - next.Start).TotalSeconds);
            if (again > TrueGapS) clock = clock with { RepeatedS = clock.RepeatedS + again };
            if (next.RateHz != before.RateHz) clock = clock with { RateChanges = clock.RateChanges + 1 };
            if (next.TorqueUnit != before.TorqueUnit && next.Has(SteeringChannel.DriverTorque)) clock = clock with { TorqueUnitChanges = clock.TorqueUnitChanges + 1 };
            if (next.End > latest) latest = next.End;
        }
        return clock;
    }

    internal static StreamClock Sum(IEnumerable<StreamClock> clocks) => clocks.Aggregate(new StreamClock(), (a, b) => new()
    {
        Backwards = a.Backwards + b.Backwards,
        RepeatedS = a.RepeatedS + b.RepeatedS,
        Gaps = a.Gaps + b.Gaps,
        MissingS = a.MissingS + b.MissingS,
        Jumps = a.Jumps + b.Jumps,
        RateChanges = a.RateChanges + b.RateChanges,
        TorqueUnitChanges = a.TorqueUnitChanges + b.TorqueUnitChanges,
    });
}
