namespace WearWatch.Diagnosis.Statistics;

/// <summary>Median and the scale made from it; breakdown point 50 %.</summary>
public static class Medians
{
    /// <summary>Turns a median absolute deviation into the standard deviation of a normal law: 1/Φ⁻¹(0.75).</summary>
    public const double MadToSd = 1.4826022185056018;

    /// <summary>Median of the values, which stay as they are; NaN when there are none.</summary>
    public static double Median(IReadOnlyCollection<double> values)
    {
        if (values.Count == 0) return double.NaN;
        var sorted = values.ToArray();
        Array.Sort(sorted);
        return OfSorted(sorted);
    }

    /// <summary>Median of ascending values, at least one.</summary>
    public static double OfSorted(ReadOnlySpan<double> sorted)
    {
        var half = sorted.Length / 2;
        return sorted.Length % 2 == 1 ? sorted[half] : (sorted[half - 1] + sorted[half]) / 2;
    }

    /// <summary>Median absolute deviation from <paramref name="centre"/> (zero for residuals), as a standard deviation.</summary>
    public static double Scale(IReadOnlyCollection<double> values, double centre = 0) =>
        MadToSd * Median(values.Select(v => Math.Abs(v - centre)).ToArray());
}
