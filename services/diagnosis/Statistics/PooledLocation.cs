using System.Runtime.CompilerServices;

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
    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    public static PooledLocation Fit(IReadOnlyList<Estimate> members, double leastBetweenSd)
    {
        var n = members.Count;
        if (n == 0) throw new ArgumentException("no members", nameof(members));
        var value = new double[n];
        var variance = new double[n];
        for (var i = 0; i < n; i++) (value[i], variance[i]) = (members[i].Value, members[i].StandardError * members[i].StandardError);
        var centre = WeightedMedian(value, variance, leastBetweenSd);
        var between = leastBetweenSd;
        double sumWeights = 0, sumSquares = 0, spreadAt = centre;
        for (var step = 0; step < 60; step++)
        {
            // The spread moves little once the centre has settled.
            if (step == 0 || Math.Abs(centre - spreadAt) > 0.02 * between)
            {
                between = Math.Max(leastBetweenSd, Spread(value, variance, centre));
                spreadAt = centre;
            }
            double sum = 0;
            sumWeights = sumSquares = 0;
            for (var i = 0; i < n; i++)
            {
                var total = variance[i] + between * between;
                var off = value[i] - centre;
                var t = 1 - off * off / (TuningK * TuningK * total);
                if (t <= 0) continue;
                var w = t * t / total;
                sum += w * value[i];
                sumWeights += w;
                sumSquares += w * w * total;
            }
            if (sumWeights <= 0) break;
            var next = sum / sumWeights;
            var done = Math.Abs(next - centre) < 1e-10 * (1 + Math.Abs(next));
            centre = next;
            if (done) break;
        }
        var error = sumWeights > 0 ? Math.Sqrt(sumSquares) / sumWeights : between;
        return new PooledLocation(new Estimate(centre, error), between, n);
    }

    /// <summary>Tighter than the usual 4.685: the gross members here (misaligned vehicles) all lie on one side and near.</summary>
    private const double TuningK = 3.0;

    private static double WeightedMedian(double[] value, double[] variance, double floor)
    {
        var sorted = (double[])value.Clone();
        var weights = new double[value.Length];
        for (var i = 0; i < weights.Length; i++) weights[i] = 1 / (variance[i] + floor * floor);
        Array.Sort(sorted, weights);
        var half = weights.Sum() / 2;
        double reached = 0;
        for (var i = 0; i < sorted.Length; i++)
        {
            reached += weights[i];
            if (reached > half * (1 + 1e-12)) return sorted[i];
            if (reached >= half * (1 - 1e-12) && i + 1 < sorted.Length) return (sorted[i] + sorted[i + 1]) / 2;
        }
        return sorted[^1];
    }

    /// <summary>
    /// Spread at which the median standardised deviation is what a normal law gives. A member stands beyond that median while
    /// the squared spread is below its (1.4826 × deviation)² less its own variance: the spread sought is the median of those.
    /// </summary>
    private static double Spread(double[] value, double[] variance, double centre)
    {
        var n = value.Length;
        var needed = new double[n];
        for (var i = 0; i < n; i++)
        {
            var deviation = Medians.MadToSd * (value[i] - centre);
            needed[i] = deviation * deviation - variance[i];
        }
        return Math.Sqrt(Math.Max(0, Selection.Median(needed)));
    }
}
