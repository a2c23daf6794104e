using System.Runtime.CompilerServices;

namespace WearWatch.Diagnosis.Statistics;

/// <summary>A solved line without its residuals.</summary>
internal readonly record struct LineFit(Estimate Slope, Estimate AtLast, double ChiSquare);

/// <summary>
/// The robust line of <see cref="CorrelatedLine"/> in linear time and without allocation. The covariance is a diagonal plus one
/// rank-one block a group, so its inverse is closed (Sherman and Morrison, Ann. Math. Statist. 21 (1950) 124) and every inner
/// product is a plain sum less one product a group.
/// </summary>
internal static class LineSolver
{
    private const int MaxSteps = 8;
    private const int OnStack = 64;

    /// <summary>Readings up to which the first slope is the median of all pairs.</summary>
    private const int MostAllPairs = 12;

    /// <summary>Null with fewer than two places.</summary>
    /// <param name="readings">In order of distance.</param>
    /// <param name="standardised">Receives the residuals in their own standard deviations.</param>
    /// <param name="start">A line near the solution (slope, and value at the last X) to begin from; without it the median of pair slopes.</param>
    public static LineFit? Fit(ReadOnlySpan<LineReading> readings, Span<double> standardised, (double Slope, double AtLast)? start = null)
    {
        var n = readings.Length;
        if (n < 2) return null;
        var x0 = readings[n - 1].X;
        var apart = false;
        foreach (ref readonly var r in readings) apart |= Math.Abs(r.X - x0) >= 1e-9;
        if (!apart) return null;
        Span<double> sd = n <= OnStack ? stackalloc double[n] : new double[n];
        Span<double> weights = n <= OnStack ? stackalloc double[n] : new double[n];
        Span<int> group = n <= OnStack ? stackalloc int[n] : new int[n];
        var groups = Groups(readings, group);
        for (var i = 0; i < n; i++) (sd[i], weights[i]) = (Math.Sqrt(readings[i].Variance + readings[i].GroupVariance), 1);
        if (n > 3)
        {
            var (slope, at) = start ?? MedianLine(readings, x0);
            for (var i = 0; i < n; i++) standardised[i] = (readings[i].Y - at - slope * (readings[i].X - x0)) / sd[i];
            Reweigh(standardised, weights);
        }
        var fit = Solve(readings, weights, group, groups, x0, sd, standardised);
        for (var step = 0; n > 3 && step < MaxSteps && Reweigh(standardised, weights); step++)
            fit = Solve(readings, weights, group, groups, x0, sd, standardised);
        return fit;
    }

    /// <summary>Numbers the groups 0, 1, … in order of appearance; a reading of no group, or whose group has no error, gets −1.</summary>
    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    private static int Groups(ReadOnlySpan<LineReading> readings, Span<int> group)
    {
        var groups = 0;
        for (var i = 0; i < readings.Length; i++)
        {
            group[i] = -1;
            if (readings[i].Group < 0 || !(readings[i].GroupVariance > 0)) continue;
            for (var j = 0; j < i && group[i] < 0; j++)
                if (readings[j].Group == readings[i].Group) group[i] = group[j];
            if (group[i] < 0) group[i] = groups++;
        }
        return groups;
    }

    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    private static (double Slope, double AtLast) MedianLine(ReadOnlySpan<LineReading> readings, double x0)
    {
        var n = readings.Length;
        // Of many readings each is paired with the one half the way on (Theil's incomplete method, 1950): the start need not be more.
        var half = n > MostAllPairs ? n / 2 : 1;
        var most = n > MostAllPairs ? n - half : n * (n - 1) / 2;
        Span<double> slopes = most <= 512 ? stackalloc double[most] : new double[most];
        var count = 0;
        for (var i = 0; i < n; i++)
            for (var j = i + half; j < (half > 1 ? Math.Min(n, i + half + 1) : n); j++)
                if (readings[i].X != readings[j].X) slopes[count++] = (readings[j].Y - readings[i].Y) / (readings[j].X - readings[i].X);
        var slope = count > 0 ? Selection.Median(slopes[..count]) : (readings[n - 1].Y - readings[0].Y) / Math.Max(1e-9, readings[n - 1].X - readings[0].X);
        Span<double> rest = n <= OnStack ? stackalloc double[n] : new double[n];
        for (var i = 0; i < n; i++) rest[i] = readings[i].Y - slope * (readings[i].X - x0);
        return (slope, Selection.Median(rest));
    }

    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    private static bool Reweigh(ReadOnlySpan<double> standardised, Span<double> weights)
    {
        var change = 0.0;
        for (var i = 0; i < weights.Length; i++)
        {
            var a = Math.Abs(standardised[i]);
            var w = a <= RobustRegression.HuberK ? 1 : RobustRegression.HuberK / a;
            change = Math.Max(change, Math.Abs(w - weights[i]));
            weights[i] = w;
        }
        return change > 1e-4;
    }

    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    private static LineFit Solve(ReadOnlySpan<LineReading> readings, ReadOnlySpan<double> weights, ReadOnlySpan<int> group, int groups, double x0, ReadOnlySpan<double> sd, Span<double> standardised)
    {
        var n = readings.Length;
        double s11 = 0, s1x = 0, sxx = 0, s1y = 0, sxy = 0;
        // Per group: load² ÷ variance, and load × (1, x, y) ÷ variance summed, where the load is the shared error's deviation.
        Span<double> shared = groups <= OnStack ? stackalloc double[4 * groups] : new double[4 * groups];
        shared.Clear();
        for (var i = 0; i < n; i++)
        {
            ref readonly var r = ref readings[i];
            var w = weights[i] / r.Variance;
            var x = r.X - x0;
            s11 += w;
            s1x += w * x;
            sxx += w * x * x;
            s1y += w * r.Y;
            sxy += w * x * r.Y;
            if (group[i] < 0) continue;
            var load = w * Math.Sqrt(r.GroupVariance);
            var g = shared.Slice(4 * group[i], 4);
            g[0] += w * r.GroupVariance;
            g[1] += load;
            g[2] += load * x;
            g[3] += load * r.Y;
        }
        for (var k = 0; k < groups; k++)
        {
            var g = shared.Slice(4 * k, 4);
            var f = 1 / (1 + g[0]);
            s11 -= f * g[1] * g[1];
            s1x -= f * g[1] * g[2];
            sxx -= f * g[2] * g[2];
            s1y -= f * g[1] * g[3];
            sxy -= f * g[2] * g[3];
        }
        var determinant = s11 * sxx - s1x * s1x;
        var b = (s11 * sxy - s1x * s1y) / determinant;
        var a = (sxx * s1y - s1x * sxy) / determinant;
        double chiSquare = 0;
        for (var i = 0; i < n; i++)
        {
            ref readonly var r = ref readings[i];
            var rest = r.Y - a - b * (r.X - x0);
            chiSquare += weights[i] / r.Variance * rest * rest;
            standardised[i] = rest / sd[i];
        }
        for (var k = 0; k < groups; k++)
        {
            var g = shared.Slice(4 * k, 4);
            var rest = g[3] - a * g[1] - b * g[2];
            chiSquare -= rest * rest / (1 + g[0]);
        }
        return new(new(b, Math.Sqrt(s11 / determinant)), new(a, Math.Sqrt(sxx / determinant)), chiSquare);
    }
}
