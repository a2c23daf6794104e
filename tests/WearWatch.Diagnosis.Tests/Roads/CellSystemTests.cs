using MathNet.Numerics.LinearAlgebra;
using WearWatch.Diagnosis.Roads;

namespace WearWatch.Diagnosis.Tests.Roads;

public class CellSystemTests
{
    /// <summary>Random rows over so many globals and cells, sorted as the system wants them, every unknown held by a prior.</summary>
    private static CellRow[] Rows(int globals, int cells, int count, int seed)
    {
        var random = new Random(seed);
        var rows = new List<CellRow>();
        for (var g = 0; g < globals; g++) rows.Add(new(-1, 0, g, 1, -1, 0, -1, 0, random.NextDouble(), 0.5));
        var inCells = new List<CellRow>();
        for (var c = 0; c < cells; c++) inCells.Add(new(c, 1, random.Next(globals), -1, -1, 0, -1, 0, 0.1, 2));
        for (var k = 0; k < count; k++)
            inCells.Add(new(random.Next(cells), 1 + random.NextDouble(), random.Next(globals), 1, random.Next(globals), random.NextDouble(), -1, 0, random.NextDouble() * 4 - 2, 0.2 + random.NextDouble()));
        return [.. rows, .. inCells.OrderBy(r => r.Cell)];
    }

    private static (Matrix<double> Design, Vector<double> Target) Dense(int globals, int cells, CellRow[] rows)
    {
        var design = Matrix<double>.Build.Dense(rows.Length, globals + cells);
        var target = Vector<double>.Build.Dense(rows.Length);
        for (var i = 0; i < rows.Length; i++)
        {
            var (r, root) = (rows[i], Math.Sqrt(rows[i].Weight));
            if (r.Cell >= 0) design[i, globals + r.Cell] += root * r.CellFactor;
            if (r.A >= 0) design[i, r.A] += root * r.FactorA;
            if (r.B >= 0) design[i, r.B] += root * r.FactorB;
            if (r.C >= 0) design[i, r.C] += root * r.FactorC;
            target[i] = root * r.Target;
        }
        return (design, target);
    }

    [Fact]
    public void Eliminating_cells_gives_the_dense_least_squares_answer_and_its_errors()
    {
        var rows = Rows(15, 8, 120, 3);
        var (design, target) = Dense(15, 8, rows);
        var expected = design.QR().Solve(target); // MathNet, all unknowns at once
        var covariance = design.TransposeThisAndMultiply(design).Inverse();
        var system = new CellSystem(15, 8, rows);
        var u = system.Solve(new double[15]);
        var (cells, variance, cellVariance) = (system.Cells(u), system.GlobalVariances(), system.CellVariances());
        for (var i = 0; i < 15; i++) Assert.Equal(expected[i], u[i], 1e-9);
        for (var c = 0; c < 8; c++) Assert.Equal(expected[15 + c], cells[c], 1e-9);
        for (var i = 0; i < 15; i++) Assert.Equal(covariance[i, i], variance[i], 1e-10);
        for (var c = 0; c < 8; c++) Assert.Equal(covariance[15 + c, 15 + c], cellVariance[c], 1e-10);
    }

    [Fact]
    public void Beyond_the_dense_size_the_answer_is_the_same_and_errors_are_within_a_few_percent()
    {
        // Copies of one small system side by side: large for the solver, yet each copy has the small one's dense answer.
        const int globals = 15, cells = 8, copies = CellSystem.LargestDense / 15 + 10;
        var one = Rows(globals, cells, 120, 3);
        var (design, target) = Dense(globals, cells, one);
        var expected = design.QR().Solve(target);
        var covariance = design.TransposeThisAndMultiply(design).Inverse();
        int Move(int index, int by) => index < 0 ? -1 : index + by;
        var many = Enumerable.Range(0, copies).SelectMany(k => one.Select(r => r with
        {
            Cell = Move(r.Cell, k * cells),
            A = Move(r.A, k * globals),
            B = Move(r.B, k * globals),
        })).OrderBy(r => r.Cell).ToArray();
        var system = new CellSystem(copies * globals, copies * cells, many);
        var (u, variance) = (system.Solve(new double[copies * globals]), system.GlobalVariances());
        for (var i = 0; i < u.Length; i++) Assert.Equal(expected[i % globals], u[i], 1e-7);
        var ratios = variance.Select((v, i) => v / covariance[i % globals, i % globals]).Order().ToArray();
        Assert.InRange(ratios[ratios.Length / 2], 0.97, 1.03);
        Assert.InRange(ratios[ratios.Length / 10], 0.85, 1.0);
        Assert.InRange(ratios[ratios.Length * 9 / 10], 1.0, 1.15);
    }

    /// <summary>Three vehicles on three segments, y = vehicle + segment, exact: A 1, 2; B 2.6, 3.6; C 0.4, 2.4. Raw means 1.5, 3.1, 1.4 mislead.</summary>
    [Fact]
    public void Two_way_effects_come_apart_where_vehicles_share_segments()
    {
        (int Vehicle, int Segment, double Y)[] table = [(0, 0, 1), (0, 1, 2), (1, 1, 2.6), (1, 2, 3.6), (2, 0, 0.4), (2, 2, 2.4)];
        // A feather-light pull to zero picks, of all equal answers, the one whose vehicles sum to zero.
        var rows = Enumerable.Range(0, 3).Select(v => new CellRow(-1, 0, v, 1, -1, 0, -1, 0, 0, 1e-9))
            .Concat(table.OrderBy(t => t.Segment).Select(t => new CellRow(t.Segment, 1, t.Vehicle, 1, -1, 0, -1, 0, t.Y, 1))).ToArray();
        var system = new CellSystem(3, 3, rows);
        var vehicles = system.Solve(new double[3]);
        var segments = system.Cells(vehicles);
        double[] vehicle = [0, 0.6, -0.6], segment = [1, 2, 3];
        for (var i = 0; i < 3; i++) Assert.Equal(vehicle[i], vehicles[i], 1e-6);
        for (var i = 0; i < 3; i++) Assert.Equal(segment[i], segments[i], 1e-6);
    }
}
