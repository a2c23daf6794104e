namespace WearWatch.Diagnosis.Statistics;

/// <summary>Centre of estimates of unequal error that also differ among themselves, some of them grossly.</summary>
/// <param name="Centre">Robust centre with its standard error.</param>
/// <param name="BetweenSd">Standard deviation among sound members beyond their own errors.</param>
/// <param name="Count">Members.</param>
public sealed record PooledLocation(Estimate Centre, double BetweenSd, int Count)
{
    /// <summary>
    /// Bisquare M-estimate started at the median, the spread among members re-estimated each step from the median
    /// absolute deviation. A quarter of gross members on one side moves it by far less than it moves the mean.
    /// </summary>
    /// <param name="members">At least one; the order does not matter beyond rounding.</param>
    /// <param name="leastBetweenSd">Floor of the spread, in the unit of the members; above zero.</param>
    /// <remarks>Bisquare: Beaton and Tukey 1974; spread by moments as in DerSimonian and Laird, Control. Clin. Trials 7 (1986) 177, made robust.</remarks>
    public static PooledLocation Fit(IReadOnlyList<Estimate> members, double leastBetweenSd)
    {
        if (members.Count == 0) throw new ArgumentException("no members", nameof(members));
        var centre = WeightedMedian(members, leastBetweenSd);
        var between = leastBetweenSd;
        double sumWeights = 0, sumSquares = 0, spreadAt = centre;
        for (var step = 0; step < 60; step++)
        {
            // The spread moves little once the centre has settled, and costs most of the time.
            if (step == 0 || Math.Abs(centre - spreadAt) > 0.02 * between)
            {
                between = Math.Max(leastBetweenSd, Spread(members, centre, between));
                spreadAt = centre;
            }
            double sum = 0;
            sumWeights = sumSquares = 0;
            foreach (var m in members)
            {
                var variance = m.StandardError * m.StandardError + between * between;
                var w = RobustRegression.Weight((m.Value - centre) / Math.Sqrt(variance) * (RobustRegression.BisquareK / TuningK), RobustLoss.Bisquare) / variance;
                sum += w * m.Value;
                sumWeights += w;
                sumSquares += w * w * variance;
            }
            if (sumWeights <= 0) break;
            var next = sum / sumWeights;
            var done = Math.Abs(next - centre) < 1e-10 * (1 + Math.Abs(next));
            centre = next;
            if (done) break;
        }
        var error = sumWeights > 0 ? Math.Sqrt(sumSquares) / sumWeights : between;
        return new PooledLocation(new Estimate(centre, error), between, members.Count);
    }

    /// <summary>Tighter than the usual 4.685: the gross members here (misaligned vehicles) all lie on one side and near.</summary>
    private const double TuningK = 3.0;

    private static double WeightedMedian(IReadOnlyList<Estimate> members, double floor)
    {
        var sorted = members.OrderBy(m => m.Value).ThenBy(m => m.StandardError).Select(m => (m.Value, Weight: 1 / (m.StandardError * m.StandardError + floor * floor))).ToArray();
        var half = sorted.Sum(m => m.Weight) / 2;
        double reached = 0;
        for (var i = 0; i < sorted.Length; i++)
        {
            reached += sorted[i].Weight;
            if (reached > half * (1 + 1e-12)) return sorted[i].Value;
            if (reached >= half * (1 - 1e-12) && i + 1 < sorted.Length) return (sorted[i].Value + sorted[i + 1].Value) / 2;
        }
        return sorted[^1].Value;
    }

    /// <summary>Spread at which the median standardised deviation is what a normal law gives.</summary>
    private static double Spread(IReadOnlyList<Estimate> members, double centre, double start)
    {
        var total = members.Select(m => Math.Abs(m.Value - centre)).ToArray();
        double low = 0, high = Math.Max(start, 4 * Medians.MadToSd * total.Max() + 1e-12);
        var ratios = new double[total.Length];
        for (var step = 0; step < 24; step++)
        {
            var mid = (low + high) / 2;
            for (var i = 0; i < ratios.Length; i++) ratios[i] = total[i] / Math.Sqrt(members[i].StandardError * members[i].StandardError + mid * mid);
            if (Medians.MadToSd * Medians.Median(ratios) > 1) low = mid;
            else high = mid;
        }
        return (low + high) / 2;
    }
}
