using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Steering;

/// <summary>Rows that are not as they should be: left out or mended, named, and counted.</summary>
public class BadInputTests
{
    private static StreamReduction Reduce(IReadOnlyList<(long, SteeringColumns)> chunks) => RunReduction.ReduceStream("van", "trip", chunks, new(3.6, 16));

    private static Signals Usual(double rateHz = 10, Func<double, double>? angle = null, Func<double, double>? torque = null)
    {
        var s = new Signals(rateHz);
        return s.With(SteeringChannel.Speed, t => t < 10 ? 0 : 90).With(SteeringChannel.YawRate, _ => s.Noise(0.05))
            .With(SteeringChannel.SteeringWheelAngle, t => (angle?.Invoke(t) ?? 2) + s.Noise(0.2), 0.1)
            .With(SteeringChannel.DriverTorque, t => torque is null ? 0.5 + s.Noise(0.1) : torque(t));
    }

    private static SteeringColumns At(SteeringColumns c, double seconds) => new(Drive.Start.AddSeconds(seconds), c.RateHz, c.Columns, c.TorqueUnit);

    [Fact]
    public void Rows_under_a_time_seen_before_are_left_out_and_counted()
    {
        var chunks = Usual().Chunks(240);
        chunks[2] = (2, At(chunks[2].Columns, 60));
        var (runs, study) = Reduce(chunks);
        Assert.Equal((1, 60.0), (study.Faults.Clock.Backwards, study.Faults.Clock.RepeatedS));
        Assert.DoesNotContain(runs, r => r.Sequence == 2);
        Assert.Contains(study.NotPossible, n => n.Contains("the clock went back"));
    }

    [Fact]
    public void A_clock_set_ahead_by_years_ends_the_run_and_is_named_and_no_year_is_missing()
    {
        var chunks = Usual().Chunks(180);
        chunks[2] = (2, At(chunks[2].Columns, 3 * 365.0 * 86_400));
        var (runs, study) = Reduce(chunks);
        Assert.Equal((1, 0.0), (study.Faults.Clock.Jumps, study.Faults.Clock.MissingS));
        Assert.Contains(study.NotPossible, n => n.Contains("jumped"));
        Assert.All(runs, r => Assert.InRange(r.Seconds, 5, 31));
    }

    [Fact]
    public void Missing_rows_are_counted_and_end_a_run()
    {
        var chunks = Usual().Chunks(240);
        chunks.RemoveAt(2);
        var study = Reduce(chunks).Study;
        Assert.Equal((1, 60.0), (study.Faults.Clock.Gaps, study.Faults.Clock.MissingS));
        Assert.Contains(study.NotPossible, n => n.Contains("no rows came"));
    }

    [Fact]
    public void A_frozen_angle_is_left_out_and_named()
    {
        var s = new Signals();
        s.With(SteeringChannel.Speed, t => t < 10 ? 0 : 90).With(SteeringChannel.YawRate, _ => s.Noise(0.05)).With(SteeringChannel.SteeringWheelAngle, t => t < 100 ? 2 + s.Noise(0.2) : 7);
        var (runs, study) = Reduce(s.Chunks(240));
        Assert.InRange(study.Faults.FrozenS[SteeringChannel.SteeringWheelAngle], 135, 145);
        Assert.All(runs.Where(r => r.AngleDeg is not null), r => Assert.Equal(2, r.AngleDeg!.Value.Value, 0.2));
        Assert.Contains(study.NotPossible, n => n.StartsWith("steering wheel angle of 140 s", StringComparison.Ordinal));
    }

    [Fact]
    public void A_torque_at_the_end_of_its_range_is_left_out_and_named()
    {
        var s = new Signals();
        s.With(SteeringChannel.Speed, t => t < 10 ? 0 : 90).With(SteeringChannel.YawRate, _ => s.Noise(0.05)).With(SteeringChannel.DriverTorque, t => t % 50 < 10 ? 8 : 0.5 + s.Noise(0.1));
        var (runs, study) = Reduce(s.Chunks(240));
        Assert.InRange(study.Faults.SaturatedS[SteeringChannel.DriverTorque], 45, 50);
        Assert.All(runs.Where(r => r.TorqueNm is not null), r => Assert.Equal(0.5, r.TorqueNm!.Value.Value, 0.1));
    }

    [Fact]
    public void An_angle_that_wraps_at_a_full_turn_is_put_together_again()
    {
        // A sensor of 0 to 360 deg that stands near its end: the wheel is at 359 and slowly passes 360.
        var (runs, study) = Reduce(Usual(angle: t => (359 + t / 100) % 360).Chunks(240));
        Assert.InRange(study.Faults.AngleWraps, 1, 20);
        Assert.All(runs.Where(r => r.AngleDeg is not null), r => Assert.InRange(r.AngleDeg!.Value.Value, 358.5, 362));
        Assert.Contains(study.NotPossible, n => n.Contains("wrapped"));
    }

