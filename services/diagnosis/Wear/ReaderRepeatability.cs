using System.Runtime.CompilerServices;
using MathNet.Numerics.Distributions;
using MathNet.Numerics.LinearAlgebra;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>One reader's figures.</summary>
/// <param name="Readings">Tyre readings behind them.</param>
/// <param name="Surveys">Surveys behind them.</param>
/// <param name="RepeatabilityMm">Standard deviation of a single reading, rounding taken off, mm, with its 90 % interval.</param>
internal readonly record struct RepeatabilityFigures(int Readings, int Surveys, Interval RepeatabilityMm);

/// <summary>
/// How well each technician, or each gauge, repeats itself: the scatter of its readings about straight lines of the tyres
/// (<see cref="TyreScatter"/>). A line shares its residuals among all who read the tyre, so the variances are solved for together:
/// E r² = (M∘M)·σ² with the residual maker M of every line. A survey's squares are held in, so that slips of the pen do not count as
/// scatter.
/// </summary>
/// <remarks>C. R. Rao, J. Am. Statist. Assoc. 65 (1970) 161 (variances from squared residuals); F. E. Satterthwaite, Biometrics Bull. 2 (1946) 110.</remarks>
internal sealed class ReaderRepeatability
{
    /// <summary>Multiple of its expectation at which the squares of one tyre in one survey are held.</summary>
    private const double Hold = 5;

    /// <summary>Degrees of freedom with which the fleet's own scatter counts for each reader.</summary>
    private const double FleetFreedom = 2;

    private const int Passes = 3;

    private readonly FleetTyre[][] _blocks;
    private readonly bool _byGauge;
    /// <summary>Readers, and one more for readings without a name.</summary>
    private readonly int _size;

    private ReaderRepeatability(FleetTyre[][] blocks, int readers, bool byGauge) => (_blocks, _size, _byGauge) = (blocks, readers + 1, byGauge);

    /// <param name="blocks">The fleet's tyres in a fixed partition, vehicle by vehicle.</param>
    /// <param name="readers">Readers of the kind asked for.</param>
    /// <param name="byGauge">Gauges; else technicians.</param>
    /// <returns>By reader, and over all.</returns>
    public static (RepeatabilityFigures[] ByReader, RepeatabilityFigures All) Of(FleetTyre[][] blocks, int readers, bool byGauge)
    {
        var work = new ReaderRepeatability(blocks, readers, byGauge);
        var shares = work.Shares();
        var variance = Enumerable.Repeat(GaugeNoise.ReadingVariance(GaugeNoise.RepeatSdMm, 0.1), work._size).ToArray();
        var found = new Sums(work._size);
        var pooled = variance[0];
        for (var pass = 0; pass < Passes; pass++)
        {
            found = work.Add(variance);
            if (found.Freedom.Sum() is > 0 and var all) pooled = Math.Max(found.Squares.Sum() / all, 1e-4);
            variance = work.Solve(shares, found, pooled);
        }
        RepeatabilityFigures[] figures = [.. Enumerable.Range(0, work._size).Select(r => Describe(found, r, variance[r]))];
        return (figures[..^1], Describe(found.Whole(), 0, pooled));
    }

    /// <summary>Sums by reader.</summary>
    private sealed class Sums(int size)
    {
        /// <summary>Squares, mm², made up for what holding them takes off.</summary>
        public double[] Squares { get; init; } = new double[size];
        /// <summary>What the squares would be with variances of 1.</summary>
        public double[] Freedom { get; init; } = new double[size];
        /// <summary>Variance of <see cref="Squares"/>, from whole surveys, whose tyres share their luck.</summary>
        public double[] Spread { get; init; } = new double[size];
        public double[] Rounding { get; init; } = new double[size];
        public double[] Readings { get; init; } = new double[size];
        public double[] Surveys { get; init; } = new double[size];

        private double[][] All => [Squares, Freedom, Spread, Rounding, Readings, Surveys];

        public void Add(Sums other)
        {
            foreach (var (mine, its) in All.Zip(other.All))
                for (var r = 0; r < mine.Length; r++) mine[r] += its[r];
        }

        public Sums Whole() => new(1)
        {
            Squares = [Squares.Sum()],
            Freedom = [Freedom.Sum()],
            Spread = [Spread.Sum()],
            Rounding = [Rounding.Sum()],
            Readings = [Readings.Sum()],
            Surveys = [Surveys.Sum()],
        };
    }

    private int Reader(in LinePoint p) => (_byGauge ? p.Gauge : p.Technician) is >= 0 and var r ? r : _size - 1;

