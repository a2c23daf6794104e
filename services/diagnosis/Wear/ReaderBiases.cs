using System.Runtime.CompilerServices;
using MathNet.Numerics.Distributions;
using MathNet.Numerics.LinearAlgebra;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>By how much a technician or a gauge reads too deep.</summary>
/// <param name="Reader">Technician or gauge.</param>
/// <param name="BiasMm">mm; its error is mostly what all readers may share, which nothing in the readings can show.</param>
/// <param name="AgainstOthersSdMm">Standard error of the bias against the mean of all readers, mm: what matters to a rate.</param>
/// <param name="Readings">Tyre readings behind it.</param>
public sealed record ReaderBias(string Reader, Estimate BiasMm, double AgainstOthersSdMm, int Readings);

/// <summary>Standard deviations of the biases of technicians and of gauges, mm.</summary>
internal readonly record struct ReaderSpread(double TechnicianMm, double GaugeMm)
{
    /// <summary>Readers with which the spreads assumed at first count.</summary>
    private const double PriorReaders = 5;

    /// <summary>Spreads as the biases found show them: one step of expectation and maximisation (Laird and Ware 1982), taken each round.</summary>
    public static ReaderStudy Seen(IReadOnlyList<ReaderBias> technicians, IReadOnlyList<ReaderBias> gauges) =>
        new() { TechnicianSpreadMm = Of(technicians, GaugeNoise.TechnicianSdMm), GaugeSpreadMm = Of(gauges, GaugeNoise.GaugeSdMm) };

    private static Interval? Of(IReadOnlyList<ReaderBias> readers, double assumedMm)
    {
        if (readers.Count == 0) return null;
        var squares = PriorReaders * assumedMm * assumedMm;
        foreach (var r in readers) squares += r.BiasMm.Value * r.BiasMm.Value + r.BiasMm.StandardError * r.BiasMm.StandardError;
        var freedom = PriorReaders + readers.Count;
        return new(Math.Sqrt(squares / freedom), Math.Sqrt(squares / ChiSquared.InvCDF(freedom, 0.95)), Math.Sqrt(squares / ChiSquared.InvCDF(freedom, 0.05)));
    }
}

/// <summary>
/// Crossed random effects of technicians and gauges on the depths of the whole fleet, against each fitting's own line
/// (intercept free, rate shrunk to the fleet's). Only differences between readers can show; what all share stays in the depths: a
/// new depth that all readings fall short of tells as well of run-in, so starts of new tyres are left out.
/// </summary>
/// <remarks>
/// Ridge form of the mixed model: N. M. Laird and J. H. Ware, Biometrics 38 (1982) 963. The covariance of a fitting is a diagonal
/// plus its level and its rate, so its inverse is closed (Woodbury) and a fitting costs what it has readings and readers.
/// </remarks>
internal sealed class ReaderBiases
{
    /// <summary>Variance of a fitting's level about the mean of its own readings, mm²: as good as free, or the fleet's depths would feign a bias common to all.</summary>
    private const double FreeVariance = 1e4;

    private const int Passes = 3;

    /// <summary>Standard deviations beyond which a reading is pulled in; wide, so that readers' biases themselves are not.</summary>
    private const double HoldSds = 2.5;

    private readonly FleetTyre[][] _blocks;
    private readonly Func<FleetTyre, Estimate> _rateMmPer1000Km;
    private readonly double _scale;
    private readonly int _technicians, _size;
    private readonly ReaderSpread _spread;

    private ReaderBiases(FleetTyre[][] blocks, Func<FleetTyre, Estimate> rateMmPer1000Km, double meanScale, int technicians, int size, ReaderSpread spread) =>
        (_blocks, _rateMmPer1000Km, _scale, _technicians, _size, _spread) = (blocks, rateMmPer1000Km, meanScale * meanScale, technicians, size, spread);

