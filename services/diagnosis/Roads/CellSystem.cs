using MathNet.Numerics.LinearAlgebra;

namespace WearWatch.Diagnosis.Roads;

/// <summary>One weighted equation: cellFactor·cell + Σ factor·global = target. Up to three globals; −1 where absent.</summary>
public readonly record struct CellRow(int Cell, double CellFactor, int A, double FactorA, int B, double FactorB, int C, double FactorC, double Target, double Weight)
{
    public double Globals(double[] u) => (A < 0 ? 0 : FactorA * u[A]) + (B < 0 ? 0 : FactorB * u[B]) + (C < 0 ? 0 : FactorC * u[C]);
}

/// <summary>
/// Weighted least squares in which every equation touches at most one cell: the cells are eliminated (Schur complement) and the
/// rest is solved densely or by conjugate gradients. Rows are sorted by cell; those without a cell (−1) come first.
/// Every global unknown must be held by at least one equation, as priors do.
/// </summary>
public sealed class CellSystem(int globals, int cells, CellRow[] rows)
{
    /// <summary>Beyond this many unknowns the solve is iterative and standard errors come from random probes.</summary>
    public const int LargestDense = 2000;

    private const int Probes = 64;

    private readonly double[] _pivot = Pivots(cells, rows);
    private Matrix<double>? _inverse;
    private double[]? _variances;

    /// <summary>Solves for the globals; <c>start</c> only speeds the iterative way up.</summary>
    public double[] Solve(double[] start)
    {
        if (globals > LargestDense) return ConjugateGradients(Right(), start);
        return Schur().Cholesky().Solve(Vector<double>.Build.DenseOfArray(Right())).ToArray();
    }

    /// <summary>Cells for given globals: each cell's equations alone decide it.</summary>
    public double[] Cells(double[] u)
    {
        var cell = new double[cells];
        foreach (var r in rows)
            if (r.Cell >= 0) cell[r.Cell] += r.Weight * r.CellFactor * (r.Target - r.Globals(u)) / _pivot[r.Cell];
        return cell;
    }

    /// <summary>Variance of every global. Dense: exact. Large: Hutchinson's estimate with the diagonal's inverse as control, 64 probes of fixed seed.</summary>
    public double[] GlobalVariances() => _variances ??= globals <= LargestDense ? Inverse().Diagonal().ToArray() : ProbedVariances();

    /// <summary>Variance of every cell: its own equations' plus what the globals' errors bring (their covariances are left out in the large case).</summary>
    public double[] CellVariances()
    {
        var variance = new double[cells];
        var diagonal = GlobalVariances();
        var inverse = globals <= LargestDense ? Inverse() : null;
        foreach (var (cell, from, to) in Groups())
        {
            var load = Loads(from, to);
            variance[cell] = 1 / _pivot[cell];
            foreach (var (j, lj) in load)
            {
                var scaled = lj / _pivot[cell];
                if (inverse is null) { variance[cell] += scaled * scaled * diagonal[j]; continue; }
                foreach (var (k, lk) in load) variance[cell] += scaled * lk / _pivot[cell] * inverse[j, k];
            }
        }
        return variance;
    }

    private Matrix<double> Inverse() => _inverse ??= Schur().Cholesky().Solve(Matrix<double>.Build.DenseIdentity(globals));

    private static double[] Pivots(int cells, CellRow[] rows)
    {
        var pivot = new double[cells];
        foreach (var r in rows) if (r.Cell >= 0) pivot[r.Cell] += r.Weight * r.CellFactor * r.CellFactor;
        return pivot;
    }

    private IEnumerable<(int Cell, int From, int To)> Groups()
    {
        for (var from = 0; from < rows.Length;)
        {
            var to = from + 1;
            while (to < rows.Length && rows[to].Cell == rows[from].Cell) to++;
            if (rows[from].Cell >= 0) yield return (rows[from].Cell, from, to);
            from = to;
        }
    }

    /// <summary>Σ weight·cellFactor·factor for each global the cell's equations touch, by index.</summary>
    private SortedDictionary<int, double> Loads(int from, int to)
    {
        var load = new SortedDictionary<int, double>();
        for (var i = from; i < to; i++)
        {
            var r = rows[i];
            var w = r.Weight * r.CellFactor;
            if (r.A >= 0) load[r.A] = load.GetValueOrDefault(r.A) + w * r.FactorA;
            if (r.B >= 0) load[r.B] = load.GetValueOrDefault(r.B) + w * r.FactorB;
            if (r.C >= 0) load[r.C] = load.GetValueOrDefault(r.C) + w * r.FactorC;
        }
        return load;
    }

