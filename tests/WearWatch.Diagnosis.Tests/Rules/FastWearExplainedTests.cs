using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tests.Causes;

namespace WearWatch.Diagnosis.Tests.Rules;

/// <summary>Fast wear beside the verdict of both witnesses.</summary>
public sealed class FastWearExplainedTests
{
    private static readonly VehicleFigures Figures = CauseCases.Trailer().WithTyres(p => CauseCases.Tyre(p, logRate: p.Axle == 3 ? 1.0 : 0));

    private static Verdict Skewed(double probability, int wornAxle) => new()
    {
        MisalignedProbability = probability,
        Causes = [new Cause(Quantity.TandemSkew, 2, null, new Interval(0.3, 0.2, 0.4), true, probability)],
        Effects = [new StoryEffect(probability, new Dictionary<Position, double> { [new(wornAxle, Side.Left)] = 1.2, [new(wornAxle, Side.Right)] = 1.0 }, 0.3, 10)],
    };

    private static Finding Fast() => Assert.Single(FastWearRule.Find(Figures));

    [Fact]
    public void Fast_wear_that_a_probable_skew_brings_about_is_put_down_to_it_and_mended_by_an_alignment()
    {
        var finding = FastWearRule.Explained(Fast(), Figures, Skewed(0.95, 3));
        Assert.True(finding.AlignmentMends);
        Assert.Equal(Quantity.TandemSkew, finding.Causes[0]);
        Assert.Contains(finding.EvidenceFor, e => e.Statement.Contains("tandem skew of axle 2", StringComparison.Ordinal));
    }

    [Fact]
    public void A_skew_that_wears_other_tyres_explains_nothing_here()
    {
        Assert.False(FastWearRule.Explained(Fast(), Figures, Skewed(0.95, 1)).AlignmentMends);
    }

    [Fact]
    public void An_improbable_angle_explains_nothing()
    {
        Assert.False(FastWearRule.Explained(Fast(), Figures, Skewed(0.4, 3)).AlignmentMends);
    }
}
