using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Steering;

/// <summary>A mean with its error from independent values, and such means put together.</summary>
internal static class MeanOfTrips
{
    /// <summary>Mean and its standard error; null with fewer than <paramref name="least"/> values.</summary>
    public static Estimate? Of(IReadOnlyList<double> values, int least = 3)
    {
        if (values.Count < Math.Max(2, least)) return null;
        var mean = values.Average();
        return new(mean, Math.Sqrt(values.Sum(v => (v - mean) * (v - mean)) / (values.Count - 1) / values.Count));
    }

    /// <summary>Means of several streams, each by its precision, with no less than the scatter between them; the order does not matter.</summary>
    public static Estimate? Join(IEnumerable<Estimate?> parts)
    {
        var known = parts.OfType<Estimate>().Where(e => double.IsFinite(e.Value) && e.StandardError > 0).OrderBy(e => e.Value).ThenBy(e => e.StandardError).ToArray();
        if (known.Length == 0) return null;
        var weights = known.Sum(e => 1 / (e.StandardError * e.StandardError));
        var mean = known.Sum(e => e.Value / (e.StandardError * e.StandardError)) / weights;
        var scatter = known.Length > 1 ? known.Sum(e => Math.Pow((e.Value - mean) / e.StandardError, 2)) / (known.Length - 1) : 1;
        return new(mean, Math.Sqrt(Math.Max(1, scatter) / weights));
    }
}
