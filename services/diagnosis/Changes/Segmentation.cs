namespace WearWatch.Diagnosis.Changes;

/// <summary>A stretch of the series without a sudden change: points From up to, not including, To.</summary>
/// <param name="From">First point.</param>
/// <param name="To">One past the last point.</param>
/// <param name="Sloped">The stretch drifts: a line was worth its penalty.</param>
public readonly record struct Segment(int From, int To, bool Sloped);

/// <summary>A series cut at its sudden changes.</summary>
/// <param name="Segments">In order of time; they cover the series.</param>
/// <param name="Cost">Sum of the segments' costs, slope penalties included, plus the penalty of each change.</param>
/// <param name="Evaluations">Segment costs that were computed, to compare methods.</param>
public sealed record Segmentation(IReadOnlyList<Segment> Segments, double Cost, long Evaluations)
{
    /// <summary>
    /// The cheapest of all ways to cut the series, found exactly: candidates that can never again be the last change are dropped.
    /// </summary>
    /// <param name="cost">Costs of the stretches.</param>
    /// <param name="penalty">Price of a change, in the unit of the cost; above zero.</param>
    /// <param name="leastPoints">Points a segment must have; at least one.</param>
    /// <remarks>
    /// PELT: Killick, Fearnhead and Eckley, J. Am. Stat. Assoc. 107 (2012) 1590. A stretch from s to T costs at least the floor of s to t
    /// plus the cheapest of t to T once that is long enough to be a segment, and a line if it must. So a candidate s whose value plus
    /// floor at t is above the best at t is never the last change from that length after t on; until then it stays.
    /// </remarks>
    public static Segmentation Pelt(SegmentCost cost, double penalty, int leastPoints = 1)
    {
        Check(penalty, leastPoints);
        var n = cost.Count;
        if (n < leastPoints) return new([], 0, 0);
        var (best, last) = Tables(n, penalty);
        var dropFrom = new int[n + 1];
        Array.Fill(dropFrom, int.MaxValue);
        var candidates = new int[n + 1];
        var levels = new double[n + 1];
        var (count, evaluations) = (0, 0L);
        var wait = double.IsPositiveInfinity(cost.SlopePenalty) ? leastPoints : Math.Max(leastPoints, cost.LeastSloped);
        for (var t = leastPoints; t <= n; t++)
        {
            if (best[t - leastPoints] < double.PositiveInfinity) candidates[count++] = t - leastPoints;
            var least = double.PositiveInfinity;
            var from = -1;
            for (var c = 0; c < count; c++)
            {
                var s = candidates[c];
                levels[c] = cost.Level(s, t);
                var value = best[s] + cost.Best(s, t, levels[c]) + penalty;
                if (value < least) (least, from) = (value, s);
            }
            evaluations += count;
            (best[t], last[t]) = (least, from);
            var kept = 0;
            for (var c = 0; c < count; c++)
            {
                var s = candidates[c];
                // The tolerance keeps what rounding alone would drop.
                // The floor is never above the level, which spares most of the lines.
                var bound = least + 1e-9 * Math.Abs(least);
                if (dropFrom[s] == int.MaxValue && best[s] + levels[c] > bound && best[s] + cost.Floor(s, t) > bound) dropFrom[s] = t + wait;
                if (dropFrom[s] > t + 1) candidates[kept++] = s;
            }
            count = kept;
        }
        return Read(cost, best, last, evaluations);
    }

    /// <summary>The same answer by looking at every last change of every stretch; the plain reference that PELT is held against.</summary>
    /// <remarks>Optimal partitioning: Jackson et al., IEEE Signal Process. Lett. 12 (2005) 105.</remarks>
    public static Segmentation OptimalPartition(SegmentCost cost, double penalty, int leastPoints = 1)
    {
        Check(penalty, leastPoints);
        var n = cost.Count;
        if (n < leastPoints) return new([], 0, 0);
        var (best, last) = Tables(n, penalty);
        var evaluations = 0L;
        for (var t = leastPoints; t <= n; t++)
        {
            for (var s = 0; s <= t - leastPoints; s++)
            {
                if (double.IsPositiveInfinity(best[s])) continue;
                evaluations++;
                var value = best[s] + cost.Best(s, t) + penalty;
                if (value < best[t]) (best[t], last[t]) = (value, s);
            }
        }
        return Read(cost, best, last, evaluations);
    }

    private static void Check(double penalty, int leastPoints)
    {
        if (!(penalty > 0)) throw new ArgumentOutOfRangeException(nameof(penalty), penalty, "a change must have a price");
        ArgumentOutOfRangeException.ThrowIfLessThan(leastPoints, 1);
    }

    private static (double[] Best, int[] Last) Tables(int n, double penalty)
    {
        var best = new double[n + 1];
        Array.Fill(best, double.PositiveInfinity);
        best[0] = -penalty;
        return (best, new int[n + 1]);
    }

    private static Segmentation Read(SegmentCost cost, double[] best, int[] last, long evaluations)
    {
        var segments = new List<Segment>();
        for (var to = cost.Count; to > 0; to = last[to]) segments.Add(new(last[to], to, cost.IsSloped(last[to], to)));
        segments.Reverse();
        return new(segments, best[cost.Count], evaluations);
    }
}
