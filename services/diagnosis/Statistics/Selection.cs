using System.Runtime.CompilerServices;

namespace WearWatch.Diagnosis.Statistics;

/// <summary>Order statistics in linear time, without sorting.</summary>
/// <remarks>C. A. R. Hoare, Algorithm 65: FIND, Commun. ACM 4 (1961) 321; the pivot is the median of three.</remarks>
internal static class Selection
{
    /// <summary>The k-th smallest, from 0; the span is reordered so that nothing before it is greater and nothing after it smaller.</summary>
    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    public static double Nth(Span<double> values, int k)
    {
        int low = 0, high = values.Length - 1;
        while (low < high)
        {
            var (a, b, c) = (values[low], values[low + (high - low) / 2], values[high]);
            var pivot = a < b ? (b < c ? b : Math.Max(a, c)) : (a < c ? a : Math.Max(b, c));
            int i = low, j = high;
            while (i <= j)
            {
                while (values[i] < pivot) i++;
                while (values[j] > pivot) j--;
                if (i > j) break;
                (values[i], values[j]) = (values[j], values[i]);
                i++;
                j--;
            }
            if (k <= j) high = j;
            else if (k >= i) low = i;
            else break;
        }
        return values[k];
    }

    /// <summary>Median; reorders the span. At least one value, none NaN.</summary>
    public static double Median(Span<double> values)
    {
        var half = values.Length / 2;
        var upper = Nth(values, half);
        if (values.Length % 2 == 1) return upper;
        var lower = values[0];
        for (var i = 1; i < half; i++) lower = Math.Max(lower, values[i]);
        return (lower + upper) / 2;
    }
}
