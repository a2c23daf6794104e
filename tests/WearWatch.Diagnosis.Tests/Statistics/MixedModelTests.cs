using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tests.Statistics;

public class MixedModelTests
{
    private static double[] Ones(int n) => [.. Enumerable.Repeat(1.0, n)];

    private static RandomTerm Term(double[] level, params double[][] columns) => new([.. level.Select(l => (int)l)], (int)level.Max() + 1, columns);

    private static double Sd(MixedFit fit, int term, int column = 0) => Math.Sqrt(fit.Covariances[term][column, column]);

    [Fact]
    public void Sleepstudy_with_intercept_and_slope_by_subject()
    {
        // lme4, R 4.2.2: lmer(Reaction ~ Days + (Days | Subject)), REML.
        var d = ReferenceData.Read("sleepstudy.csv");
        var one = Ones(d["days"].Length);
        var fit = MixedModel.Fit(d["reaction"], [one, d["days"]], [Term(d["subject"], one, d["days"])]);
        Assert.Equal(251.4051, fit.Fixed[0].Value, 1e-3);
        Assert.Equal(10.4673, fit.Fixed[1].Value, 1e-3);
        Assert.Equal(6.8246, fit.Fixed[0].StandardError, 2e-3);
        Assert.Equal(1.5458, fit.Fixed[1].StandardError, 1e-3);
        Assert.Equal(612.10, fit.Covariances[0][0, 0], 0.5);
        Assert.Equal(35.07, fit.Covariances[0][1, 1], 0.05);
        Assert.Equal(0.066, fit.Covariances[0][0, 1] / Sd(fit, 0) / Sd(fit, 0, 1), 2e-3);
        Assert.Equal(654.94, fit.ResidualVariance, 0.1);
        Assert.Equal(1743.628, fit.Deviance, 1e-3);
        Assert.Equal(2.2586, fit.Effects[0][0, 0].Value, 0.02);
        Assert.Equal(9.1990, fit.Effects[0][0, 1].Value, 0.01);
        Assert.Equal(1751.939, MixedModel.Fit(d["reaction"], [one, d["days"]], [Term(d["subject"], one, d["days"])], restricted: false).Deviance, 1e-3);
    }

    [Fact]
    public void Dyestuff_by_batch()
    {
        // lme4, R 4.2.2, REML: variances 1764.05 and 2451.25, mean 1527.5.
        var d = ReferenceData.Read("dyestuff.csv");
        var fit = MixedModel.Fit(d["yield"], [Ones(30)], [Term(d["batch"], Ones(30))]);
        Assert.Equal(1764.05, fit.Covariances[0][0, 0], 0.1);
        Assert.Equal(2451.25, fit.ResidualVariance, 0.1);
        Assert.Equal(1527.5, fit.Fixed[0].Value, 1e-6);
    }

    [Fact]
    public void Rail_by_rail()
    {
        // nlme, R 4.2.2, REML: standard deviations 24.8055 and 4.0208, mean 66.5.
        var d = ReferenceData.Read("rail.csv");
        var fit = MixedModel.Fit(d["travel"], [Ones(18)], [Term(d["rail"], Ones(18))]);
        Assert.Equal(24.8055, Sd(fit, 0), 1e-3);
        Assert.Equal(4.0208, Math.Sqrt(fit.ResidualVariance), 1e-3);
        Assert.Equal(66.5, fit.Fixed[0].Value, 1e-9);
    }

    [Fact]
    public void Orthodont_with_intercept_and_slope_by_subject()
    {
        // nlme, R 4.2.2, REML: 16.7611 + 0.660185 age; standard deviations 2.327, 0.2264, 1.310; correlation −0.609.
        var d = ReferenceData.Read("orthodont.csv");
        var one = Ones(108);
        var fit = MixedModel.Fit(d["distance"], [one, d["age"]], [Term(d["subject"], one, d["age"])]);
        Assert.Equal(16.7611, fit.Fixed[0].Value, 1e-4);
        Assert.Equal(0.660185, fit.Fixed[1].Value, 1e-6);
        Assert.Equal(2.327, Sd(fit, 0), 2e-3);
        Assert.Equal(0.2264, Sd(fit, 0, 1), 2e-4);
        Assert.Equal(1.310, Math.Sqrt(fit.ResidualVariance), 1e-3);
        Assert.Equal(-0.609, fit.Covariances[0][0, 1] / Sd(fit, 0) / Sd(fit, 0, 1), 1e-3);
    }

    [Fact]
    public void Penicillin_with_crossed_plates_and_samples()
    {
        // Mean squares 4.603865, 89.844444, 0.302415 of a balanced two-way table: variances .7169, 3.731, .3024, mean 22.9722 (R 4.2.2).
        var d = ReferenceData.Read("penicillin.csv");
        var one = Ones(144);
        var fit = MixedModel.Fit(d["diameter"], [one], [Term(d["plate"], one), Term(d["sample"], one)]);
        Assert.Equal((4.603865 - 0.302415) / 6, fit.Covariances[0][0, 0], 1e-3);
        Assert.Equal(3.731, fit.Covariances[1][0, 0], 0.002);
        Assert.Equal(0.3024, fit.ResidualVariance, 1e-4);
        Assert.Equal(22.9722, fit.Fixed[0].Value, 1e-4);
        Assert.All(fit.Effects[1].Cast<Estimate>(), e => Assert.True(e.StandardError > 0));
    }

    [Fact]
    public void The_order_of_cases_does_not_matter()
    {
        var d = ReferenceData.Read("rail.csv");
        var turned = MixedModel.Fit([.. d["travel"].Reverse()], [Ones(18)], [Term([.. d["rail"].Reverse()], Ones(18))]);
        var straight = MixedModel.Fit(d["travel"], [Ones(18)], [Term(d["rail"], Ones(18))]);
        Assert.Equal(straight.Deviance, turned.Deviance, 1e-7);
        Assert.Equal(straight.Effects[0][3, 0].Value, turned.Effects[0][3, 0].Value, 1e-4);
    }
}
