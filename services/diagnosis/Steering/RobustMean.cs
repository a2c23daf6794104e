using System.Runtime.InteropServices;
using System.Runtime.Intrinsics;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Steering;

/// <summary>Mean of correlated block means with a standard error that does not pretend they are independent.</summary>
public static class RobustMean
{
    /// <summary>Huber's bound in robust standard deviations, 95 % efficient on normal data (Huber 1964).</summary>
    public const double HuberK = 1.345;

    /// <summary>Values up to which counting beats a general sort.</summary>
    private const int LongestCounted = 64;

    /// <param name="blocks">Block means in order of time; NaN is left out.</param>
    /// <param name="resolution">The sensor's step, in the unit of the values.</param>
    /// <param name="sampleRange">Largest less least sample of the run: tells whether noise dithers the step.</param>
    /// <param name="samples">Samples behind the blocks.</param>
    /// <returns>Null with fewer than three valid blocks.</returns>
    /// <remarks>Variance of the mean under AR(1): s²/n·(1+ρ)/(1−ρ) (Priestley 1981); ρ corrected for its small-sample bias
    /// by (1+3ρ)/n (Kendall 1954, from memory) and held to 0…0.9. A step that noise does not dither adds its full step²/12.</remarks>
    public static Estimate? Of(ReadOnlySpan<double> blocks, double resolution, double sampleRange, int samples)
    {
        Span<double> kept = blocks.Length <= 128 ? stackalloc double[blocks.Length] : new double[blocks.Length];
        var n = 0;
        foreach (var x in blocks) if (!double.IsNaN(x)) kept[n++] = x;
        if (n < 3) return null;
        var values = kept[..n];
        var centre = Huber(values);
        var variance = 0.0;
        var lagged = 0.0;
        for (var i = 0; i < n; i++)
        {
            variance += (values[i] - centre) * (values[i] - centre);
            if (i > 0) lagged += (values[i] - centre) * (values[i - 1] - centre);
        }
        var rho = variance > 0 ? lagged / variance : 0;
        rho = Math.Clamp(rho + (1 + 3 * rho) / n, 0, 0.9);
        var ofMean = variance / (n - 1) / n * (1 + rho) / (1 - rho);
        var dithered = sampleRange > 2 * resolution;
        var ofStep = resolution * resolution / 12 / (dithered ? Math.Max(1, samples) : 1);
        return new(centre, Math.Sqrt(ofMean + ofStep));
    }

    /// <summary>Huber's location with the scale fixed at the median absolute deviation; the mean where that is 0.</summary>
    /// <remarks>Newton's steps on Σψ, which end exactly once no value changes sides; should a step leave all the data it goes half way back to the median.</remarks>
    public static double Huber(ReadOnlySpan<double> values)
    {
        var n = values.Length;
        Span<double> sorted = n <= LongestCounted ? stackalloc double[LongestCounted] : new double[n];
        Sort(values, sorted[..n]);
        return OfSorted(sorted[..n]);
    }

    /// <summary>The same of single-precision values, whose bits sort faster.</summary>
    public static double Huber(ReadOnlySpan<float> values) => OfSorted(SingleSort.Ascending(values));

    private static double OfSorted(ReadOnlySpan<double> sorted)
    {
        var median = Median(sorted);
        var bound = HuberK * MedianDeviation(sorted, median) / 0.6745;
        if (!(bound > 0)) return Mean(sorted);
        var centre = median;
        for (var iteration = 0; iteration < 100; iteration++)
        {
            var (pull, inside) = Pull(sorted, centre, bound);
            // At least half the values lie within the bound of the median; should a step lose them all, half a step goes back.
            var next = inside > 0 ? centre + pull / inside : (centre + median) / 2;
            if (Math.Abs(next - centre) <= 1e-12 * bound) return next;
            centre = next;
        }
        return centre;
    }

    /// <summary>Sum of the distances from the centre, each held to the bound, and how many needed no holding.</summary>
    private static (double Pull, long Inside) Pull(ReadOnlySpan<double> values, double centre, double bound)
    {
        var (sums, counts) = (Vector256<double>.Zero, Vector256<long>.Zero);
        var (centres, bounds) = (Vector256.Create(centre), Vector256.Create(bound));
        var fours = MemoryMarshal.Cast<double, Vector256<double>>(values);
        foreach (var x in fours)
        {
            var away = x - centres;
            counts -= Vector256.LessThanOrEqual(Vector256.Abs(away), bounds).AsInt64();
            sums += Vector256.MinNative(Vector256.MaxNative(away, -bounds), bounds);
        }
        var (pull, inside) = (Vector256.Sum(sums), Vector256.Sum(counts));
        foreach (var x in values[(4 * fours.Length)..])
        {
            var away = x - centre;
            if (Math.Abs(away) <= bound) inside++;
            pull += Math.Clamp(away, -bound, bound);
        }
        return (pull, inside);
    }

    /// <summary>Lane k is full from the k-th on: which of four values a value beside them comes after when they are equal.</summary>
    private static readonly Vector256<long>[] s_after = [Vector256.Create(0L, -1, -1, -1), Vector256.Create(0L, 0, -1, -1), Vector256.Create(0L, 0, 0, -1), Vector256<long>.Zero];

    /// <summary>Sorts by counting how many values each one follows, four at a time and without branches: for a run's thirty blocks that beats a general sort.</summary>
    private static void Sort(ReadOnlySpan<double> values, Span<double> sorted)
    {
        var n = values.Length;
        if (n > LongestCounted)
        {
            values.CopyTo(sorted);
            sorted.Sort();
            return;
        }
        Span<double> padded = stackalloc double[LongestCounted];
        Span<long> rank = stackalloc long[LongestCounted];
        values.CopyTo(padded);
        for (var i = 0; i < n; i += 4)
        {
            var (x, follows) = (Vector256.Create<double>(padded[i..]), Vector256<long>.Zero);
            var j = 0;
            // Equal values keep their order: those before come first.
            for (; j < i; j++) follows -= Vector256.LessThanOrEqual(Vector256.Create(padded[j]), x).AsInt64();
            for (; j < Math.Min(i + 4, n); j++)
            {
                var y = Vector256.Create(padded[j]);
                follows -= Vector256.LessThan(y, x).AsInt64() | Vector256.Equals(y, x).AsInt64() & s_after[j - i];
            }
            for (; j < n; j++) follows -= Vector256.LessThan(Vector256.Create(padded[j]), x).AsInt64();
            follows.CopyTo(rank[i..]);
        }
        for (var i = 0; i < n; i++) sorted[(int)rank[i]] = values[i];
    }

    /// <summary>Median of the distances from the median: both flanks ascend away from it, so they are merged half way.</summary>
    private static double MedianDeviation(ReadOnlySpan<double> sorted, double median)
    {
        var n = sorted.Length;
        var (right, half) = (n / 2, (n - 1) / 2);
        var (left, previous, last) = (right - 1, 0.0, 0.0);
        for (var k = 0; k <= n / 2; k++)
        {
            previous = last;
            last = left < 0 || right < n && sorted[right] - median <= median - sorted[left] ? sorted[right++] - median : median - sorted[left--];
        }
        return half == n / 2 ? last : (previous + last) / 2;
    }

    private static double Mean(ReadOnlySpan<double> values)
    {
        var sum = 0.0;
        foreach (var x in values) sum += x;
        return sum / values.Length;
    }

    internal static double Median(ReadOnlySpan<double> sorted) =>
        sorted.Length == 0 ? double.NaN : (sorted[(sorted.Length - 1) / 2] + sorted[sorted.Length / 2]) / 2;
}
