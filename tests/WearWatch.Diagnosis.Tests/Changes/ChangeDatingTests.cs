using WearWatch.Diagnosis.Changes;

namespace WearWatch.Diagnosis.Tests.Changes;

public class ChangeDatingTests
{
    private static readonly DateTimeOffset s_first = SteeringHistory.First;

    private static DatedChange Only(ChangeSeries series) => Assert.Single(ChangeDating.Find(series));

    [Fact]
    public void A_step_between_two_trips_is_dated_between_them()
    {
        var change = Only(new SteeringHistory(1) { StepAtDay = 300.5 }.Make());
        Assert.Equal(ChangeForm.Sudden, change.Form);
        Assert.InRange(change.From, s_first.AddDays(294), s_first.AddDays(300.5));
        Assert.InRange(change.To, s_first.AddDays(300.5), s_first.AddDays(302));
        Assert.InRange(3, change.Size.Low - 0.1, change.Size.High + 0.1);
        Assert.Equal(104, change.TripsBefore + change.TripsAfter);
        Assert.NotEmpty(change.Rests);
        Assert.Empty(change.Happened);
    }

    [Fact]
    public void A_step_on_the_way_is_dated_to_the_minutes_between_two_runs()
    {
        // Between the fourth and the fifth run of trip 40.
        var change = Only(new SteeringHistory(2) { StepAtDay = 40 * 7 + 17 / 1440.0, TripSd = 0.1, RunSd = 0.1 }.Make());
        Assert.InRange(change.Likely, s_first.AddDays(280).AddMinutes(15), s_first.AddDays(280).AddMinutes(20.01));
        Assert.True(change.To - change.From < TimeSpan.FromMinutes(6), $"{change.From} {change.To}");
    }

    [Fact]
    public void A_record_in_the_gap_draws_the_date_to_its_day_and_is_named()
    {
        var day = s_first.AddDays(296.8);
        var change = Only(new SteeringHistory(3) { StepAtDay = 297, Events = [new(EventKind.Workshop, day, "workshop visit, adjusted", "w-1", false), new(EventKind.OtherTyres, s_first.AddDays(100), "tyres fitted at 2L", "f-9", false)] }.Make());
        Assert.Equal(day.UtcDateTime.Date, change.Likely.UtcDateTime.Date);
        Assert.Equal("w-1", Assert.Single(change.Happened).Rests);
    }

    [Fact]
    public void A_record_elsewhere_does_not_draw_a_sure_step_away()
    {
        var change = Only(new SteeringHistory(3) { StepAtDay = 297, Events = [new(EventKind.Workshop, s_first.AddDays(260), "workshop visit, adjusted", "w-1", false)] }.Make());
        Assert.InRange(change.Likely, s_first.AddDays(294), s_first.AddDays(302));
        Assert.Empty(change.Happened);
    }

    [Fact]
    public void The_range_holds_the_day_of_the_change_about_nine_times_in_ten()
    {
        var (found, held) = (0, 0);
        for (var seed = 0; seed < 300; seed++)
        {
            var where = new SteeringHistory(1000 + seed);
            var at = 100 + 500 * where.Uniform();
            var changes = ChangeDating.Find(new SteeringHistory(seed) { StepAtDay = at, Step = 0.6 }.Make());
            if (changes.Count != 1 || changes[0].Form != ChangeForm.Sudden) continue;
            found++;
            if (changes[0].From <= s_first.AddDays(at) && changes[0].To >= s_first.AddDays(at)) held++;
        }
        Assert.InRange(found, 250, 300);
        Assert.InRange(held / (double)found, 0.85, 0.96);
    }

    [Fact]
    public void The_interval_of_the_size_holds_the_size_about_nine_times_in_ten()
    {
        var (found, held) = (0, 0);
        for (var seed = 0; seed < 300; seed++)
        {
            var changes = ChangeDating.Find(new SteeringHistory(seed) { StepAtDay = 353, Step = 2 }.Make());
            if (changes.Count != 1) continue;
            found++;
            if (changes[0].Size.Low <= 2 && changes[0].Size.High >= 2) held++;
        }
        Assert.InRange(found, 285, 300);
        Assert.InRange(held / (double)found, 0.84, 0.96);
    }

    [Fact]
    public void A_level_whose_halves_disagree_widens_the_interval_of_the_size()
    {
        var (still, moved) = (new List<double>(), new List<double>());
        for (var seed = 0; seed < 40; seed++)
        {
            var series = new SteeringHistory(seed) { StepAtDay = 353, Step = 2 }.Make();
            // Too small to be cut: a tyre's share, half way before the step.
            var wandering = series with { Readings = [.. series.Readings.Select(r => r.At >= s_first.AddDays(175) && r.At < s_first.AddDays(353) ? r with { Value = r.Value + 0.2 } : r)] };
            if (ChangeDating.Find(series) is [{ Form: ChangeForm.Sudden } a] && ChangeDating.Find(wandering) is [{ Form: ChangeForm.Sudden } b])
                (still, moved) = ([.. still, a.Size.StandardError], [.. moved, b.Size.StandardError]);
        }
        Assert.InRange(still.Count, 20, 40);
        Assert.InRange(moved.Average() / still.Average(), 1.1, 2.5);
    }

