namespace WearWatch.Proving.Scoring;

/// <summary>A figure with its 90 % bootstrap interval and how many items it counts. NaN where nothing could be counted.</summary>
internal sealed record Figure(double Value, double Low, double High, int N)
{
    /// <summary>The same of the best possible on the same data; null where it was not worked out or means nothing.</summary>
    public Figure? Best { get; init; }
    /// <summary>What the figure ought to reach; null where nothing is asked.</summary>
    public Bar? Bar { get; init; }

    /// <summary>Whether more of it is better, so that its share of the best possible says something.</summary>
    public bool MoreIsBetter { get; init; }

    /// <summary>Value over that of the best possible.</summary>
    public double ShareOfBest => MoreIsBetter && Best is { Value: > 0 } best ? Value / best.Value : double.NaN;

    /// <summary>Whether the bar is reached; where the best possible lies below it, 95 % of the best possible do. Null where unknown.</summary>
    public bool? Reached => Bar is null || double.IsNaN(Value) ? null
        : Bar.Holds(Value) || (MoreIsBetter && Best is { } best && best.Value < Bar.Least && Value >= 0.95 * best.Value);

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

/// <summary>The range a figure ought to lie in.</summary>
internal sealed record Bar(double Least, double Most)
{
    public static Bar AtLeast(double value) => new(value, double.PositiveInfinity);

    public static Bar AtMost(double value) => new(double.NegativeInfinity, value);

    public bool Holds(double value) => value >= Least && value <= Most;

    public override string ToString() => double.IsPositiveInfinity(Most) ? FormattableString.Invariant($"≥ {Least}") : double.IsNegativeInfinity(Least) ? FormattableString.Invariant($"≤ {Most}") : FormattableString.Invariant($"{Least} to {Most}");
}
