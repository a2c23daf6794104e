using CsCheck;
using WearWatch.Proving.Plain;
using WearWatch.Proving.Scoring;

namespace WearWatch.Proving.Tests;

/// <summary>The scoring on small cases worked by hand, and its laws.</summary>
public sealed class ScoresTests
{
    private static readonly Gen<(double, bool)[]> s_scored = Gen.Select(Gen.Int[0, 9].Select(i => i / 10.0), Gen.Bool, (s, p) => (s, p)).Array[2, 30];

    [Fact]
    public void Auc_counts_the_pairs_in_order_and_half_of_the_ties()
    {
        // Positives 0.9, 0.5; negatives 0.5, 0.1: three pairs in order, one tie: 3.5 of 4.
        Assert.Equal(3.5 / 4, Scores.Auc([(0.9, true), (0.5, true), (0.5, false), (0.1, false)]), 12);
        Assert.True(double.IsNaN(Scores.Auc([(0.9, true)])));
    }

    [Fact]
    public void Auc_is_the_share_of_pairs_whatever_the_order() => s_scored.Sample(items =>
    {
        var pairs = (from a in items where a.Item2 from b in items where !b.Item2 select a.Item1 > b.Item1 ? 1 : a.Item1 == b.Item1 ? 0.5 : 0).ToArray();
        var auc = Scores.Auc([.. items.Reverse()]);
        if (pairs.Length == 0) Assert.True(double.IsNaN(auc));
        else Assert.Equal(pairs.Average(), auc, 10);
    });

    [Fact]
    public void Turning_the_scores_round_turns_the_auc_round() => s_scored.Sample(items =>
    {
        var auc = Scores.Auc(items);
        if (!double.IsNaN(auc)) Assert.Equal(1 - auc, Scores.Auc([.. items.Select(i => (-i.Item1, i.Item2))]), 10);
    });

    [Fact]
    public void First_k_counts_positives_and_shares_out_a_tie_at_the_kth_place()
    {
        // k = 2: one certain hit; one place for two tied at 0.5, one of them positive.
        Assert.Equal((1.5, 2), Scores.FirstK([(0.9, true), (0.5, true), (0.5, false), (0.1, false)]));
        Assert.Equal((0, 0), Scores.FirstK([(0.9, false)]));
    }

    [Fact]
    public void Calibration_error_is_the_weighted_gap_of_equal_bins()
    {
        // Ten bins of two: probability 0.3 throughout, true in five of twenty; bins hold 2 true twice, 1 true once.
        var items = Enumerable.Range(0, 20).Select(i => (0.3, i < 5)).ToArray();
        var expected = (2 * Math.Abs(0.6 - 2) + Math.Abs(0.6 - 1) + 7 * 0.6) / 20;
        Assert.Equal(expected, Scores.CalibrationError(items), 12);
        Assert.Equal(0, Scores.CalibrationError([.. Enumerable.Range(0, 20).Select(i => (i < 10 ? 0.0 : 1, i >= 10))]), 12);
    }

    [Fact]
    public void Regret_is_nothing_for_the_best_list_and_counts_what_the_first_k_lose()
    {
        Assert.Equal(0, Scores.Regret([[50, 10, -5]]), 12);
        // k = 2, best 60; listed first two are worth 50 − 5.
        Assert.Equal(1 - 45.0 / 60, Scores.Regret([[50, -5, 10]]), 12);
        Assert.True(double.IsNaN(Scores.Regret([[-1, -2]])));
    }

    [Fact]
    public void Median_and_share_of_nothing_are_unknown()
    {
        Assert.True(double.IsNaN(Scores.Median([])));
        Assert.Equal(2.5, Scores.Median([1, 2, double.NaN, 3, 4]));
        Assert.True(double.IsNaN(Scores.Share<int>([], _ => true)));
        Assert.Equal(0.25, Scores.Share([1, 2, 3, 4], i => i == 1));
    }

    [Fact]
    public void Bootstrap_of_a_mean_is_as_wide_as_its_standard_error_and_the_same_each_time()
    {
        // 0 to 99: standard deviation 28.87 (n), so ± 1.645 × 2.887 about 49.5; Monte Carlo error of 400 draws well below 1.
        var items = Enumerable.Range(0, 100).Select(i => (double)i).ToArray();
        var figure = Bootstrap.Of(items, l => l.Average());
        Assert.Equal(49.5, figure.Value, 12);
        Assert.InRange(figure.Low, 43.8, 45.8);
        Assert.InRange(figure.High, 53.2, 55.2);
        Assert.Equal(figure, Bootstrap.Of(items, l => l.Average()));
    }

    [Fact]
    public void Bootstrap_of_nothing_is_unknown() => Assert.Equal(0, Bootstrap.Of(Array.Empty<double>(), l => l.Average()).N);

    [Fact]
    public void A_straight_line_reaches_the_limit_where_a_ruler_says_with_no_width_when_it_fits()
    {
        // 8.0, 7.0, 6.0 mm at 0, 10 000, 20 000 km: 0.1 mm a 1000 km, 1.6 mm after 44 000 km more.
        var line = PlainLine.Fit([(0, 8), (10_000, 7), (20_000, 6)])!;
        var (value, low, high) = line.Remaining(1.6)!.Value;
        Assert.Equal(44_000, value, 6);
        Assert.Equal(44_000, low, 3);
        Assert.Equal(44_000, high, 3);
        Assert.Null(PlainLine.Fit([(0, 8), (1, 7)]));
        Assert.Null(PlainLine.Fit([(0, 6), (10_000, 7), (20_000, 8)])!.Remaining(1.6));
    }

    [Fact]
    public void A_straight_lines_interval_is_that_of_least_squares()
    {
        // y = 8, 6.8, 6.1, 4.9 at x = 0..3 (1000 km): slope −1.00, level at x = 3 4.95; residual variance 0.05 / 2, Sxx 5.
        var line = PlainLine.Fit([(0, 8), (1000, 6.8), (2000, 6.1), (3000, 4.9)])!;
        Assert.Equal(-1.0, line.SlopeMmPer1000Km, 10);
        Assert.Equal(4.95, line.LevelMm, 10);
        Assert.Equal(0.025 / 5, line.SlopeVariance, 10);
        Assert.Equal(0.025 * (1 / 4.0 + 1.5 * 1.5 / 5), line.LevelVariance, 10);
        Assert.Equal(0.025 * 1.5 / 5, line.Covariance, 10);
    }
}
