using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// One figure (mean loss or one-edge loss) over all tyres that stood on a place, as broken lines: each tyre starts where it
/// starts, all share one slope before the onset and one after it. Generalised least squares; what the tyres of one survey
/// share stays an unknown of its own.
/// </summary>
/// <param name="surveys">Surveys of the vehicle whose shared error is an unknown; 0 where the figure has none.</param>
/// <param name="wander">How the slope of one place wanders.</param>
/// <param name="common">How the slope of the whole vehicle wanders; only for telling odd readings.</param>
internal sealed class PlaceSlopes(int surveys, SlopeWander wander, SlopeWander common)
{
    private const double HuberBound = 1.345; // Huber 1964, 95 % efficiency
    private const double FleetFreedom = 10;

    private readonly List<Tyre> _tyres = [];

    /// <summary>A fitting with its readings whitened and freed from the intercept.</summary>
    private sealed record Tyre(double[] X, double[,] Factor, double[] One, double[] Y, double[][] Shared, double Widen);

    /// <summary>Adds one fitting's readings.</summary>
    /// <param name="readings">X in 1000 km, Y a loss in mm; the reader's variance is that of the survey's shared error.</param>
    /// <param name="surveyOf">Index of each reading's survey; −1 where it has no share in a survey's error.</param>
    /// <param name="breaks">Places at which the slope may have changed, 1000 km.</param>
    /// <param name="loading">How each reading hangs on what one tyre keeps to itself, mm per SD of that.</param>
    /// <param name="correlation">Factor on the error of a slope for residuals that come in runs.</param>
    public void Add(IReadOnlyList<LineReading> readings, IReadOnlyList<int> surveyOf, IReadOnlyList<double> breaks, IReadOnlyList<double> loading, double correlation)
    {
        var n = readings.Count;
        if (n < 2 || readings.All(r => Math.Abs(r.X - readings[0].X) < 1e-9)) return;
        var weights = new double[n];
        Array.Fill(weights, 1);
        var (chiSquare, residuals) = Kindest(readings, weights, breaks, loading);
        for (var step = 0; n > 3 && step < 3; step++)
        {
            for (var i = 0; i < n; i++)
            {
                var off = Math.Abs(residuals[i]) / Math.Sqrt(readings[i].Variance + readings[i].GroupVariance);
                weights[i] = off <= HuberBound ? 1 : HuberBound / off;
            }
            if (weights.All(w => w == 1)) break;
            (chiSquare, residuals) = Kindest(readings, weights, breaks, loading);
        }
        var own = (FleetFreedom + chiSquare) / (FleetFreedom + Math.Max(0, n - 3));
        var shared = Enumerable.Range(0, surveys).Select(s => surveyOf.Select(of => of == s ? 1.0 : 0).ToArray()).ToArray();
        // A loss is a depth turned round: the survey's error lowers it.
        foreach (var column in shared)
            for (var i = 0; i < n; i++) column[i] = -column[i];
        _tyres.Add(Whitened(readings, weights, loading, shared, Math.Sqrt(Math.Max(0.8, own)) * (n > 2 ? correlation : 1), alone: false));
    }

    /// <summary>Slopes before and after a break at <paramref name="at"/> (1000 km), with the surveys' shared errors.</summary>
    public SlopeEvidence Around(double at)
    {
        var size = 2 + surveys;
        var (k, h) = (new double[size * size], new double[size]);
        foreach (var tyre in _tyres)
        {
            var (b, a) = Broken(tyre, at);
            double[][] columns = [b, a, .. tyre.Shared];
            var weight = 1 / (tyre.Widen * tyre.Widen);
            for (var i = 0; i < size; i++)
            {
                h[i] += weight * Dot(columns[i], tyre.Y);
                for (var j = i; j < size; j++) k[i * size + j] = k[j * size + i] += weight * Dot(columns[i], columns[j]);
            }
        }
        return new(k, h);
    }

