using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tests.Causes;

/// <summary>How common faults are, learnt from a fleet whose figures say more or less.</summary>
public sealed class FaultRatesTests
{
    private static readonly Quantity[] OfVan = [Quantity.FrontTotalToe, Quantity.RearTotalToe, Quantity.Thrust];

    /// <summary>A verdict under the default priors, from how much likelier the figures are under each angle than in order.</summary>
    private static Verdict Judged(params double[] ratios)
    {
        var prior = FaultPriors.Default;
        var total = OfVan.Sum(q => prior.AngleWeights[q]);
        double[] odds = [.. OfVan.Select((q, i) => prior.MisalignedShare * prior.AngleWeights[q] / total * ratios[i])];
        var all = odds.Sum() + 1 - prior.MisalignedShare;
        return new Verdict
        {
            MisalignedProbability = odds.Sum() / all,
            Causes = [.. OfVan.Select((q, i) => new Cause(q, 1, null, new Interval(0, -1, 1), true, odds[i] / all))],
        };
    }

    private static Verdict[] Fleet(int sound, int toe, int thrust, double ratio) =>
    [
        .. Enumerable.Repeat(Judged(1 / ratio, 1 / ratio, 1 / ratio), sound),
        .. Enumerable.Repeat(Judged(ratio, 1 / ratio, 1 / ratio), toe),
        .. Enumerable.Repeat(Judged(1 / ratio, 1 / ratio, ratio), thrust),
    ];

    private static FaultRates Fit(IEnumerable<Verdict> verdicts) => FaultRates.Fit([.. verdicts.Select(v => (VehicleClass.Van, v))]);

    [Fact]
    public void Without_vehicles_the_prior_stays()
    {
        Assert.Equal(FaultPriors.Default.MisalignedShare, FaultRates.Fit([]).Of(VehicleClass.Van).MisalignedShare);
    }

    [Fact]
    public void Figures_that_say_nothing_leave_the_prior_as_it_was()
    {
        var rates = Fit(Enumerable.Repeat(Judged(1, 1, 1), 200));
        Assert.Equal(FaultPriors.Default.MisalignedShare, rates.Of(VehicleClass.Van).MisalignedShare, 3);
        foreach (var q in OfVan) Assert.Equal(FaultPriors.Default.AngleWeights[q], rates.AngleWeights[q], 2);
    }

    [Theory]
    [InlineData(0.05)]
    [InlineData(0.4)]
    public void Clear_figures_of_a_large_fleet_give_its_own_share(double share)
    {
        const int vehicles = 2000;
        var faulty = (int)(vehicles * share);
        var rates = Fit(Fleet(vehicles - faulty, faulty / 2, faulty - faulty / 2, 1e4));
        Assert.InRange(rates.Of(VehicleClass.Van).MisalignedShare, share - 0.01, share + 0.01);
    }

    [Fact]
    public void The_angle_found_most_often_becomes_the_likelier_one()
    {
        var rates = Fit(Fleet(700, 20, 280, 1e3));
        Assert.True(rates.AngleWeights[Quantity.Thrust] > 5 * rates.AngleWeights[Quantity.FrontTotalToe]);
    }

    [Fact]
    public void Few_vehicles_move_little()
    {
        var rates = Fit(Fleet(0, 3, 0, 1e3));
        Assert.InRange(rates.Of(VehicleClass.Van).MisalignedShare, 0.2, 0.36);
    }

    [Fact]
    public void The_order_of_the_fleet_does_not_matter()
    {
        var fleet = Fleet(30, 8, 5, 20);
        var (forward, backward) = (Fit(fleet), Fit(fleet.Reverse()));
        Assert.Equal(forward.Of(VehicleClass.Van).MisalignedShare, backward.Of(VehicleClass.Van).MisalignedShare);
        foreach (var q in OfVan) Assert.Equal(forward.AngleWeights[q], backward.AngleWeights[q]);
    }

    [Fact]
    public void A_class_without_vehicles_keeps_the_prior_share()
    {
        Assert.Equal(FaultPriors.Default.MisalignedShare, Fit(Fleet(10, 90, 0, 1e3)).Of(VehicleClass.Bus).MisalignedShare);
    }
}
