using MathNet.Numerics.LinearAlgebra;
using WearWatch.Diagnosis.Roads;

namespace WearWatch.Diagnosis.Tests.Roads;

public class TwoWayEffectsTests
{
    /// <summary>Three vehicles on three segments, y = vehicle + segment, exact: raw means 1.5, 3.1, 1.4 mislead.</summary>
    [Fact]
    public void Two_way_effects_come_apart_where_vehicles_share_segments()
    {
        var fit = TwoWayEffects.Fit([0, 0, 1, 1, 2, 2], [0, 1, 1, 2, 0, 2], [1, 2, 2.6f, 3.6f, 0.4f, 2.4f]);
        double[] vehicle = [0, 0.6, -0.6], segment = [1, 2, 3];
        for (var i = 0; i < 3; i++) Assert.Equal(vehicle[i], fit.Rows[i], 1e-6);
        for (var i = 0; i < 3; i++) Assert.Equal(segment[i], fit.Columns[i], 1e-6);
        Assert.Equal(0, fit.ResidualSquares, 1e-12);
        Assert.Equal(1, fit.Groups);
    }

    /// <summary>Diameters of growth inhibition, mm: 24 plates (rows) by 6 samples (Davies and Goldsmith, Statistical Methods in Research and Production, 1972).</summary>
    private static readonly float[] Penicillin =
    [
        27, 23, 26, 23, 23, 21, 27, 23, 26, 23, 23, 21, 25, 21, 25, 24, 24, 20, 26, 23, 25, 23, 23, 20, 25, 22, 26, 22, 23, 20, 24, 22, 25, 23, 22, 19,
        24, 20, 23, 21, 22, 19, 26, 22, 26, 24, 24, 21, 24, 21, 24, 22, 22, 20, 24, 21, 24, 23, 22, 19, 26, 23, 26, 24, 24, 21, 25, 22, 26, 24, 24, 20,
        26, 24, 26, 24, 25, 22, 26, 23, 26, 23, 23, 20, 26, 23, 25, 24, 24, 22, 25, 22, 25, 23, 23, 20, 25, 21, 24, 23, 23, 20, 25, 22, 24, 23, 23, 19,
        24, 21, 23, 21, 21, 19, 26, 23, 26, 24, 24, 21, 25, 21, 24, 22, 22, 18, 25, 22, 25, 22, 22, 20, 24, 21, 24, 22, 24, 19, 24, 21, 24, 22, 21, 18,
    ];

    [Fact]
    public void Penicillin_gives_its_published_mean_squares_and_variances()
    {
        int[] plate = [.. Enumerable.Range(0, 144).Select(i => i / 6)], sample = [.. Enumerable.Range(0, 144).Select(i => i % 6)], one = new int[144];
        var both = TwoWayEffects.Fit(plate, sample, Penicillin).ResidualSquares;
        var plates = (TwoWayEffects.Fit(one, sample, Penicillin).ResidualSquares - both) / 23;
        var samples = (TwoWayEffects.Fit(one, plate, Penicillin).ResidualSquares - both) / 5;
        var rest = both / (23 * 5);
        // Mean squares and variance components: Davies and Goldsmith 1972, as recomputed in R.
        Assert.Equal(4.603865, plates, 1e-5);
        Assert.Equal(89.844444, samples, 1e-4);
        Assert.Equal(0.302415, rest, 1e-6);
        Assert.Equal(0.7169, (plates - rest) / 6, 1e-4);
        Assert.Equal(3.731, (samples - rest) / 24, 1e-3);
        Assert.Equal(0.3024, rest, 1e-4);
    }

    [Fact]
    public void Plain_effects_are_the_dense_least_squares_answer()
    {
        var random = new Random(5);
        int[] row = [.. Enumerable.Range(0, 400).Select(_ => random.Next(20))], column = [.. Enumerable.Range(0, 400).Select(_ => random.Next(30))];
        float[] y = [.. Enumerable.Range(0, 400).Select(_ => (float)(10 * random.NextDouble()))];
        var design = Matrix<double>.Build.Dense(401, 50);
        for (var i = 0; i < 400; i++) (design[i, row[i]], design[i, 20 + column[i]]) = (1, 1);
        for (var r = 0; r < 20; r++) design[400, r] = 1; // rows sum to zero
        var expected = design.QR().Solve(Vector<double>.Build.Dense([.. y.Select(v => (double)v), 0])); // MathNet, all unknowns at once
        var fit = TwoWayEffects.Fit(row, column, y);
        for (var r = 0; r < 20; r++) Assert.Equal(expected[r], fit.Rows[r], 1e-6);
        for (var c = 0; c < 30; c++) Assert.Equal(expected[20 + c], fit.Columns[c], 1e-6);
    }

    [Fact]
    public void Groups_that_share_nothing_are_told_apart_and_each_sums_to_zero()
    {
        var fit = TwoWayEffects.Fit([0, 1, 3, 4], [0, 0, 2, 2], [1, 3, 10, 30]);
        Assert.Equal(2, fit.Groups);
        Assert.Equal([-1, 1, -10, 10], new[] { fit.Rows[0], fit.Rows[1], fit.Rows[3], fit.Rows[4] }.Select(x => Math.Round(x, 6)));
        Assert.True(double.IsNaN(fit.Rows[2]) && double.IsNaN(fit.Columns[1]));
    }
}