    /// <summary>M∘M summed over the readings of each pair of readers.</summary>
    private double[] Shares()
    {
        var parts = new double[_blocks.Length][];
        Parallel.For(0, _blocks.Length, k =>
        {
            var share = parts[k] = new double[_size * _size];
            double[] a = new double[_size], b = new double[_size], c = new double[_size];
            var used = new List<int>();
            foreach (var tyre in _blocks[k])
            {
                if (tyre.Scatter is not { } scatter) continue;
                for (var i = 0; i < scatter.Squares.Length; i++)
                {
                    if (float.IsNaN(scatter.Squares[i])) continue;
                    ref readonly var p = ref tyre.Points[i];
                    var (r, (level, slope)) = (Reader(p), scatter.Parts(p.X));
                    if (a[r] == 0) used.Add(r);
                    a[r] += level * level;
                    b[r] += slope * slope;
                    c[r] += level * slope;
                    share[r * _size + r] += scatter.Dimension * (1 - 2 * (level * level + slope * slope));
                }
                foreach (var i in used)
                    foreach (var j in used) share[i * _size + j] += scatter.Dimension * (a[i] * a[j] + 2 * c[i] * c[j] + b[i] * b[j]);
                foreach (var i in used) a[i] = b[i] = c[i] = 0;
                used.Clear();
            }
        });
        var shares = new double[_size * _size];
        foreach (var part in parts)
            for (var i = 0; i < shares.Length; i++) shares[i] += part[i];
        return shares;
    }

    private Sums Add(double[] variance)
    {
        var parts = new Sums[_blocks.Length];
        Parallel.For(0, _blocks.Length, k => parts[k] = Block(_blocks[k], variance));
        var sums = new Sums(_size);
        foreach (var part in parts) sums.Add(part);
        return sums;
    }

    /// <summary>Tyres stand vehicle by vehicle: what one survey of it adds is gathered over them.</summary>
    private Sums Block(FleetTyre[] tyres, double[] variance)
    {
        var sums = new Sums(_size);
        var walks = new List<(double Square, double Freedom, int Reader)>();
        for (var i = 0; i < tyres.Length; i++)
        {
            AddTyre(tyres[i], variance, sums, walks);
            if (i + 1 < tyres.Length && tyres[i + 1].Vehicle == tyres[i].Vehicle) continue;
            foreach (var (square, freedom, r) in walks)
            {
                if (freedom <= 0) continue;
                var off = square - variance[r] * freedom;
                sums.Spread[r] += off * off;
                sums.Surveys[r]++;
            }
            walks.Clear();
        }
        return sums;
    }

    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    private void AddTyre(FleetTyre tyre, double[] variance, Sums sums, List<(double Square, double Freedom, int Reader)> walks)
    {
        if (tyre.Scatter is not { } scatter) return;
        var made = s_held[Math.Min(scatter.Dimension, s_held.Length - 1)];
        for (var i = 0; i < scatter.Squares.Length; i++)
        {
            if (float.IsNaN(scatter.Squares[i])) continue;
            ref readonly var p = ref tyre.Points[i];
            var (r, (level, slope)) = (Reader(p), scatter.Parts(p.X));
            var freedom = scatter.Dimension * Math.Max(0, 1 - level * level - slope * slope);
            var square = Math.Min(scatter.Squares[i], Hold * freedom * (variance[r] + scatter.Wander)) / made - freedom * scatter.Wander;
            sums.Squares[r] += square;
            sums.Freedom[r] += freedom;
            sums.Rounding[r] += p.ResolutionMm * p.ResolutionMm / 12;
            sums.Readings[r]++;
            while (walks.Count <= p.Survey) walks.Add(default);
            walks[p.Survey] = (walks[p.Survey].Square + square, walks[p.Survey].Freedom + freedom, r);
        }
    }

    /// <summary>By degrees of freedom: what is left of a χ² held at <see cref="Hold"/> times its expectation, as a share of it.</summary>
    private static readonly double[] s_held = [1, .. Enumerable.Range(1, 24).Select(k => ChiSquared.CDF(k + 2, Hold * k) + Hold * (1 - ChiSquared.CDF(k, Hold * k)))];

    /// <summary>Variances of a single reading by reader, mm², each drawn to the fleet's by what it rests on.</summary>
    private double[] Solve(double[] shares, Sums found, double pooled)
    {
        var system = Matrix<double>.Build.Dense(_size, _size, (i, j) => shares[i * _size + j] + (i == j ? FleetFreedom : 0));
        var right = Vector<double>.Build.Dense(_size, i => found.Squares[i] + FleetFreedom * pooled);
        return [.. system.Solve(right).Select(v => Math.Max(v, 0.01 * pooled))];
    }

    private static RepeatabilityFigures Describe(Sums found, int r, double variance)
    {
        var rounding = found.Readings[r] > 0 ? found.Rounding[r] / found.Readings[r] : 0;
        // Squares of whole surveys give the freedom that the readings really have.
        var own = found.Spread[r] > 0 ? Math.Min(found.Freedom[r], 2 * variance * variance * found.Freedom[r] * found.Freedom[r] / found.Spread[r]) : 0;
        var freedom = FleetFreedom + own;
        return new((int)found.Readings[r], (int)found.Surveys[r], new(Root(1), Root(freedom / ChiSquared.InvCDF(freedom, 0.95)), Root(freedom / ChiSquared.InvCDF(freedom, 0.05))));

        double Root(double factor) => Math.Sqrt(Math.Max(0, factor * variance - rounding));
    }
}