    /// <param name="blocks">The fleet's tyres in a fixed partition, so that the sums do not depend on who adds them up.</param>
    /// <param name="rateMmPer1000Km">What the fleet expects of a tyre's rate.</param>
    /// <param name="meanScale">Scale of the errors of the means.</param>
    /// <param name="technicians">Names by number.</param>
    /// <param name="gauges">Names by number.</param>
    /// <param name="spread">How far biases differ.</param>
    public static (ReaderBias[] Technicians, ReaderBias[] Gauges) Fit(
        FleetTyre[][] blocks, Func<FleetTyre, Estimate> rateMmPer1000Km, double meanScale, IReadOnlyList<string> technicians, IReadOnlyList<string> gauges, ReaderSpread spread)
    {
        var size = technicians.Count + gauges.Count;
        if (size == 0) return ([], []);
        var work = new ReaderBiases(blocks, rateMmPer1000Km, meanScale, technicians.Count, size, spread);
        var (information, counts) = work.Information();
        var factor = Matrix<double>.Build.DenseOfColumnMajor(size, size, information).Cholesky();
        var beta = new double[size];
        for (var pass = 0; pass < Passes; pass++) beta = factor.Solve(Vector<double>.Build.Dense(work.Right(beta, robust: pass > 0))).ToArray();
        var inverse = factor.Solve(Matrix<double>.Build.DenseIdentity(size));
        return (Named(technicians, 0), Named(gauges, technicians.Count));

        ReaderBias[] Named(IReadOnlyList<string> names, int from)
        {
            var against = AgainstOthers(inverse, from, names.Count);
            return [.. names.Select((name, i) => new ReaderBias(name, new(beta[from + i], Math.Sqrt(inverse[from + i, from + i])), against[i], counts[from + i]))];
        }
    }

    /// <summary>Standard error of each effect less the mean of its kind.</summary>
    private static double[] AgainstOthers(Matrix<double> covariance, int from, int count)
    {
        var rows = new double[count];
        for (var i = 0; i < count; i++)
            for (var j = 0; j < count; j++) rows[i] += covariance[from + i, from + j] / count;
        var all = rows.Sum() / Math.Max(1, count);
        return [.. rows.Select((row, i) => Math.Sqrt(Math.Max(0, covariance[from + i, from + i] - 2 * row + all)))];
    }

    /// <summary>Precision matrix of the effects, prior and readings, and readings by effect.</summary>
    private (double[] Information, int[] Counts) Information()
    {
        var parts = new (double[] Sum, int[] Counts)[_blocks.Length];
        Parallel.For(0, _blocks.Length, k =>
        {
            parts[k] = (new double[_size * _size], new int[_size]);
            var columns = new Columns(_size, _technicians);
            foreach (var tyre in _blocks[k]) AddInformation(tyre, columns, parts[k].Sum, parts[k].Counts);
        });
        var (information, counts) = (new double[_size * _size], new int[_size]);
        for (var i = 0; i < _size; i++) information[i * _size + i] = 1 / (i < _technicians ? _spread.TechnicianMm * _spread.TechnicianMm : _spread.GaugeMm * _spread.GaugeMm);
        foreach (var (sum, count) in parts)
        {
            for (var i = 0; i < sum.Length; i++) information[i] += sum[i];
            for (var i = 0; i < _size; i++) counts[i] += count[i];
        }
        // Only one half was filled.
        for (var i = 0; i < _size; i++)
            for (var j = 0; j < i; j++) information[j * _size + i] = information[i * _size + j] += information[j * _size + i];
        return (information, counts);
    }

    private double[] Right(double[] beta, bool robust)
    {
        var parts = new double[_blocks.Length][];
        Parallel.For(0, _blocks.Length, k =>
        {
            parts[k] = new double[_size];
            var columns = new Columns(_size, _technicians);
            foreach (var tyre in _blocks[k]) AddRight(tyre, columns, beta, robust, parts[k]);
        });
        var right = new double[_size];
        foreach (var part in parts)
            for (var i = 0; i < _size; i++) right[i] += part[i];
        return right;
    }

    private double Precision(in LinePoint p) => p.MeanPrecision / _scale;

    private static ReadOnlySpan<LinePoint> Points(FleetTyre tyre) => tyre.Points[(tyre.FittedNew ? 1 : 0)..];

