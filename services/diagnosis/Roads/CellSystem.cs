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

    /// <summary>Up to here the solve itself is direct; the inverse for the errors is direct up to <see cref="LargestDense"/>.</summary>
    private const int LargestDirect = 256;

    private const int Probes = 64;
    private const double ProbeEnergy = 1e-10; // far below the probes' own scatter

    private readonly double[] _pivot = Pivots(cells, rows);
    private Matrix<double>? _inverse;
    private double[]? _variances;

    /// <summary>Solves for the globals; <c>start</c> only speeds the iterative way up.</summary>
    public double[] Solve(double[] start)
    {
        if (globals > LargestDirect) return ConjugateGradients(Right(), start);
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
        var slot = Slots();
        foreach (var (cell, from, to) in Groups())
        {
            var load = Loads(from, to, slot);
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

    /// <summary>Σ weight·cellFactor·factor for each global the cell's equations touch, in order of first touch.</summary>
    private (int Index, double Load)[] Loads(int from, int to, int[] slot)
    {
        var load = new (int Index, double Load)[Math.Min(globals, 3 * (to - from))];
        var used = 0;
        void Touch(int index, double value)
        {
            if (index < 0) return;
            if (slot[index] < 0)
            {
                slot[index] = used;
                load[used++] = (index, 0);
            }
            load[slot[index]].Load += value;
        }
        for (var i = from; i < to; i++)
        {
            ref readonly var r = ref rows[i];
            var w = r.Weight * r.CellFactor;
            Touch(r.A, w * r.FactorA);
            Touch(r.B, w * r.FactorB);
            Touch(r.C, w * r.FactorC);
        }
        Array.Resize(ref load, used);
        foreach (var (index, _) in load) slot[index] = -1;
        return load;
    }

    private int[] Slots()
    {
        var slot = new int[globals];
        Array.Fill(slot, -1);
        return slot;
    }

    private Matrix<double> Schur()
    {
        var schur = new double[globals * globals]; // symmetric, so that row and column order are one
        void Add(int j, int k, double value)
        {
            if (j >= 0 && k >= 0) schur[j * globals + k] += value;
        }
        foreach (ref readonly var r in rows.AsSpan())
        {
            Add(r.A, r.A, r.Weight * r.FactorA * r.FactorA);
            Add(r.B, r.B, r.Weight * r.FactorB * r.FactorB);
            Add(r.C, r.C, r.Weight * r.FactorC * r.FactorC);
            Add(r.A, r.B, r.Weight * r.FactorA * r.FactorB);
            Add(r.B, r.A, r.Weight * r.FactorA * r.FactorB);
            Add(r.A, r.C, r.Weight * r.FactorA * r.FactorC);
            Add(r.C, r.A, r.Weight * r.FactorA * r.FactorC);
            Add(r.B, r.C, r.Weight * r.FactorB * r.FactorC);
            Add(r.C, r.B, r.Weight * r.FactorB * r.FactorC);
        }
        var slot = Slots();
        foreach (var (cell, from, to) in Groups())
        {
            var load = Loads(from, to, slot);
            foreach (var (j, lj) in load)
            {
                var row = schur.AsSpan(j * globals, globals);
                var scaled = lj / _pivot[cell];
                foreach (var (k, lk) in load) row[k] -= scaled * lk;
            }
        }
        return Matrix<double>.Build.Dense(globals, globals, schur);
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
            if (r.A >= 0 && r.A == r.B) diagonal[r.A] += 2 * r.Weight * r.FactorA * r.FactorB;
            if (r.A >= 0 && r.A == r.C) diagonal[r.A] += 2 * r.Weight * r.FactorA * r.FactorC;
            if (r.B >= 0 && r.B == r.C) diagonal[r.B] += 2 * r.Weight * r.FactorB * r.FactorC;
        }
        var slot = Slots();
        foreach (var (cell, from, to) in Groups())
            foreach (var (j, lj) in Loads(from, to, slot)) diagonal[j] -= lj * lj / _pivot[cell];
        return diagonal;
    }

    private double[] ConjugateGradients(double[] right, double[] start, double relativeEnergy = 1e-20)
    {
        var diagonal = SchurDiagonal();
        var u = (double[])start.Clone();
        var times = Times(u);
        var residual = right.Zip(times, (b, a) => b - a).ToArray();
        var scaled = residual.Zip(diagonal, (r, d) => r / d).ToArray();
        var direction = (double[])scaled.Clone();
        var energy = Dot(residual, scaled);
        var goal = relativeEnergy * Math.Max(energy, right.Zip(diagonal, (b, d) => b * b / d).Sum());
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
            var solved = ConjugateGradients(sign, sign.Zip(diagonal, (s, d) => s / d).ToArray(), ProbeEnergy);
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