    // What the penalty promises: at most 0.2 false changes a vehicle-year, and a vehicle has two steering series.
    [Theory]
    [InlineData(7, 0, 0)]
    [InlineData(7, 0.3, 0)]
    [InlineData(7, 0, 5)]
    [InlineData(1.4, 0, 0)]
    [InlineData(1.4, 0.3, 5)]
    public void Noise_alone_seldom_looks_like_a_change(double daysBetween, double correlation, int freedom)
    {
        const int years = 200;
        var found = 0;
        for (var seed = 0; seed < years / 2; seed++)
            found += ChangeDating.Find(new SteeringHistory(seed) { Trips = (int)(730 / daysBetween), DaysBetween = daysBetween, RunsPerTrip = 4, TripCorrelation = correlation, Freedom = freedom }.Make()).Count;
        Assert.InRange(found / (double)years, 0, 0.1);
    }

    [Fact]
    public void One_gross_trip_is_no_change()
    {
        var series = new SteeringHistory(5).Make();
        Assert.Empty(ChangeDating.Find(series with { Readings = [.. series.Readings.Select(r => r.Trip == "trip-050" ? r with { Value = r.Value + 8 } : r)] }));
    }

    [Fact]
    public void One_gross_run_does_not_move_a_date()
    {
        var series = new SteeringHistory(6) { StepAtDay = 300.5 }.Make();
        var bent = series with { Readings = [.. series.Readings.Select(r => r.Rests == "trip-042/3" ? r with { Value = r.Value + 40 } : r)] };
        Assert.InRange((Only(bent).Likely - Only(series).Likely).Duration(), TimeSpan.Zero, TimeSpan.FromDays(1));
    }

    [Fact]
    public void A_slow_drift_is_a_drift_and_no_step()
    {
        var change = Only(new SteeringHistory(7) { DriftPerDay = 0.005 }.Make());
        Assert.Equal(ChangeForm.Drift, change.Form);
        Assert.Equal(0.005 * 103 * 7, change.Size.Value, 0.4);
    }

    [Fact]
    public void A_step_is_not_taken_for_a_drift() =>
        Assert.Equal(ChangeForm.Sudden, Only(new SteeringHistory(8) { StepAtDay = 360, Step = 1 }.Make()).Form);

    [Fact]
    public void A_mirrored_series_has_the_mirrored_change()
    {
        for (var seed = 0; seed < 20; seed++)
        {
            var series = new SteeringHistory(seed) { StepAtDay = 200 + seed, Step = 1 }.Make();
            var mirrored = ChangeDating.Find(series with { Readings = [.. series.Readings.Select(r => r with { Value = -r.Value })] });
            Assert.Equal(ChangeDating.Find(series).Select(c => (c.Likely, c.From, c.To, Math.Round(-c.Size.Value, 9))), mirrored.Select(c => (c.Likely, c.From, c.To, Math.Round(c.Size.Value, 9))));
        }
    }

    [Fact]
    public void A_series_moved_in_time_has_its_dates_moved_as_far()
    {
        var series = new SteeringHistory(9) { StepAtDay = 200.5 }.Make();
        var moved = Only(series with { Readings = [.. series.Readings.Select(r => r with { At = r.At.AddDays(400) })] });
        Assert.InRange((moved.Likely - Only(series).Likely - TimeSpan.FromDays(400)).Duration(), TimeSpan.Zero, TimeSpan.FromSeconds(2));
        Assert.Equal(Only(series).Size.Value, moved.Size.Value, 1e-6);
    }

    [Fact]
    public void The_order_of_the_readings_does_not_matter()
    {
        var series = new SteeringHistory(10) { StepAtDay = 200.5 }.Make();
        var (a, b) = (Only(series), Only(series with { Readings = [.. series.Readings.Reverse()] }));
        Assert.Equal((a.From, a.To, a.Likely, a.Size), (b.From, b.To, b.Likely, b.Size));
    }

    [Fact]
    public void Readings_that_are_not_numbers_are_left_out()
    {
        var series = new SteeringHistory(11) { StepAtDay = 200.5 }.Make();
        var worse = series with { Readings = [.. series.Readings, new(s_first, "x", double.NaN, 1, "x"), new(s_first, "x", 1, 0, "x"), new(s_first, "x", 1, double.PositiveInfinity, "x")] };
        Assert.Equal(Only(series).Likely, Only(worse).Likely);
    }

    [Fact]
    public void Three_trips_say_nothing_of_changes()
    {
        var (changes, now) = ChangeDating.Read(new SteeringHistory(12) { Trips = 3 }.Make());
        Assert.Empty(changes);
        Assert.Null(now);
    }

    [Fact]
    public void Two_changes_a_month_apart_are_both_dated()
    {
        var series = new SteeringHistory(13) { StepAtDay = 300.5 }.Make();
        var both = series with { Readings = [.. series.Readings.Select(r => r.At >= s_first.AddDays(330.5) ? r with { Value = r.Value - 2 } : r)] };
        var changes = ChangeDating.Find(both);
        Assert.Equal(2, changes.Count);
        Assert.InRange(changes[0].Likely, s_first.AddDays(293), s_first.AddDays(302));
        Assert.InRange(changes[1].Likely, s_first.AddDays(328), s_first.AddDays(337));
    }
}
