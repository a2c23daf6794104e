using CsCheck;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Tests.Tread;

/// <summary>What may lie behind one tyre's readings beside those of an earlier walk.</summary>
public class TyreExplanationTests
{
    private static readonly Position s_place = Position.Parse("2LO");

    private static TyreReadings Tyre(params double[] depths) => new() { Position = s_place, Depths = [.. depths.Select((d, i) => new GrooveDepth(i + 1, d))] };

    private static readonly TyreReadings s_before = Tyre(9.4, 8.6, 8.7, 9.9);

    private static IReadOnlyList<WeighedExplanation> Weigh(TyreReadings now, TyreReadings? before = null, double step = 0.1, double lossMm = 0.4) =>
        TyreExplanation.Weigh(now, step, before ?? s_before, step, new Estimate(lossMm, lossMm), new Estimate(14, 0.5), true);

    private static WeighedExplanation Best(TyreReadings now, TyreReadings? before = null, double step = 0.1) => Weigh(now, before, step)[0];

    [Fact]
    public void Wear_as_usual_is_as_written()
    {
        var best = Best(Tyre(9.0, 8.3, 8.2, 9.5));
        Assert.Equal(ExplanationKind.AsWritten, best.Explanation.Kind);
        Assert.True(best.Weight > 0.9);
    }

    [Fact]
    public void Transposed_digits_are_found_with_what_was_meant()
    {
        var best = Best(Tyre(9.0, 2.8, 8.3, 9.5)); // 8.2
        Assert.Equal((ExplanationKind.GrooveMistyped, 2, 8.2), (best.Explanation.Kind, best.Explanation.Groove, best.Explanation.MeantMm));
        Assert.True(best.Weight > 0.9);
    }

    [Fact]
    public void A_decimal_point_in_the_wrong_place_is_found_with_what_was_meant()
    {
        var best = Best(Tyre(0.9, 8.2, 8.3, 9.5)); // 9.0 as 0.9
        Assert.Equal((ExplanationKind.GrooveMistyped, 1, 9.0), (best.Explanation.Kind, best.Explanation.Groove, best.Explanation.MeantMm));
    }

    [Fact]
    public void A_groove_read_on_a_wear_bar_is_1_6_mm_short() // UN R30 and R54: 1.6 mm
    {
        var best = Best(Tyre(9.0, 8.3, 6.7, 9.5));
        Assert.Equal((ExplanationKind.ReadOnWearBar, 3), (best.Explanation.Kind, best.Explanation.Groove));
    }

    [Fact]
    public void All_grooves_at_the_depth_of_a_new_tyre_are_a_new_tyre() =>
        Assert.Equal(ExplanationKind.TyreChanged, Best(Tyre(14.1, 13.9, 14.0, 14.1)).Explanation.Kind);

    [Fact]
    public void All_grooves_three_mm_deeper_in_the_same_profile_are_a_regrooved_tyre() =>
        Assert.Equal(ExplanationKind.Regrooved, Best(Tyre(6.0, 5.2, 5.3, 6.6), Tyre(3.4, 2.6, 2.7, 4.0)).Explanation.Kind);

    [Fact]
    public void A_profile_the_other_way_round_is_a_tyre_turned_on_its_rim_or_grooves_counted_from_the_wrong_side()
    {
        var weighed = Weigh(Tyre(10.6, 9.2, 8.1, 6.9), Tyre(7.3, 8.4, 9.7, 11.0));
        Assert.Equal([ExplanationKind.GroovesReversed, ExplanationKind.TurnedOnRim], weighed.Take(2).Select(w => w.Explanation.Kind).Order());
        Assert.True(weighed.Take(2).Sum(w => w.Weight) > 0.8);
    }

    [Fact]
    public void Counts_of_thirty_seconds_transpose_as_whole_numbers()
    {
        const double Step = 0.79375; // 1/32 inch, mm
        var best = Best(Tyre(12 * Step, 21 * Step, 11 * Step, 12 * Step), Tyre(12 * Step, 12 * Step, 12 * Step, 13 * Step), Step);
        Assert.Equal((ExplanationKind.GrooveMistyped, 2), (best.Explanation.Kind, best.Explanation.Groove));
        Assert.Equal(12 * Step, best.Explanation.MeantMm!.Value, 3);
    }

    [Fact]
    public void One_depth_a_tyre_can_be_compared_too()
    {
        var weighed = Weigh(new TyreReadings { Position = s_place, Depths = [new GrooveDepth(0, 14)] }, new TyreReadings { Position = s_place, Depths = [new GrooveDepth(0, 6)] });
        Assert.Equal(ExplanationKind.TyreChanged, weighed[0].Explanation.Kind);
    }

    [Fact]
    public void Weights_sum_to_one_and_counting_from_the_other_side_changes_nothing() =>
        Gen.Double[2, 14].Array[4].Select(Gen.Double[2, 14].Array[4]).Sample((now, before) =>
        {
            var weighed = Weigh(Tyre(now), Tyre(before));
            var mirrored = Weigh(Tyre([.. now.Reverse()]), Tyre([.. before.Reverse()]));
            return Math.Abs(weighed.Sum(w => w.Weight) - 1) < 1e-9
                && weighed.All(w => Math.Abs(w.Weight - mirrored.Single(m => m.Explanation.Kind == w.Explanation.Kind && (m.Explanation.Groove ?? 0) == (w.Explanation.Groove is { } g ? 5 - g : 0)).Weight) < 1e-9);
        }, iter: 200);
}
