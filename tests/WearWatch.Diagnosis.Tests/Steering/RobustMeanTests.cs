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
}