    private Tyre Whitened(IReadOnlyList<LineReading> readings, double[] weights, IReadOnlyList<double> loading, double[][] shared, double widen, bool alone)
    {
        var n = readings.Count;
        var v = new double[n, n];
        var origin = readings.Min(r => r.X);
        for (var i = 0; i < n; i++)
        {
            for (var j = 0; j <= i; j++)
            {
                v[i, j] = wander.Covariance(readings[i].X - origin, readings[j].X - origin) + loading[i] * loading[j];
                if (!alone) continue;
                v[i, j] += common.Covariance(readings[i].X - origin, readings[j].X - origin);
                if (readings[i].Group >= 0 && readings[i].Group == readings[j].Group) v[i, j] += readings[i].GroupVariance;
            }
            v[i, i] += readings[i].Variance / weights[i];
        }
        SmallCholesky.Factor(v);
        var one = new double[n];
        Array.Fill(one, 1);
        SmallCholesky.Whiten(v, one);
        var tyre = new Tyre([.. readings.Select(r => r.X)], v, one, [.. readings.Select(r => r.Y)], shared, widen);
        Free(tyre, tyre.Y);
        foreach (var column in shared) Free(tyre, column);
        return tyre;
    }

    /// <summary>The fitting on its own, broken where that fits best.</summary>
    private (double ChiSquare, double[] Residuals) Kindest(IReadOnlyList<LineReading> readings, double[] weights, IReadOnlyList<double> breaks, IReadOnlyList<double> loading)
    {
        var tyre = Whitened(readings, weights, loading, [], 1, alone: true);
        var best = (ChiSquare: double.PositiveInfinity, At: 0.0, Before: 0.0, After: 0.0);
        foreach (var at in breaks)
        {
            var (b, a) = Broken(tyre, at);
            var (before, after) = Slopes(Dot(b, b), Dot(b, a), Dot(a, a), Dot(b, tyre.Y), Dot(a, tyre.Y));
            var left = Math.Max(0, Dot(tyre.Y, tyre.Y) - before * Dot(b, tyre.Y) - after * Dot(a, tyre.Y));
            if (left < best.ChiSquare - 1e-9) best = (left, at, before, after);
        }
        var residuals = new double[readings.Count];
        var origin = Origin(tyre, best.At);
        for (var i = 0; i < residuals.Length; i++)
            residuals[i] = readings[i].Y - best.Before * Math.Min(tyre.X[i] - origin, 0) - best.After * Math.Max(tyre.X[i] - origin, 0);
        var white = (double[])residuals.Clone();
        SmallCholesky.Whiten(tyre.Factor, white);
        var intercept = Dot(white, tyre.One) / Dot(tyre.One, tyre.One);
        for (var i = 0; i < residuals.Length; i++) residuals[i] -= intercept;
        return (best.ChiSquare, residuals);
    }

    private static double Origin(Tyre tyre, double at) => double.IsNegativeInfinity(at) ? tyre.X.Min() : at;

    /// <summary>Distance run before and after the break, counted from it, whitened and freed from the intercept.</summary>
    private static (double[] Before, double[] After) Broken(Tyre tyre, double at)
    {
        var origin = Origin(tyre, at);
        double[] before = [.. tyre.X.Select(v => Math.Min(v - origin, 0))], after = [.. tyre.X.Select(v => Math.Max(v - origin, 0))];
        Free(tyre, before);
        Free(tyre, after);
        return (before, after);
    }

    private static void Free(Tyre tyre, double[] column)
    {
        SmallCholesky.Whiten(tyre.Factor, column);
        var mean = Dot(tyre.One, column) / Dot(tyre.One, tyre.One);
        for (var i = 0; i < column.Length; i++) column[i] -= mean * tyre.One[i];
    }

    private static (double Before, double After) Slopes(double bb, double ba, double aa, double hb, double ha)
    {
        var determinant = bb * aa - ba * ba;
        if (determinant > 1e-9 * bb * aa) return ((aa * hb - ba * ha) / determinant, (bb * ha - ba * hb) / determinant);
        return (bb > 0 ? hb / bb : 0, aa > 0 ? ha / aa : 0);
    }

    private static double Dot(double[] x, double[] y)
    {
        double sum = 0;
        for (var i = 0; i < x.Length; i++) sum += x[i] * y[i];
        return sum;
    }
}
