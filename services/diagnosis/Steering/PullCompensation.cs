namespace WearWatch.Diagnosis.Steering;

/// <summary>
/// Recognises electric steering that takes a steady pull off the driver's hands: after a turn the driver's torque starts at the
/// pull and decays towards zero within at most 45 s (US 6,965,820; US 8,437,913).
/// </summary>
internal static class PullCompensation
{
    private const int LeastTurns = 3;
    private const double EarlyS = 10, LateS = 75; // from memory
    private const double LeastDrop = 0.1;         // N·m, below it nothing can be told from friction (from memory)

    /// <summary>
    /// First form of the test: over the turns followed by straight driving, the torque of the first 10 s less that of 45 to 75 s
    /// after; recognised when the mean drop exceeds three of its standard errors and 0.1 N·m, and less than half of the early torque is left.
    /// </summary>
    public static bool Recognised(GatedStream stream)
    {
        var drops = new List<double>();
        var (earlySum, lateSum) = (0.0, 0.0);
        foreach (var turnEnd in TurnEnds(stream))
        {
            if (Mean(stream, turnEnd, 0, EarlyS) is not { } early) continue;
            if (Mean(stream, turnEnd, StraightGates.CompensationS, LateS) is not { } late) continue;
            drops.Add(early - late);
            earlySum += early;
            lateSum += late;
        }
        if (drops.Count < LeastTurns) return false;
        var mean = drops.Average();
        var error = Math.Sqrt(drops.Sum(d => (d - mean) * (d - mean)) / (drops.Count - 1) / drops.Count);
        return Math.Abs(mean) > Math.Max(3 * error, LeastDrop) && Math.Abs(lateSum) < 0.5 * Math.Abs(earlySum);
    }

    /// <summary>Takes the 45 s after each turn out of the straight driving.</summary>
    public static void DropAfterTurns(GatedStream stream)
    {
        foreach (var turnEnd in TurnEnds(stream).ToList())
            for (var i = turnEnd; i < stream.Blocks.Count && SecondsAfter(stream, turnEnd, i) < StraightGates.CompensationS; i++)
                stream.Drop(i);
    }

    /// <summary>First block after each turn.</summary>
    internal static IEnumerable<int> TurnEnds(GatedStream stream)
    {
        for (var i = 1; i < stream.Blocks.Count; i++)
            if (Turning(stream, i - 1) && !Turning(stream, i) && stream.Blocks.Joined[i]) yield return i;
    }

    internal static bool Turning(GatedStream stream, int block) => Math.Abs(stream.Yaw(block)) > StraightGates.TurnDegS;

    private static double SecondsAfter(GatedStream stream, int turnEnd, int block) =>
        (stream.Blocks.StartTicks[block] - stream.Blocks.StartTicks[turnEnd]) / (double)TimeSpan.TicksPerSecond;

    private static double? Mean(GatedStream stream, int turnEnd, double from, double to)
    {
        var (sum, count) = (0.0, 0);
        var torque = stream.Blocks.Mean(SteeringChannel.DriverTorque);
        for (var i = turnEnd; i < stream.Blocks.Count && SecondsAfter(stream, turnEnd, i) < to && !Turning(stream, i); i++)
        {
            if (SecondsAfter(stream, turnEnd, i) < from || stream.Mode(i) is null || torque.IsEmpty || float.IsNaN(torque[i])) continue;
            sum += torque[i];
            count++;
        }
        return count >= 3 ? sum / count : null;
    }
}
