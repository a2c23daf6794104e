using CsCheck;
using WearWatch.Diagnosis.Changes;
using WearWatch.Diagnosis.Tests.Statistics;

namespace WearWatch.Diagnosis.Tests.Changes;

public class SegmentationTests
{
    private static readonly double[] s_nile = ReferenceData.Read("../Changes/nile.csv")["flow"];

    private static SegmentCost Nile() => new([.. s_nile.Select((_, i) => (double)i)], s_nile, [.. s_nile.Select(_ => 1.0)]);

    // Nile: G. W. Cobb, Biometrika 65 (1978) 243, finds the change at 1898; sums of squares and means follow from the data.
    [Theory]
    [InlineData(85_300)]
    [InlineData(300_000)]
    [InlineData(1_237_699)]
    public void The_Nile_changed_once_after_1898(double penalty)
    {
        var cut = Segmentation.Pelt(Nile(), penalty);
        Assert.Equal([new Segment(0, 28, false), new Segment(28, 100, false)], cut.Segments);
        Assert.Equal(1_597_457.19 + penalty, cut.Cost, 0.01);
        Assert.Equal(1097.75, Nile().Mean(0, 28).Mean, 1e-9);
        Assert.Equal(849.97, Nile().Mean(28, 100).Mean, 0.005);
        Assert.Equal(2_835_156.75, Nile().Level(0, 100), 1e-3);
    }

    [Theory]
    [InlineData(85_100, 3)]
    [InlineData(1_237_700, 1)]
    public void Beyond_its_range_of_penalties_the_Nile_has_another_count_of_changes(double penalty, int least)
    {
        var found = Segmentation.Pelt(Nile(), penalty).Segments.Count;
        Assert.True(least == 1 ? found == 1 : found >= least, $"{found}");
    }

    private static readonly Gen<(double[] T, double[] Y, double[] W, double Slope, int LeastSloped, double Penalty, int Least)> AnySeries =
        from n in Gen.Int[1, 60]
        from gaps in Gen.Double[0, 3].Array[n]
        from noise in Gen.Double[-1, 1].Array[n]
        from levels in Gen.Double[-3, 3].Array[n]
        from holds in Gen.Int[0, 9].Array[n]
        from weights in Gen.Double[0.1, 4].Array[n]
        from slope in Gen.Double[0.1, 8]
        from levelsOnly in Gen.Bool
        from leastSloped in Gen.Int[2, 8]
        from penalty in Gen.Double[0.1, 15]
        from least in Gen.Int[1, 4]
        let times = gaps.Select((_, i) => gaps.Take(i + 1).Sum() + i * 0.01).ToArray()
        let steps = levels.Select((_, i) => levels[Enumerable.Range(0, i + 1).Last(j => j == 0 || holds[j] == 0)]).ToArray()
        select (times, steps.Zip(noise, (a, b) => a + b).ToArray(), weights, levelsOnly ? double.PositiveInfinity : slope, leastSloped, penalty, least);

    [Fact]
    public void Dropping_candidates_never_changes_the_least_cost() =>
        AnySeries.Sample(s =>
        {
            var cost = new SegmentCost(s.T, s.Y, s.W, s.Slope, s.LeastSloped);
            var fast = Segmentation.Pelt(cost, s.Penalty, s.Least);
            var plain = Segmentation.OptimalPartition(cost, s.Penalty, s.Least);
            Assert.Equal(plain.Cost, fast.Cost, 1e-7 * (1 + Math.Abs(plain.Cost)));
            Assert.True(fast.Evaluations <= plain.Evaluations);
            Assert.Equal(s.T.Length < s.Least ? 0 : s.T.Length, fast.Segments.Sum(x => x.To - x.From));
            Assert.All(fast.Segments, x => Assert.True(x.To - x.From >= s.Least));
        }, iter: 2000);

    [Fact]
    public void The_cost_told_is_the_cost_of_the_segments_told() =>
        AnySeries.Sample(s =>
        {
            if (s.T.Length < s.Least) return;
            var cost = new SegmentCost(s.T, s.Y, s.W, s.Slope, s.LeastSloped);
            var cut = Segmentation.Pelt(cost, s.Penalty, s.Least);
            Assert.Equal(cut.Segments.Sum(x => cost.Best(x.From, x.To)) + (cut.Segments.Count - 1) * s.Penalty, cut.Cost, 1e-7 * (1 + cut.Cost));
        }, iter: 500);

    [Fact]
    public void Costs_from_running_sums_are_those_of_the_points_themselves() =>
        AnySeries.Sample(s =>
        {
            var cost = new SegmentCost([.. s.T.Select(t => t + 20_000)], s.Y, s.W, 1);
            var (from, to) = (s.T.Length / 3, s.T.Length);
            var w = s.W[from..to].Sum();
            var mean = Enumerable.Range(from, to - from).Sum(i => s.W[i] * s.Y[i]) / w;
            var time = Enumerable.Range(from, to - from).Sum(i => s.W[i] * s.T[i]) / w;
            var tt = Enumerable.Range(from, to - from).Sum(i => s.W[i] * Math.Pow(s.T[i] - time, 2));
            var slope = tt > 1e-9 ? Enumerable.Range(from, to - from).Sum(i => s.W[i] * (s.T[i] - time) * s.Y[i]) / tt : 0;
            Assert.Equal(Enumerable.Range(from, to - from).Sum(i => s.W[i] * Math.Pow(s.Y[i] - mean, 2)), cost.Level(from, to), 1e-6);
            Assert.Equal(Enumerable.Range(from, to - from).Sum(i => s.W[i] * Math.Pow(s.Y[i] - mean - slope * (s.T[i] - time), 2)), cost.Line(from, to), 1e-6);
        }, iter: 500);

    [Fact]
    public void A_series_shorter_than_a_segment_is_not_cut() => Assert.Empty(Segmentation.Pelt(new SegmentCost([0, 1], [0, 1], [1, 1]), 1, 3).Segments);

    [Fact]
    public void A_price_of_nothing_is_refused() => Assert.Throws<ArgumentOutOfRangeException>(() => Segmentation.Pelt(Nile(), 0));

    [Fact]
    public void A_value_that_is_not_a_number_is_refused() => Assert.Throws<ArgumentException>(() => new SegmentCost([0, 1], [0, double.NaN], [1, 1]));
}
