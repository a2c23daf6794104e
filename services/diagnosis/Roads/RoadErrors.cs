using System.Runtime.Intrinsics;
using MathNet.Numerics.Random;

namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// Variances of all unknowns and cells. A vehicle's variance is what is left with gains, levels and crowns held, plus what their own
/// errors bring, which is exact: their covariance comes from the Schur complement of the vehicles. The first part is exact in components of
/// few unknowns, by their dense inverse. In large ones it is the diagonal of the vehicles' own blocks, their slow direction put right
/// exactly, and the rest from random probes (Hutchinson 1990; deflated as in Meyer, Musco, Musco and Woodruff 2021), of fixed seed.
/// </summary>
internal sealed class RoadErrors
{
    private const int Lanes = RoadProblem.Lanes, Sides = FourSolves.Sides, Stride = FourSolves.Stride;
    private const int LeastBatches = 4, MostBatches = 16; // of four probes
    private const double Ample = 0.15; // scatter of the worst variance, twice that of its standard error, at which probing ends
    private const double Fall = 1e-3, RoughFall = 0.01, ProbeFall = 0.1;
    private const int MostSteps = 200;
    private const double LeastShare = 0.2; // of the vehicle's own block, below which only a probe's scatter can take it

    private readonly RoadSystem _s;
    private readonly double _fall;
    private readonly int[] _border;     // unknowns that touch many vehicles; the component's level follows them
    private readonly double[][] _columns;
    private readonly double[] _answers; // of each vehicle's lane to each border unknown and its level, sign turned
    private readonly double[] _conditional;
    private readonly double[] _slow;    // of unit variance
    private readonly double[] _cells;
    private readonly RoadBorder _covariance;
    private readonly DenseComponents _dense;

    /// <param name="system">At its solution.</param>
    /// <param name="denseUpTo">Most unknowns of a component that is inverted.</param>
    /// <param name="roughly">Gains are taken as known and large components left at the first two parts.</param>
    public RoadErrors(RoadSystem system, int denseUpTo, bool roughly = false)
    {
        (_s, _fall) = (system, roughly ? RoughFall : Fall);
        _border = Enumerable.Range(system.GainAt, system.Size - system.GainAt).Where(i => Touches(i) && (!roughly || i >= system.CrownAt)).ToArray();
        _columns = [.. _border.Select(y => Column(i => i == y)), Column(i => i >= system.LevelAt && i < system.GainAt)];
        _answers = new double[Lanes * system.Graph.Vehicles * _columns.Length];
        (_conditional, _slow) = (new double[Lanes * system.Graph.Vehicles], new double[Lanes * system.Graph.Vehicles]);
        _cells = new double[system.Graph.Cells];
        for (var v = 0; v < system.Graph.Vehicles; v++)
            for (var lane = 0; lane < 3; lane++) _conditional[Lanes * v + lane] = system.Block[3 * Lanes * v + Lanes * lane + lane];
        _dense = new(system, denseUpTo);
        if (_dense.Left > 0) Iterate(!roughly);
        _dense.Each(_columns, _answers, _conditional, _cells);
        _covariance = new(system, _border, _columns, _answers);
    }

    /// <summary>Largest standard error of a probed variance, over the variance, as the probes' own scatter tells.</summary>
    public double ProbeError { get; private set; }

    /// <summary>Variance of every unknown.</summary>
    public double[] Variances()
    {
        var variance = new double[_s.Size];
        for (var i = 0; i < _s.LevelAt; i++) variance[i] = _conditional[i] + _covariance.Of(_s.Component[i / Lanes], _answers.AsSpan(i * _columns.Length, _columns.Length));
        for (var i = _s.LevelAt; i < _s.Size; i++) variance[i] = 1 / _s.PriorWeight[i];
        for (var k = 0; k < _s.Components; k++) variance[_s.LevelAt + k] = _covariance.LevelVariance(k);
        for (var y = 0; y < _border.Length; y++) variance[_border[y]] = _covariance.BorderVariance(y);
        return variance;
    }

    /// <summary>Variance of every cell: its own equations', its vehicles' as if they shared nothing but the slow direction (exact in small components), and what gains and levels bring.</summary>
    public double[] CellVariances()
    {
        var (variance, blocks) = (new double[_s.Graph.Cells], ScaledBlocks());
        _s.Graph.ByCell.Each((_, from, to) =>
        {
            var answer = new double[_columns.Length];
            for (var c = from; c < to; c++) variance[c] = Cell(c, answer, blocks);
        });
        return variance;
    }

    /// <summary>Variance of the mean bank a component's roads are drawn to, both traffic sides of each component in turn.</summary>
    public double[] LevelVariances()
    {
        var variances = new double[2 * _s.Components];
        for (var i = 0; i < variances.Length; i++) variances[i] = LevelVariance(i / 2, i % 2);
        return variances;
    }

