namespace WearWatch.Diagnosis.Changes;

/// <summary>
/// Weighted squared error of any stretch of a series about its own level or its own line, each in a few operations from running
/// sums. Weights are one over the variance, so that a cost is a χ² where the errors are as stated.
/// </summary>
public sealed class SegmentCost
{
    private readonly double[] _w, _wt, _wtt, _wy, _wty, _wyy;
    private readonly double _t0, _y0;

    /// <param name="times">Ascending, any unit.</param>
    /// <param name="values">As many as times.</param>
    /// <param name="weights">One over the variance of each value; above zero.</param>
    /// <param name="slopePenalty">What a slope must save before a stretch is taken for a line; infinite: levels only.</param>
    /// <param name="leastSloped">Points below which a stretch is never taken for a line.</param>
    public SegmentCost(ReadOnlySpan<double> times, ReadOnlySpan<double> values, ReadOnlySpan<double> weights, double slopePenalty = double.PositiveInfinity, int leastSloped = 2)
    {
        Count = times.Length;
        if (values.Length != Count || weights.Length != Count) throw new ArgumentException("times, values and weights differ in number", nameof(values));
        SlopePenalty = slopePenalty;
        LeastSloped = leastSloped;
        (_w, _wt, _wtt) = (new double[Count + 1], new double[Count + 1], new double[Count + 1]);
        (_wy, _wty, _wyy) = (new double[Count + 1], new double[Count + 1], new double[Count + 1]);
        // Sums about the middle lose no digits to the size of a date.
        (_t0, _y0) = Count == 0 ? (0, 0) : (times[Count / 2], values[Count / 2]);
        for (var i = 0; i < Count; i++)
        {
            var (w, t, y) = (weights[i], times[i] - _t0, values[i] - _y0);
            if (!(w > 0) || !double.IsFinite(w) || !double.IsFinite(t) || !double.IsFinite(y)) throw new ArgumentException($"point {i} is not finite or has no weight", nameof(weights));
            _w[i + 1] = _w[i] + w;
            _wt[i + 1] = _wt[i] + w * t;
            _wtt[i + 1] = _wtt[i] + w * t * t;
            _wy[i + 1] = _wy[i] + w * y;
            _wty[i + 1] = _wty[i] + w * t * y;
            _wyy[i + 1] = _wyy[i] + w * y * y;
        }
    }

    public int Count { get; }

    public double SlopePenalty { get; }

    public int LeastSloped { get; }

    /// <summary>Squared error of points <paramref name="from"/> up to, not including, <paramref name="to"/> about their weighted mean.</summary>
    public double Level(int from, int to)
    {
        var wy = _wy[to] - _wy[from];
        return Math.Max(0, _wyy[to] - _wyy[from] - wy * wy / (_w[to] - _w[from]));
    }

    /// <summary>The same about their weighted least-squares line.</summary>
    public double Line(int from, int to)
    {
        var w = _w[to] - _w[from];
        var wt = _wt[to] - _wt[from];
        var wy = _wy[to] - _wy[from];
        var tt = _wtt[to] - _wtt[from] - wt * wt / w;
        var ty = _wty[to] - _wty[from] - wt * wy / w;
        var level = _wyy[to] - _wyy[from] - wy * wy / w;
        return Math.Max(0, tt > 0 ? level - ty * ty / tt : level);
    }

    /// <summary>The cheaper of a level and, at its penalty, a line.</summary>
    public double Best(int from, int to) => Best(from, to, Level(from, to));

    /// <summary>The same where the level's cost is known.</summary>
    internal double Best(int from, int to, double level)
    {
        // A line saves at most the whole error of the level.
        return level <= SlopePenalty || to - from < LeastSloped ? level : Math.Min(level, Line(from, to) + SlopePenalty);
    }

    /// <summary>What the stretch costs at the least as a part of any longer one, whether that is a level or a line.</summary>
    public double Floor(int from, int to) => double.IsPositiveInfinity(SlopePenalty) ? Level(from, to) : Line(from, to);

    public bool IsSloped(int from, int to) => Best(from, to) < Level(from, to);

    /// <summary>Mean of the points, its variance, and the weighted mean of their times.</summary>
    public (double Mean, double Variance, double Time) Mean(int from, int to)
    {
        var w = _w[to] - _w[from];
        return (_y0 + (_wy[to] - _wy[from]) / w, 1 / w, _t0 + (_wt[to] - _wt[from]) / w);
    }

    /// <summary>Slope of the line through the points, per unit of time, and its variance; (0, ∞) at a single time.</summary>
    public (double Slope, double Variance) Slope(int from, int to)
    {
        var w = _w[to] - _w[from];
        var wt = _wt[to] - _wt[from];
        var tt = _wtt[to] - _wtt[from] - wt * wt / w;
        return tt > 0 ? ((_wty[to] - _wty[from] - wt * (_wy[to] - _wy[from]) / w) / tt, 1 / tt) : (0, double.PositiveInfinity);
    }
}