    private Matrix<double> Schur()
    {
        var schur = Matrix<double>.Build.Dense(globals, globals);
        foreach (var r in rows)
        {
            Span<(int Index, double Factor)> parts = [(r.A, r.FactorA), (r.B, r.FactorB), (r.C, r.FactorC)];
            foreach (var (j, fj) in parts)
                foreach (var (k, fk) in parts)
                    if (j >= 0 && k >= 0) schur[j, k] += r.Weight * fj * fk;
        }
        foreach (var (cell, from, to) in Groups())
        {
            var load = Loads(from, to);
            foreach (var (j, lj) in load)
                foreach (var (k, lk) in load)
                    schur[j, k] -= lj * lk / _pivot[cell];
        }
        return schur;
    }

    private double[] Right()
    {
        var right = new double[globals];
        var share = new double[cells];
        foreach (var r in rows) if (r.Cell >= 0) share[r.Cell] += r.Weight * r.CellFactor * r.Target / _pivot[r.Cell];
        foreach (var r in rows) Scatter(right, r, r.Target - (r.Cell >= 0 ? r.CellFactor * share[r.Cell] : 0));
        return right;
    }

    /// <summary>Schur complement times a vector, without forming it.</summary>
    private double[] Times(double[] u)
    {
        var product = new double[globals];
        var share = new double[cells];
        foreach (var r in rows) if (r.Cell >= 0) share[r.Cell] += r.Weight * r.CellFactor * r.Globals(u) / _pivot[r.Cell];
        foreach (var r in rows) Scatter(product, r, r.Globals(u) - (r.Cell >= 0 ? r.CellFactor * share[r.Cell] : 0));
        return product;
    }

    private static void Scatter(double[] into, CellRow r, double value)
    {
        var w = r.Weight * value;
        if (r.A >= 0) into[r.A] += w * r.FactorA;
        if (r.B >= 0) into[r.B] += w * r.FactorB;
        if (r.C >= 0) into[r.C] += w * r.FactorC;
    }

    private double[] SchurDiagonal()
    {
        var diagonal = new double[globals];
        foreach (var r in rows)
        {
            if (r.A >= 0) diagonal[r.A] += r.Weight * r.FactorA * r.FactorA;
            if (r.B >= 0) diagonal[r.B] += r.Weight * r.FactorB * r.FactorB;
            if (r.C >= 0) diagonal[r.C] += r.Weight * r.FactorC * r.FactorC;
        }
        foreach (var (cell, from, to) in Groups())
            foreach (var (j, lj) in Loads(from, to)) diagonal[j] -= lj * lj / _pivot[cell];
        return diagonal;
    }

    private double[] ConjugateGradients(double[] right, double[] start)
    {
        var diagonal = SchurDiagonal();
        var u = (double[])start.Clone();
        var times = Times(u);
        var residual = right.Zip(times, (b, a) => b - a).ToArray();
        var scaled = residual.Zip(diagonal, (r, d) => r / d).ToArray();
        var direction = (double[])scaled.Clone();
        var energy = Dot(residual, scaled);
        var goal = 1e-20 * Math.Max(energy, right.Zip(diagonal, (b, d) => b * b / d).Sum());
        for (var iteration = 0; iteration < 20 * globals && energy > goal; iteration++)
        {
            times = Times(direction);
            var step = energy / Dot(direction, times);
            for (var i = 0; i < globals; i++)
            {
                u[i] += step * direction[i];
                residual[i] -= step * times[i];
                scaled[i] = residual[i] / diagonal[i];
            }
            var next = Dot(residual, scaled);
            for (var i = 0; i < globals; i++) direction[i] = scaled[i] + next / energy * direction[i];
            energy = next;
        }
        return u;
    }

    private double[] ProbedVariances()
    {
        var diagonal = SchurDiagonal();
        var variance = diagonal.Select(d => 1 / d).ToArray();
        var random = new MathNet.Numerics.Random.MersenneTwister(20261201);
        for (var probe = 0; probe < Probes; probe++)
        {
            var sign = Enumerable.Range(0, globals).Select(_ => random.NextDouble() < 0.5 ? -1.0 : 1.0).ToArray();
            var solved = ConjugateGradients(sign, sign.Zip(diagonal, (s, d) => s / d).ToArray());
            for (var i = 0; i < globals; i++) variance[i] += (sign[i] * solved[i] - 1 / diagonal[i]) / Probes;
        }
        // The inverse's diagonal is never below the diagonal's inverse.
        return variance.Zip(diagonal, (v, d) => Math.Max(v, 1 / d)).ToArray();
    }

    private static double Dot(double[] a, double[] b)
    {
        var sum = 0.0;
        for (var i = 0; i < a.Length; i++) sum += a[i] * b[i];
        return sum;
    }
}
