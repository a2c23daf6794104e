namespace WearWatch.Proving.Scoring;

/// <summary>A figure with its 90 % bootstrap interval and how many items it counts. NaN where nothing could be counted.</summary>
internal sealed record Figure(double Value, double Low, double High, int N)
{
    public static Figure Unknown { get; } = new(double.NaN, double.NaN, double.NaN, 0);
}

/// <summary>Percentile bootstrap (Efron 1979), the same draws every time.</summary>
internal static class Bootstrap
{
    private const int Draws = 400;

    /// <param name="units">What is drawn with replacement: vehicles, or seeds.</param>
    /// <param name="statistic">The figure of a list of units.</param>
    /// <param name="counted">Items that a unit puts in; one where null.</param>
    public static Figure Of<T>(IReadOnlyList<T> units, Func<IReadOnlyList<T>, double> statistic, Func<T, int>? counted = null)
    {
        var n = counted is null ? units.Count : units.Sum(counted);
        if (n == 0) return Figure.Unknown;
        var value = statistic(units);
        var random = new Random(20261130);
        var drawn = new T[units.Count];
        var values = new List<double>(Draws);
        for (var d = 0; d < Draws; d++)
        {
            for (var i = 0; i < drawn.Length; i++) drawn[i] = units[random.Next(units.Count)];
            var one = statistic(drawn);
            if (!double.IsNaN(one)) values.Add(one);
        }
        if (values.Count == 0) return new(value, double.NaN, double.NaN, n);
        values.Sort();
        return new(value, Quantile(values, 0.05), Quantile(values, 0.95), n);
    }

    /// <summary>Linear between order statistics.</summary>
    internal static double Quantile(List<double> sorted, double share)
    {
        var at = share * (sorted.Count - 1);
        var below = (int)at;
        return below + 1 < sorted.Count ? sorted[below] + (at - below) * (sorted[below + 1] - sorted[below]) : sorted[below];
    }
}
