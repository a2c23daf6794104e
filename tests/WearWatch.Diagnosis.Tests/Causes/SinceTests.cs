using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Causes;

/// <summary>Since when a fault is there, from the shares of the dates at which it may have begun.</summary>
public sealed class SinceTests
{
    private static readonly DateOnly AsOf = new(2026, 10, 31);

    private static double[] All(int onset) => [.. Onsets.DaysAgo.Select((_, o) => o == onset ? 1.0 : 0)];

    [Fact]
    public void A_fault_that_was_always_there_has_no_earliest_day_but_a_latest_one()
    {
        var since = Since.Of(AsOf, All(0));
        Assert.Null(since.Earliest);
        Assert.Null(since.Likely);
        Assert.Equal(AsOf.AddDays(-(int)Onsets.Stretch(0).Latest), since.Latest);
    }

    [Fact]
    public void A_fault_of_one_stretch_began_within_it()
    {
        for (var o = 1; o < Onsets.DaysAgo.Count; o++)
        {
            var since = Since.Of(AsOf, All(o));
            var (latest, earliest) = Onsets.Stretch(o);
            Assert.InRange(AsOf.DayNumber - since.Latest.DayNumber, latest - 1, earliest + 1);
            Assert.InRange(AsOf.DayNumber - since.Earliest!.Value.DayNumber, latest - 1, earliest + 1);
            Assert.InRange(since.Likely!.Value.DayNumber, since.Earliest.Value.DayNumber, since.Latest.DayNumber);
        }
    }

    [Fact]
    public void Stretches_follow_one_another_without_a_gap_and_their_shares_make_one()
    {
        for (var o = 1; o < Onsets.DaysAgo.Count; o++) Assert.Equal(Onsets.Stretch(o - 1).Latest, Onsets.Stretch(o).Earliest);
        Assert.Equal(0, Onsets.Stretch(Onsets.DaysAgo.Count - 1).Latest);
        Assert.Equal(1, Onsets.Shares.Sum(), 12);
    }
}