    private double LevelVariance(int component, int side)
    {
        Span<double> factors = stackalloc double[_columns.Length];
        factors[^1] = 1;
        if (Array.IndexOf(_border, _s.CrownAt + side) is var crown and >= 0) factors[crown] = 1;
        return _covariance.Of(component, factors);
    }

    private bool Touches(int i) => i >= _s.CrownAt ? _s.Priors.Any(p => p.OnLevel) : (i - _s.GainAt) % Lanes < 2 && _s.GainSquare[i - _s.GainAt] > 0;

    private double[] Column(Func<int, bool> ones)
    {
        var (x, column) = (new double[_s.Size], new double[_s.Size]);
        for (var i = _s.LevelAt; i < _s.Size; i++) x[i] = ones(i) ? 1 : 0;
        _s.Multiply(x, column);
        return column;
    }

    private void Iterate(bool probes)
    {
        var solves = new FourSolves(_s);
        Slow(solves);
        for (var first = 0; first < _columns.Length; first += Sides) Answers(solves, first);
        for (var i = 0; i < _s.LevelAt; i++)
        {
            if (solves.SlowWeight[_s.Component[i / Lanes]] is var w and > 0) _slow[i] = solves.Slow[i] / Math.Sqrt(w);
            _conditional[i] += _slow[i] * _slow[i];
        }
        if (probes) Probe(solves);
    }

    /// <summary>First guess of the slow direction, all figures of a component moved by their gains, made better by one inverse iteration.</summary>
    private void Slow(FourSolves solves)
    {
        var (right, x) = (new float[Stride * _s.Graph.Vehicles], new float[Stride * _s.Graph.Vehicles]);
        var held = new double[_s.Components];
        for (var v = 0; v < _s.Graph.Vehicles; v++)
            for (var lane = 0; lane < 3; lane++) solves.Slow[Lanes * v + lane] = (float)_s.Gain[Lanes * _s.ClassOf[v] + lane];
        void Weigh()
        {
            var (spread, times) = (new float[right.Length], new float[right.Length]);
            for (var i = 0; i < solves.Slow.Length; i++) spread[Sides * (i - i % Lanes) + i % Lanes] = solves.Slow[i];
            solves.Multiply(spread, times);
            var energy = solves.SlowParts(times, solves.Slow);
            Array.Clear(held);
            for (var v = 0; v < _s.Graph.Vehicles; v++)
                for (var lane = 0; lane < 3; lane++) held[_s.Component[v]] += _s.Diagonal[Lanes * v + lane] * solves.Slow[Lanes * v + lane] * solves.Slow[Lanes * v + lane];
            for (var k = 0; k < held.Length; k++) solves.SlowWeight[k] = energy[Sides * k] > 1e-6 * held[k] ? energy[Sides * k] : 0;
        }
        Weigh();
        for (var v = 0; v < _s.Graph.Vehicles; v++)
            for (var lane = 0; lane < 3; lane++) right[Stride * v + lane] = (float)(_s.Diagonal[Lanes * v + lane] * solves.Slow[Lanes * v + lane]);
        solves.Solve(right, x, _fall, MostSteps);
        for (var i = 0; i < solves.Slow.Length; i++) solves.Slow[i] = x[Sides * (i - i % Lanes) + i % Lanes];
        Weigh();
    }

    private void Answers(FourSolves solves, int first)
    {
        var (right, x) = (new float[Stride * _s.Graph.Vehicles], new float[Stride * _s.Graph.Vehicles]);
        var sides = Math.Min(Sides, _columns.Length - first);
        for (var i = 0; i < _s.LevelAt; i++)
            for (var side = 0; side < sides; side++) right[Stride * (i / Lanes) + Lanes * side + i % Lanes] = (float)_columns[first + side][i];
        solves.Solve(right, x, _fall, MostSteps);
        for (var i = 0; i < _s.LevelAt; i++)
            for (var side = 0; side < sides; side++) _answers[i * _columns.Length + first + side] = x[Stride * (i / Lanes) + Lanes * side + i % Lanes];
    }