    private static double Centre(ReadOnlySpan<LinePoint> points)
    {
        double sum = 0;
        foreach (ref readonly var p in points) sum += p.X;
        return sum / points.Length;
    }

    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    private void AddInformation(FleetTyre tyre, Columns columns, double[] information, int[] counts)
    {
        var points = Points(tyre);
        if (points.Length < 2) return;
        var (x0, rate) = (Centre(points), _rateMmPer1000Km(tyre));
        foreach (ref readonly var p in points)
        {
            var w = Precision(p);
            var (t, g) = columns.Add(p, w, w * (p.X - x0));
            if (t >= 0) counts[t]++;
            if (g >= 0) counts[g]++;
            if (t >= 0 && g >= 0) information[t * _size + g] += w;
        }
        var (m11, m12, m22) = columns.Shared(rate.StandardError);
        for (var i = 0; i < columns.Used.Count; i++)
        {
            var a = columns.Used[i];
            var (pa, qa) = (m11 * columns.One[a] + m12 * columns.X[a], m12 * columns.One[a] + m22 * columns.X[a]);
            information[a * _size + a] += columns.One[a] - pa * columns.One[a] - qa * columns.X[a];
            for (var j = 0; j < i; j++)
            {
                var b = columns.Used[j];
                information[Math.Min(a, b) * _size + Math.Max(a, b)] -= pa * columns.One[b] + qa * columns.X[b];
            }
        }
        columns.Clear();
    }

    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    private void AddRight(FleetTyre tyre, Columns columns, double[] beta, bool robust, double[] right)
    {
        var points = Points(tyre);
        var n = points.Length;
        if (n < 2) return;
        var (x0, rate) = (Centre(points), _rateMmPer1000Km(tyre));
        Span<double> y = n <= 64 ? stackalloc double[n] : new double[n];
        for (var i = 0; i < n; i++) y[i] = points[i].Mean.Value + rate.Value * (points[i].X - x0);
        if (robust) HoldIn(points, beta, y);
        double level = 0, one = 0, x = 0;
        foreach (var v in y) level += v / n;
        for (var i = 0; i < n; i++)
        {
            var w = Precision(points[i]);
            var rest = y[i] - level;
            var (t, g) = columns.Add(points[i], w, w * (points[i].X - x0));
            if (t >= 0) right[t] += w * rest;
            if (g >= 0) right[g] += w * rest;
            one += w * rest;
            x += w * rest * (points[i].X - x0);
        }
        var (m11, m12, m22) = columns.Shared(rate.StandardError);
        foreach (var a in columns.Used) right[a] -= columns.One[a] * (m11 * one + m12 * x) + columns.X[a] * (m12 * one + m22 * x);
        columns.Clear();
    }

    /// <summary>Huber's pseudo-values: residuals from the fitting's median beyond <see cref="HoldSds"/> are pulled in.</summary>
    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    private void HoldIn(ReadOnlySpan<LinePoint> points, double[] beta, Span<double> y)
    {
        var n = y.Length;
        Span<double> rest = n <= 64 ? stackalloc double[n] : new double[n];
        Span<double> sorted = n <= 64 ? stackalloc double[n] : new double[n];
        for (var i = 0; i < n; i++)
            rest[i] = y[i] - (points[i].Technician >= 0 ? beta[points[i].Technician] : 0) - (points[i].Gauge >= 0 ? beta[_technicians + points[i].Gauge] : 0);
        rest.CopyTo(sorted);
        var middle = Selection.Median(sorted);
        for (var i = 0; i < n; i++)
        {
            var off = rest[i] - middle;
            var bound = HoldSds * HoldSds / Precision(points[i]);
            if (off * off > bound) y[i] += Math.Sign(off) * Math.Sqrt(bound) - off;
        }
    }

    /// <summary>Sums of one fitting by effect: precision, and precision times distance from the middle.</summary>
    private sealed class Columns(int size, int technicians)
    {
        private double _s, _sx, _sxx;

        public double[] One { get; } = new double[size];
        public double[] X { get; } = new double[size];
        public List<int> Used { get; } = [];

        public (int Technician, int Gauge) Add(in LinePoint p, double w, double wx)
        {
            _s += w;
            _sx += wx;
            _sxx += wx * wx / w;
            return (Take(p.Technician, w, wx), p.Gauge < 0 ? -1 : Take(technicians + p.Gauge, w, wx));
        }

        private int Take(int column, double w, double wx)
        {
            if (column < 0) return -1;
            if (One[column] == 0) Used.Add(column);
            One[column] += w;
            X[column] += wx;
            return column;
        }

        /// <summary>(C⁻¹ + U'WU)⁻¹ of the level and the rate that all readings of the fitting share.</summary>
        public (double M11, double M12, double M22) Shared(double rateSd)
        {
            var (a, b, d) = (1 / FreeVariance + _s, _sx, 1 / (rateSd * rateSd) + _sxx);
            var determinant = a * d - b * b;
            return (d / determinant, -b / determinant, a / determinant);
        }

        public void Clear()
        {
            foreach (var c in Used) One[c] = X[c] = 0;
            Used.Clear();
            (_s, _sx, _sxx) = (0, 0, 0);
        }
    }
}
