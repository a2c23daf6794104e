using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tests.Causes;

/// <summary>What is said beside the probabilities: odds between stories, and each witness alone.</summary>
public sealed class OddsAndWitnessTests
{
    private static Cause Of(Quantity quantity, double probability, int? axle = null, Side? side = null) => new(quantity, axle, side, new Interval(1, 0, 2), true, probability);

    [Fact]
    public void Odds_name_the_angle_its_rivals_and_the_vehicle_in_order()
    {
        string[] expected = ["front total toe 8 to 1 over one-way turning", "front total toe 2.7 to 1 over every angle in order"];
        Assert.Equal(expected, OddsWords.Of([Of(Quantity.FrontTotalToe, 0.64, 1), Of(Quantity.Duty, 0.08), Of(Quantity.Camber, 0.001, 2, Side.Left)], 0.76));
    }

    [Fact]
    public void An_angle_less_probable_than_its_rival_stands_under_it()
    {
        Assert.Equal("camber of axle 2 left 4 to 1 under total toe of axle 2", OddsWords.Of([Of(Quantity.Camber, 0.1, 2, Side.Left), Of(Quantity.RearTotalToe, 0.4, 2)], 0.5)[0]);
    }

    [Fact]
    public void Odds_never_claim_more_than_the_unforeseen_allows()
    {
        Assert.Contains("more than 50 to 1 over every angle in order", OddsWords.Of([Of(Quantity.Thrust, 0.98)], 0.99)[0], StringComparison.Ordinal);
    }

    [Fact]
    public void Without_a_likely_angle_there_is_nothing_to_argue()
    {
        Assert.Empty(OddsWords.Of([Of(Quantity.Thrust, 0.02)], 0.06));
        Assert.Empty(OddsWords.Of([], 0.06));
    }

    [Fact]
    public void A_tread_worn_by_toe_beside_a_steering_wheel_that_stands_straight_is_told_by_witness()
    {
        var figures = CauseCases.Van().WithTyres(p => CauseCases.Tyre(p, edge: p.Axle == 1 ? 0.05 : 0, logRate: p.Axle == 1 ? 0.45 : 0)).WithSteering(pull: 0, offCentre: 0);
        var verdict = CauseEstimate.Judge(figures, FaultPriors.Default);
        Assert.InRange(verdict.MisalignedProbability, 0.121, 0.879); // else the case is clear and nobody is asked
        Assert.NotNull(verdict.ByWitness);
        Assert.True(verdict.ByWitness.Value.Tread > verdict.ByWitness.Value.Steering);
    }

    [Fact]
    public void With_one_witness_none_is_asked_alone()
    {
        var figures = CauseCases.Trailer().WithTyres(p => CauseCases.Tyre(p, edge: p.Axle == 1 ? 0.05 : 0));
        Assert.Null(CauseEstimate.Judge(figures, FaultPriors.Default).ByWitness);
    }
}
