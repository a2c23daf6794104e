using WearWatch.Diagnosis.Changes;

namespace WearWatch.Diagnosis.Tests.Changes;

public class RunningWatchTests
{
    private const double KmPerWeek = 600;

    private static (RunningLevel Level, ChangeSeries All) Split(SteeringHistory history, int fitted)
    {
        var all = history.Make();
        var (_, now) = ChangeDating.Read(all with { Readings = [.. all.Readings.Where(r => string.CompareOrdinal(r.Trip, $"trip-{fitted:000}") < 0)] });
        return (now!, all);
    }

    [Fact]
    public void A_step_after_the_fit_is_raised_after_two_trips_and_is_provisional()
    {
        var (level, all) = Split(new SteeringHistory(1) { Trips = 52, StepAtDay = 49 * 7 }, 49);
        var after = all with { Readings = [.. all.Readings.Where(r => string.CompareOrdinal(r.Trip, "trip-051") < 0)] };
        var raised = RunningWatch.Watch(after, level, KmPerWeek);
        Assert.NotNull(raised);
        Assert.True(raised.Provisional);
        Assert.Equal(3, raised.Size.Value, 0.6);
        Assert.True(raised.From <= SteeringHistory.First.AddDays(49 * 7) && raised.To >= SteeringHistory.First.AddDays(49 * 7));
        Assert.Equal(2, raised.TripsAfter);
    }

    [Fact]
    public void One_gross_trip_raises_nothing()
    {
        var (level, all) = Split(new SteeringHistory(2) { Trips = 52 }, 46);
        Assert.Null(RunningWatch.Watch(all with { Readings = [.. all.Readings.Select(r => r.Trip == "trip-047" ? r with { Value = r.Value + 50 } : r)] }, level, KmPerWeek));
    }

    [Fact]
    public void Nothing_new_raises_nothing()
    {
        var (level, all) = Split(new SteeringHistory(3), 104);
        Assert.Null(RunningWatch.Watch(all, level, KmPerWeek));
    }

    [Fact]
    public void A_mirrored_step_is_raised_mirrored()
    {
        var history = new SteeringHistory(4) { Trips = 56, StepAtDay = 49 * 7, Step = 1.5 }.Make();
        var mirrored = history with { Readings = [.. history.Readings.Select(r => r with { Value = -r.Value })] };
        DatedChange? Raise(ChangeSeries s) => RunningWatch.Watch(s, ChangeDating.Read(s with { Readings = [.. s.Readings.Where(r => string.CompareOrdinal(r.Trip, "trip-049") < 0)] }).Now!, KmPerWeek);
        Assert.Equal(Raise(history)!.Size.Value, -Raise(mirrored)!.Size.Value, 1e-9);
        Assert.Equal(Raise(history)!.From, Raise(mirrored)!.From);
    }

    /// <summary>Stated: one false alarm of a series in twenty years. The level itself is known only from a year of trips, which the charts bear.</summary>
    [Fact]
    public void A_vehicle_in_order_is_seldom_raised()
    {
        var (alarms, years) = (0, 0.0);
        for (var seed = 0; seed < 200; seed++)
        {
            var (level, all) = Split(new SteeringHistory(seed) { Trips = 78 }, 52);
            if (RunningWatch.Watch(all, level, KmPerWeek) is not null) alarms++;
            years += 0.5;
        }
        Assert.InRange(alarms / years, 0, 0.1);
    }

    [Fact]
    public void The_limits_have_the_run_length_that_is_stated()
    {
        var (cusum, ewma) = RunningWatch.Limits(52.18, KmPerWeek);
        Assert.Equal(1, RunLength.Cusum(RunningWatch.Slack, cusum) / (2 * 52.18 / RunningWatch.FalseAlarmsPerYear), 0.02);
        Assert.Equal(1, RunLength.Ewma(Ewma.Weight(KmPerWeek, RunningWatch.MemoryKm), ewma) / (2 * 52.18 / RunningWatch.FalseAlarmsPerYear), 0.05);
    }
}
