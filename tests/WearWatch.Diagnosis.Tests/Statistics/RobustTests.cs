using CsCheck;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tests.Statistics;

public class RobustTests
{
    private static double[,] Design(double[] a, double[]? b = null, double[]? c = null)
    {
        var columns = new[] { a, b, c }.OfType<double[]>().ToArray();
        var x = new double[a.Length, columns.Length + 1];
        for (var i = 0; i < a.Length; i++)
        {
            x[i, 0] = 1;
            for (var j = 0; j < columns.Length; j++) x[i, j + 1] = columns[j][i];
        }
        return x;
    }

    [Fact]
    public void Stackloss_by_huber()
    {
        // Brownlee's stack loss; MASS rlm of R 4.2.2, k = 1.345, MAD scale.
        var d = ReferenceData.Read("stackloss.csv");
        var fit = RobustRegression.Fit(Design(d["air"], d["water"], d["acid"]), d["loss"], RobustLoss.Huber);
        Assert.Equal([-41.0265, 0.82938, 0.92606, -0.12785], fit.Coefficients.Select((c, i) => Math.Round(c, i == 0 ? 4 : 5)), new Within(2e-4));
        Assert.Equal(0.92606, fit.Coefficients[2], 1e-4);
        Assert.Equal(2.4405, fit.Scale, 1e-3);
    }

    [Fact]
    public void Stackloss_by_bisquare_leaves_out_the_known_outliers()
    {
        // MASS rlm of R 4.2.2, psi.bisquare c = 4.685; outliers 1, 3, 4 and 21 (Rousseeuw and Leroy 1987).
        var d = ReferenceData.Read("stackloss.csv");
        var fit = RobustRegression.Fit(Design(d["air"], d["water"], d["acid"]), d["loss"], RobustLoss.Bisquare);
        Assert.Equal([-42.2853, 0.92756, 0.65071, -0.11233], fit.Coefficients, new Within(1e-3));
        Assert.Equal(2.2819, fit.Scale, 1e-3);
        Assert.Equal([3, 20], fit.Weights.Select((w, i) => (w, i)).OrderBy(p => p.w).Take(2).Select(p => p.i).Order());
    }

    [Fact]
    public void Stackloss_by_least_median_of_squares()
    {
        // MASS lqs, method "lms", all subsets: −34.25 + 0.7143 air + 0.3571 water − 3.5e-17 acid, as in its manual (from memory); Rousseeuw and Leroy 1987 print −34.5, 0.714, 0.357, 0.000.
        var d = ReferenceData.Read("stackloss.csv");
        var beta = LeastMedianOfSquares.Fit(Design(d["air"], d["water"], d["acid"]), d["loss"]);
        Assert.Equal(-34.25, beta[0], 1e-6);
        Assert.Equal(0.7143, beta[1], 5e-5);
        Assert.Equal(0.3571, beta[2], 5e-5);
        Assert.Equal(0, beta[3], 1e-9);
    }

    [Fact]
    public void Telephone_calls_by_huber()
    {
        // Rousseeuw and Leroy 1987; MASS rlm of R 4.2.2, which stops at a change of 1e-4 on a slow approach: hence the width.
        var d = ReferenceData.Read("phones.csv");
        var fit = RobustRegression.Fit(Design(d["x"]), d["y"], RobustLoss.Huber);
        Assert.Equal(-102.622, fit.Coefficients[0], 0.1);
        Assert.Equal(2.0414, fit.Coefficients[1], 2e-3);
        Assert.Equal(1.3875, TheilSen.Fit(d["x"], d["y"]).Slope, 1e-4);
    }

    [Fact]
    public void Star_cluster_slope_turns_its_sign_with_the_robust_line()
    {
        // Rousseeuw and Leroy 1987: least squares −0.4133, median of pair slopes +1.72727.
        var d = ReferenceData.Read("stars.csv");
        Assert.Equal(-0.4133, Line.Fit(d["x"], d["y"]).Slope, 1e-4);
        Assert.Equal(1.72727, TheilSen.Fit(d["x"], d["y"]).Slope, 1e-5);
    }

    [Fact]
    public void Tyre_life_by_median_of_pair_slopes()
    {
        // Stichler, Richey and Mandel 1953: 120 pairs, slope 1.132698, median rest 1.567155.
        var d = ReferenceData.Read("tyre_wear_1953.csv");
        var line = TheilSen.Fit(d["x"], d["y"]);
        Assert.Equal(120, line.Pairs);
        Assert.Equal(1.132698, line.Slope, 1e-6);
        Assert.Equal(1.567155, line.Intercept, 1e-6);
        Assert.InRange(line.Slope, line.Low, line.High);
    }

    [Fact]
    public void One_bad_reading_in_five_does_not_turn_the_line() =>
        Gen.Select(Gen.Double[-0.3, -0.02], Gen.Double[4, 20], Gen.Int[0, 4], Gen.Double[-8, 8]).Sample((slope, depth, bad, off) =>
        {
            double[] x = [0, 5, 11, 16, 24];
            var y = x.Select((v, i) => depth + slope * v + (i == bad ? off : 0)).ToArray();
            // One of five points spoils four of ten pairs, so the median pair is between honest ones.
            Assert.Equal(slope, TheilSen.Fit(x, y).Slope, 1e-9);
        });

    [Fact]
    public void A_quarter_of_fast_tyres_hardly_moves_the_middle()
    {
        var random = new Random(5);
        double Noise() => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());
        var members = Enumerable.Range(0, 200).Select(i => new Estimate(0.1 * (1 + 0.1 * Noise()) * (i % 4 == 0 ? 2.2 : 1) + 0.004 * Noise(), 0.004)).ToList();
        var pooled = PooledLocation.Fit(members, 0.002);
        Assert.InRange(pooled.Centre.Value, 0.097, 0.104);
        Assert.True(members.Average(m => m.Value) > 0.125);
        Assert.InRange(pooled.BetweenSd, 0.007, 0.02);
    }

    [Fact]
    public void A_belief_updated_reading_by_reading_is_the_least_squares_line_when_the_prior_is_wide()
    {
        double[] x = [0, 10, 20, 30, 40], y = [8, 7.2, 6.5, 5.6, 4.9];
        var belief = new LineBelief(new(0, 1e4), new(0, 1e4));
        for (var i = 0; i < x.Length; i++) belief.Take(x[i], y[i], 0.01);
        Assert.Equal(-0.078, belief.Slope.Value, 1e-6);
        Assert.Equal(0.1 / Math.Sqrt(1000), belief.Slope.StandardError, 1e-6);
    }

    [Fact]
    public void A_bias_shared_by_all_readings_costs_the_slope_nothing()
    {
        double[] x = [0, 10, 20], y = [8, 7.2, 6.5];
        CorrelatedLine Fit(int[] reader) => CorrelatedLine.Fit([.. x.Select((v, i) => new LineReading(v, y[i], 0.01, reader[i], 0.04))])!;
        Assert.Equal(0.1 / Math.Sqrt(200), Fit([0, 0, 0]).Slope.StandardError, 1e-9);
        Assert.True(Fit([0, 1, 2]).Slope.StandardError > 2 * 0.1 / Math.Sqrt(200));
    }

    private sealed class Within(double tolerance) : IEqualityComparer<double>
    {
        public bool Equals(double a, double b) => Math.Abs(a - b) <= tolerance * Math.Max(1, Math.Abs(a));

        public int GetHashCode(double value) => 0;
    }
}