    [Theory]
    [InlineData(SteeringChannel.SteeringWheelAngle, "signs: steering-wheel angle")]
    [InlineData(SteeringChannel.DriverTorque, "signs: driver torque")]
    [InlineData(SteeringChannel.LateralAcceleration, "signs: lateral acceleration")]
    public void A_channel_of_swapped_sign_is_named_and_gives_no_figure(SteeringChannel swapped, string named)
    {
        var (wrong, right) = (Bends(swapped), Bends(null));
        Assert.NotEmpty(wrong.Runs);
        Assert.All(wrong.Runs, r => Assert.Equal(
            (swapped == SteeringChannel.SteeringWheelAngle, swapped == SteeringChannel.DriverTorque, swapped == SteeringChannel.LateralAcceleration),
            (r.AngleDeg is null, r.TorqueNm is null, r.BankReading is null)));
        Assert.Contains(wrong.Study.NotPossible, n => n.StartsWith(named, StringComparison.Ordinal));
        Assert.DoesNotContain(right.Study.NotPossible, n => n.StartsWith("signs", StringComparison.Ordinal));
        Assert.All(right.Runs, r => Assert.True(r is { AngleDeg: not null, TorqueNm: not null, BankReading: not null }));
    }

    /// <summary>Motorway with a bend a minute, to the left and to the right in turn; one channel may be wired the wrong way round.</summary>
    private static StreamReduction Bends(SteeringChannel? swapped)
    {
        var s = new Signals();
        double Yaw(double t) => t % 60 is >= 20 and < 30 ? (t % 120 < 60 ? 8 : -8) : 0;
        double Sign(SteeringChannel channel) => channel == swapped ? -1 : 1;
        s.With(SteeringChannel.Speed, t => t < 10 ? 0 : 90).With(SteeringChannel.YawRate, t => Yaw(t) + s.Noise(0.05));
        foreach (var (channel, level, perYaw) in ((SteeringChannel, double, double)[])
            [(SteeringChannel.SteeringWheelAngle, 2, 2.3), (SteeringChannel.DriverTorque, 0.5, 0.3), (SteeringChannel.LateralAcceleration, 0.2, 25 * Math.PI / 180)])
            s.With(channel, t => Sign(channel) * (level + perYaw * Yaw(t) + s.Noise(0.1)));
        return Reduce(s.Chunks(300));
    }

    [Fact]
    public void Parts_of_different_rate_are_each_reduced_at_their_own()
    {
        var (slow, fast) = (Usual(10).Chunks(240), Usual(50).Chunks(240));
        var (runs, study) = Reduce([slow[0], slow[1], fast[2], fast[3]]);
        Assert.Equal(1, study.Faults.Clock.RateChanges);
        Assert.InRange(runs.Sum(r => r.Seconds), 215, 231);
        Assert.All(runs, r => Assert.Equal(2, r.AngleDeg!.Value.Value, 0.15));
        Assert.Contains(study.NotPossible, n => n.Contains("rate changed"));
    }

    [Fact]
    public void Where_the_declared_unit_changes_only_newton_metres_are_read()
    {
        var (runs, study) = Reduce(Usual().Chunks(240, unit: t => t < 120 ? TorqueUnit.NewtonMetre : TorqueUnit.Raw));
        Assert.Equal(1, study.Faults.Clock.TorqueUnitChanges);
        Assert.All(runs, r => Assert.Equal(r.Sequence < 2, r.TorqueNm is not null));
    }

    [Fact]
    public void Where_torque_changes_its_scale_without_a_word_none_of_it_is_read()
    {
        var random = new Signals();
        var (runs, study) = Reduce(Usual(torque: t => (t < 120 ? 1 : 57) * (0.5 + random.Noise(0.1))).Chunks(240));
        Assert.True(study.Faults.TorqueScaleChanges);
        Assert.NotEmpty(runs);
        Assert.All(runs, r => Assert.Null(r.TorqueNm));
        Assert.Contains(study.NotPossible, n => n.StartsWith("steering pull: the torque's numbers", StringComparison.Ordinal));
        Assert.False(Reduce(Usual().Chunks(240)).Study.Faults.TorqueScaleChanges);
    }

    [Fact]
    public void A_position_held_between_fixes_names_no_road()
    {
        // Fixes every second keep their cells; a fix of half a minute ago does not.
        double North(double t, double every) => 50 + Math.Floor(t / every) * every * 25 / 111_195;
        StreamReduction With(double every) => Reduce(Usual().With(SteeringChannel.Latitude, t => North(t, every), 1e-7).With(SteeringChannel.Longitude, _ => 8, 1e-7).Chunks(240));
        var (good, held) = (With(1), With(30));
        Assert.Equal(0, good.Study.Faults.HeldPositionS);
        Assert.All(good.Runs, r => Assert.NotNull(r.RoadCell));
        Assert.InRange(held.Study.Faults.HeldPositionS, 200, 230);
        Assert.Contains(held.Study.NotPossible, n => n.Contains("held from an earlier fix"));
    }

    [Fact]
    public void A_day_at_100_Hz_is_reduced_whole()
    {
        var hour = Usual(100).Chunks(600, 600)[0].Columns;
        var chunks = Enumerable.Range(0, 144).Select(k => ((long)k, At(hour, 600 * k))).ToList();
        var (runs, study) = Reduce(chunks);
        Assert.Equal(86_400, study.SecondsRecorded, 1e-3);
        Assert.InRange(runs.Sum(r => r.Seconds), 84_000, 85_500);
        Assert.Equal(new StreamClock(), study.Faults.Clock);
    }
}