    /// <summary>
    /// With the slow direction u solved exactly, M = own blocks B, projected, + u·u'/(u'Au). The probes see only what M leaves.
    /// </summary>
    private void Probe(FourSolves solves)
    {
        var n = _s.Graph.Vehicles;
        var (sum, squares) = (new double[Lanes * n], new double[Lanes * n]);
        var (signs, start, times, x) = (new float[Stride * n], new float[Stride * n], new float[Stride * n], new float[Stride * n]);
        // Witnesses have units of their own: probed in units of their errors, none drowns another.
        var unit = new float[Lanes * n];
        for (var i = 0; i < unit.Length; i++) unit[i] = i % Lanes == 3 ? 0 : (float)(1 / Math.Sqrt(_conditional[i]));
        var random = new MersenneTwister(20261201);
        var bits = new byte[(Stride * n + 7) / 8];
        var probes = 0;
        while (probes < LeastBatches * Sides || (probes < MostBatches * Sides && ProbeError > Ample))
        {
            probes += Sides;
            random.NextBytes(bits);
            for (var i = 0; i < signs.Length; i++) signs[i] = (bits[i >> 3] >> (i & 7) & 1) == 0 ? -unit[Lanes * (i / Stride) + i % Lanes] : unit[Lanes * (i / Stride) + i % Lanes];
            solves.Precondition(signs, start);
            solves.Multiply(start, times);
            for (var i = 0; i < times.Length; i++) times[i] = signs[i] - times[i];
            Array.Clear(x);
            solves.Solve(times, x, ProbeFall, MostSteps);
            for (var i = 0; i < x.Length; i++)
            {
                var (at, seen) = (Lanes * (i / Stride) + i % Lanes, (double)signs[i] * x[i]);
                sum[at] += seen;
                squares[at] += seen * seen;
            }
            ProbeError = 0;
            for (var i = 0; i < sum.Length; i++)
                if (Probed(i)) ProbeError = Math.Max(ProbeError, Math.Sqrt(Math.Max(0, squares[i] / probes - Math.Pow(sum[i] / probes, 2)) / probes));
        }
        for (var i = 0; i < sum.Length; i++)
            if (Probed(i)) _conditional[i] *= Math.Max(LeastShare, 1 + sum[i] / probes);
    }

    private bool Probed(int i) => i % Lanes < 3 && !_dense.Holds(_s.Component[i / Lanes]);

    private double Cell(int c, double[] answer, double[] blocks)
    {
        var (pivot, prior) = (_s.Pivot[c], _s.Priors[c]);
        Array.Clear(answer);
        var (dense, conditional, slow) = (_dense.Holds(_s.CellComponent[c]), 0.0, 0.0);
        for (var j = _s.Graph.CellFrom[c]; j < _s.Graph.CellFrom[c + 1]; j++)
        {
            var (v, g) = (_s.Graph.VehicleOf[j], _s.GainAt + Lanes * _s.ClassOf[_s.Graph.VehicleOf[j]]);
            if (!dense) conditional += Across(v, j, blocks);
            slow += Vector256.Dot(RoadSystem.Load(_s.ByCell, j) & RoadSystem.Witnesses, Vector256.LoadUnsafe(ref _slow[Lanes * v]));
            for (var lane = 0; lane < 3; lane++)
            {
                double load = _s.ByCell[Lanes * j + lane];
                if (load == 0) continue;
                var at = Lanes * v + lane;
                Add(answer, load, _answers.AsSpan(at * answer.Length, answer.Length));
                if (lane < 2 && Array.IndexOf(_border, g + lane) is var own and >= 0) answer[own] -= load * _s.Bank[c];
            }
        }
        if (prior.OnLevel)
        {
            answer[^1] += prior.Weight;
            if (Array.IndexOf(_border, _s.CrownAt + _s.CellSide[c]) is var crown and >= 0) answer[crown] += prior.Weight;
        }
        for (var y = 0; y < answer.Length; y++) answer[y] /= pivot;
        return 1 / pivot + (dense ? _cells[c] : (conditional + slow * slow) / (pivot * pivot)) + _covariance.Of(_s.CellComponent[c], answer);
    }

    private static void Add(Span<double> to, double factor, ReadOnlySpan<double> row)
    {
        var (i, factors) = (0, Vector256.Create(factor));
        for (; i + Lanes <= to.Length; i += Lanes)
            (Vector256.LoadUnsafe(ref to[i]) + factors * Vector256.LoadUnsafe(in row[i])).StoreUnsafe(ref to[i]);
        for (; i < to.Length; i++) to[i] += factor * row[i];
    }

    /// <summary>Each vehicle's own covariance: the inverse of its block, scaled to the variances found less what the slow direction brings to all alike.</summary>
    private double[] ScaledBlocks()
    {
        var blocks = (double[])_s.Block.Clone();
        for (var v = 0; v < _s.Graph.Vehicles; v++)
        {
            var at = 3 * Lanes * v;
            for (var lane = 0; lane < 3; lane++)
                for (var other = 0; other < 3; other++)
                    blocks[at + Lanes * lane + other] *= Math.Sqrt(Own(Lanes * v + lane) / _s.Block[at + Lanes * lane + lane] * Own(Lanes * v + other) / _s.Block[at + Lanes * other + other]);
        }
        return blocks;
    }

    private double Own(int i) => Math.Max(LeastShare * _conditional[i], _conditional[i] - _slow[i] * _slow[i]);

    /// <summary>What a vehicle's own covariance makes of its loads on a cell.</summary>
    private double Across(int v, int pair, double[] blocks)
    {
        var (loads, at) = (RoadSystem.Load(_s.ByCell, pair), 3 * Lanes * v);
        var answer = Vector256.LoadUnsafe(ref blocks[at]) * loads[0] + Vector256.LoadUnsafe(ref blocks[at], Lanes) * loads[1] + Vector256.LoadUnsafe(ref blocks[at], 2 * Lanes) * loads[2];
        return Vector256.Dot(answer, loads); // the last lane of a block is 0
    }
}
