using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Steering;

public class RobustMeanTests
{
    private static double[] FirstOrder(Random random, int n, double rho)
    {
        var x = new double[n];
        var state = Normal(random);
        for (var i = 0; i < n; i++) x[i] = state = rho * state + Math.Sqrt(1 - rho * rho) * Normal(random);
        return x;
    }

    private static double Normal(Random random) => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());

    [Theory]
    [InlineData(0.0)]
    [InlineData(0.3)]
    [InlineData(0.6)]
    public void Ninety_percent_interval_of_a_correlated_mean_holds_the_truth(double rho)
    {
        var random = new Random(7);
        var held = Enumerable.Range(0, 2000).Count(_ =>
        {
            var e = RobustMean.Of(FirstOrder(random, 30, rho), 0.001, 10, 3000)!.Value;
            return e.Low <= 0 && 0 <= e.High;
        });
        Assert.InRange(held / 2000.0, 0.80, 0.97);
    }

    [Fact]
    public void One_gust_barely_moves_the_mean()
    {
        var calm = Enumerable.Range(0, 20).Select(i => 1 + 0.01 * (i % 3 - 1)).ToArray();
        var gust = calm.ToArray();
        gust[10] = 5;
        Assert.Equal(1, RobustMean.Huber(gust), 0.01);
        Assert.True(gust.Average() > 1.15);
    }

    [Fact]
    public void Whole_degrees_that_never_move_keep_the_full_error_of_their_step()
    {
        var e = RobustMean.Of(Enumerable.Repeat(3.0, 30).ToArray(), 1, 0, 3000)!.Value;
        Assert.Equal(1 / Math.Sqrt(12), e.StandardError, 1e-9); // uniform law over one step
    }

    [Fact]
    public void Two_blocks_are_no_mean() => Assert.Null(RobustMean.Of([1, 2, double.NaN], 0.1, 1, 30));

    [Theory]
    [InlineData(3)]
    [InlineData(29)]
    [InlineData(64)]
    [InlineData(65)]
    [InlineData(2000)]
    public void Single_and_double_precision_and_any_order_give_one_location(int n)
    {
        // Steps of a quarter tie; the bits of negative numbers descend.
        var random = new Random(n);
        var values = Enumerable.Range(0, n).Select(_ => (float)Math.Round(4 * Normal(random)) / 4).ToArray();
        var wide = values.Select(x => (double)x).ToArray();
        Assert.Equal(RobustMean.Huber(wide), RobustMean.Huber(values));
        Assert.Equal(RobustMean.Huber(wide), RobustMean.Huber(wide.Reverse().ToArray()));
        Assert.Equal(0, PullAt(wide, RobustMean.Huber(wide)), 1e-9);
    }

    /// <summary>Huber's condition (1964), worked out the plain way: the bounded distances from the location add up to nothing.</summary>
    private static double PullAt(double[] values, double centre)
    {
        double Middle(IEnumerable<double> of) { var s = of.Order().ToArray(); return (s[(s.Length - 1) / 2] + s[s.Length / 2]) / 2; }
        var median = Middle(values);
        var bound = RobustMean.HuberK * Middle(values.Select(x => Math.Abs(x - median))) / 0.6745;
        return values.Average(x => bound > 0 ? Math.Clamp(x - centre, -bound, bound) : x - centre);
    }
}
