using WearWatch.Diagnosis.Changes;
using WearWatch.Diagnosis.Tests.Statistics;

namespace WearWatch.Diagnosis.Tests.Changes;

public class ControlChartTests
{
    // D. C. Montgomery, Introduction to Statistical Quality Control: target 10, k 0.5, h 5; C+ 5.28 at 29, N+ 7, so the shift began after 22.
    [Fact]
    public void Montgomerys_CUSUM_sounds_at_29_and_dates_the_shift_after_22()
    {
        var x = ReferenceData.Read("../Changes/montgomery.csv")["x"];
        var cusum = new Cusum();
        for (var i = 0; i < x.Length; i++)
        {
            cusum = cusum.With(x[i] - 10, 0.5);
            Assert.Equal(i >= 28, cusum.Up > 5);
            Assert.True(cusum.Down < 5);
            if (i == 1) Assert.Equal(1.56, cusum.Down, 1e-9);
            if (i != 28) continue;
            Assert.Equal(5.28, cusum.Up, 1e-9);
            Assert.Equal(7, cusum.UpSince);
        }
    }

    // The same data, lambda 0.1, L 2.7: z 9.945, 9.7495; first beyond its limit at 29 (10.647 against 10.619).
    [Fact]
    public void Montgomerys_EWMA_sounds_at_29()
    {
        var x = ReferenceData.Read("../Changes/montgomery.csv")["x"];
        var ewma = new Ewma();
        for (var i = 0; i < x.Length; i++)
        {
            ewma = ewma.With(x[i] - 10, 0.1);
            Assert.Equal(i >= 28, ewma.Beyond(2.7));
            if (i == 0) Assert.Equal(9.945, 10 + ewma.Z, 1e-9);
            if (i == 1) Assert.Equal(9.7495, 10 + ewma.Z, 1e-9);
            if (i == 28) Assert.Equal((10.647, 10.619), (Math.Round(10 + ewma.Z, 3), Math.Round(10 + 2.7 * Math.Sqrt(ewma.Variance), 3)));
        }
    }

    // NIST/SEMATECH e-Handbook, 6.3.2.4: lambda 0.3, target 50, s 2.0539; limits 47.4115 and 52.5884, last EWMA 51.99, none beyond.
    [Fact]
    public void NISTs_EWMA_stays_within_its_limits()
    {
        var data = ReferenceData.Read("../Changes/nist_ewma.csv");
        const double s = 2.0539;
        var ewma = new Ewma();
        for (var i = 0; i < data["x"].Length; i++)
        {
            ewma = ewma.With((data["x"][i] - 50) / s, 0.3);
            Assert.Equal(data["z"][i], 50 + s * ewma.Z, 0.0051);
            Assert.InRange(50 + s * ewma.Z, 47.4115, 52.5884);
        }
        Assert.Equal(51.99, 50 + s * ewma.Z, 0.005);
        Assert.Equal(52.5884, 50 + 3 * s * Math.Sqrt(0.3 / 1.7), 1e-4);
    }

    // NIST/SEMATECH e-Handbook, 6.3.2.3 (from memory): target 325, k 0.3175, h 4.1959; first alarm at group 14 with 4.94, end at 19.035.
    [Fact]
    public void NISTs_CUSUM_sounds_at_the_fourteenth_group()
    {
        var x = ReferenceData.Read("../Changes/nist_cusum.csv")["x"];
        var cusum = new Cusum();
        for (var i = 0; i < x.Length; i++)
        {
            cusum = cusum.With(x[i] - 325, 0.3175);
            Assert.Equal(i >= 13, cusum.Up > 4.1959);
            if (i == 13) Assert.Equal(4.94, cusum.Up, 0.005);
        }
        Assert.Equal(19.035, cusum.Up, 1e-9);
    }

    // Two-sided CUSUM, k 0.5: R package spc 0.6.7; h 4 and 5 in order 168 and 465 also in Montgomery.
    [Theory]
    [InlineData(4, 0, 167.68)]
    [InlineData(4, 0.5, 26.63)]
    [InlineData(4, 1, 8.383)]
    [InlineData(4, 2, 3.343)]
    [InlineData(5, 0, 465.44)]
    [InlineData(5, 0.5, 38.0)]
    [InlineData(5, 1, 10.376)]
    [InlineData(5, 2, 4.009)]
    public void Run_lengths_of_the_CUSUM_are_the_published_ones(double limit, double shift, double published) =>
        Assert.Equal(1, RunLength.Cusum(0.5, limit, shift) / published, 0.003);

    // Lucas and Saccucci, Technometrics 32 (1990) 1, designs of run length 500 in order and their run length at a shift of 1 (from memory).
    [Theory]
    [InlineData(0.40, 3.054, 0, 500)]
    [InlineData(0.25, 2.998, 0, 500)]
    [InlineData(0.10, 2.814, 0, 500)]
    [InlineData(0.25, 2.998, 1, 11.1)]
    [InlineData(0.10, 2.814, 1, 10.3)]
    public void Run_lengths_of_the_EWMA_are_the_published_ones(double weight, double limit, double shift, double published) =>
        Assert.Equal(1, RunLength.Ewma(weight, limit, shift) / published, 0.01);

    [Fact]
    public void A_limit_found_for_a_run_length_has_that_run_length()
    {
        var limit = RunLength.LimitFor(465.44, h => RunLength.Cusum(0.5, h));
        Assert.Equal(5, limit, 0.01);
    }

    [Fact]
    public void Equal_weights_give_the_closed_variance()
    {
        var ewma = new Ewma();
        for (var i = 1; i <= 30; i++)
        {
            ewma = ewma.With(0.3, 0.2);
            Assert.Equal(0.2 / 1.8 * (1 - Math.Pow(0.8, 2 * i)), ewma.Variance, 1e-12);
        }
    }

    [Fact]
    public void Two_short_ways_forget_as_much_as_the_one_they_make_up() =>
        Assert.Equal(1 - Ewma.Weight(700, 3000), (1 - Ewma.Weight(300, 3000)) * (1 - Ewma.Weight(400, 3000)), 1e-12);
}
