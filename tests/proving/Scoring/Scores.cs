namespace WearWatch.Proving.Scoring;

/// <summary>The scores of design words: plain counting, NaN where there is nothing to count.</summary>
internal static class Scores
{
    /// <summary>Probability that a positive scores above a negative, ties counted half (Mann and Whitney 1947).</summary>
    public static double Auc(IReadOnlyList<(double Score, bool Positive)> items)
    {
        var order = items.OrderBy(i => i.Score).ToArray();
        double positives = items.Count(i => i.Positive), negatives = items.Count - positives;
        if (positives == 0 || negatives == 0) return double.NaN;
        double rankSum = 0;
        for (var from = 0; from < order.Length;)
        {
            var to = from;
            while (to < order.Length && order[to].Score == order[from].Score) to++;
            var rank = (from + 1 + to) / 2.0; // mean rank of the tied
            for (var i = from; i < to; i++) if (order[i].Positive) rankSum += rank;
            from = to;
        }
        return (rankSum - positives * (positives + 1) / 2) / (positives * negatives);
    }

    /// <summary>Positives among the first k of one fleet, k = number of positives; those tied at the k-th place count by their share.</summary>
    public static (double Hits, int K) FirstK(IReadOnlyList<(double Score, bool Positive)> items)
    {
        var k = items.Count(i => i.Positive);
        if (k == 0) return (0, 0);
        var last = items.Select(i => i.Score).OrderDescending().ElementAt(k - 1);
        var above = items.Count(i => i.Score > last);
        var tied = items.Where(i => i.Score == last).ToArray();
        return (items.Count(i => i.Score > last && i.Positive) + (k - above) * tied.Count(i => i.Positive) / (double)tied.Length, k);
    }

    /// <summary>Mean over ten equal-count bins of |mean probability − share that came true|, weighted by count.</summary>
    public static double CalibrationError(IReadOnlyList<(double Probability, bool True)> items, int bins = 10)
    {
        if (items.Count < bins) return double.NaN;
        var order = items.OrderBy(i => i.Probability).ToArray();
        double sum = 0;
        for (var b = 0; b < bins; b++)
        {
            var bin = order[(b * order.Length / bins)..((b + 1) * order.Length / bins)];
            sum += Math.Abs(bin.Sum(i => i.Probability - (i.True ? 1 : 0)));
        }
        return sum / order.Length;
    }

    public static double Share<T>(IEnumerable<T> items, Func<T, bool> holds)
    {
        int n = 0, held = 0;
        foreach (var item in items)
        {
            n++;
            if (holds(item)) held++;
        }
        return n == 0 ? double.NaN : (double)held / n;
    }

    public static double Median(IEnumerable<double> values)
    {
        var sorted = values.Where(v => !double.IsNaN(v)).Order().ToArray();
        return sorted.Length == 0 ? double.NaN : sorted.Length % 2 == 1 ? sorted[sorted.Length / 2] : (sorted[sorted.Length / 2 - 1] + sorted[sorted.Length / 2]) / 2;
    }

    public static double Mean(IEnumerable<double> values)
    {
        var known = values.Where(v => !double.IsNaN(v)).ToArray();
        return known.Length == 0 ? double.NaN : known.Average();
    }

    /// <summary>1 − worth of the first k of a list ÷ worth of the best k, summed over fleets; k = vehicles worth more than nothing.</summary>
    public static double Regret(IReadOnlyList<IReadOnlyList<double>> listedWorths)
    {
        double got = 0, best = 0;
        foreach (var list in listedWorths)
        {
            var k = list.Count(w => w > 0);
            got += list.Take(k).Sum();
            best += list.Where(w => w > 0).Sum();
        }
        return best > 0 ? 1 - got / best : double.NaN;
    }
}
