using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Steering;

public class RunReductionTests
{
    private static readonly ReductionVehicle Van = new(3.6, 16);

    private static StreamReduction Reduce(IReadOnlyList<(long, SteeringColumns)> chunks, bool scalar = false) =>
        RunReduction.ReduceStream("van", "trip", chunks, Van, scalar);

    private static Drive Usual(double hand = 1) => new Drive { Hand = hand }.Stand(20).Turn(10, 8).Straight(95).Turn(6, -12).Straight(40);

    [Fact]
    public void A_straight_drive_gives_back_torque_angle_bank_and_yaw_zero()
    {
        var runs = Reduce(Usual().Chunks()).Runs;
        Assert.True(runs.Sum(r => r.Seconds) > 120);
        Assert.All(runs, r =>
        {
            Assert.InRange(r.Seconds, 5, 30.5);
            Assert.Equal(RunMode.Coast, r.Mode);
            Assert.True(r.TorqueIncludesAssist);
            Assert.Equal(1.5, r.TorqueNm!.Value.Value, 0.08); // driver 0.5 and assist 1.0
            Assert.Equal(2.0, r.AngleDeg!.Value.Value, 0.15);
            Assert.Equal(0.02, r.BankReading!.Value.Value, 0.002);
            Assert.Equal(0, r.YawRateDegS!.Value, 0.05);
            Assert.Equal(90, r.SpeedKmH, 0.1);
            Assert.InRange(r.TorqueNm.Value.StandardError, 1e-4, 0.05);
            Assert.EndsWith(":0", r.RoadCell); // northbound
        });
    }

    [Fact]
    public void Mirroring_left_and_right_mirrors_every_run()
    {
        var (left, right) = (Reduce(Usual().Chunks()), Reduce(Usual(-1).Chunks()));
        Assert.Equal(left.Runs.Count, right.Runs.Count);
        foreach (var (a, b) in left.Runs.Zip(right.Runs))
        {
            Assert.Equal(a.TorqueNm!.Value.Value, -b.TorqueNm!.Value.Value, 1e-6);
            Assert.Equal(a.AngleDeg!.Value.Value, -b.AngleDeg!.Value.Value, 1e-5);
            Assert.Equal(a.BankReading!.Value.Value, -b.BankReading!.Value.Value, 1e-7);
            Assert.Equal(a.TorqueNm.Value.StandardError, b.TorqueNm.Value.StandardError, 1e-7);
        }
        Assert.Equal(left.Study.TurnedLeftDeg!.Value, right.Study.TurnedRightDeg!.Value, 1e-3);
    }

    [Fact]
    public void Vector_and_scalar_reduction_give_the_same_runs()
    {
        var (fast, plain) = (Reduce(Usual().Chunks()).Runs, Reduce(Usual().Chunks(), scalar: true).Runs);
        Assert.Equal(plain.Count, fast.Count);
        foreach (var (a, b) in fast.Zip(plain))
        {
            Assert.Equal((b.Start, b.Seconds, b.Mode, b.RoadCell), (a.Start, a.Seconds, a.Mode, a.RoadCell));
            Assert.Equal(b.TorqueNm!.Value.Value, a.TorqueNm!.Value.Value, 1e-5);
            Assert.Equal(b.AngleDeg!.Value.Value, a.AngleDeg!.Value.Value, 1e-4);
        }
    }

    [Fact]
    public void Neither_the_order_of_chunks_nor_a_repeated_one_changes_anything()
    {
        var chunks = Usual().Chunks();
        var again = Reduce([.. chunks.Reverse(), chunks[1]]);
        Assert.Equal(Reduce(chunks).Runs, again.Runs);
    }

    [Fact]
    public void A_gap_between_chunks_ends_a_run()
    {
        var chunks = new Drive().Stand(10).Straight(50).Chunks(30);
        var late = new Drive().Stand(10).Straight(50).Chunks(30)[1].Item2;
        var moved = new SteeringColumns(late.Start.AddSeconds(100), late.RateHz, late.Columns);
        var runs = Reduce([chunks[0], (1, moved)]).Runs;
        Assert.DoesNotContain(runs, r => r.Start < chunks[0].Item2.End && r.Start.AddSeconds(r.Seconds) > chunks[0].Item2.End.AddSeconds(1));
        Assert.Equal(2, runs.Count);
    }

    [Fact]
    public void Braking_runs_stand_apart_from_steady_ones()
    {
        var runs = Reduce(new Drive().Stand(10).Straight(30).Straight(8, 90, -1.2, brake: true).Chunks()).Runs;
        Assert.Contains(runs, r => r.Mode == RunMode.Brake && r.Seconds >= 5);
        Assert.Contains(runs, r => r.Mode == RunMode.Coast && r.Seconds >= 25);
    }

    [Fact]
    public void Accelerating_runs_are_driven_runs()
    {
        var runs = Reduce(new Drive().Stand(10).Straight(20, 60, 0.8).Chunks()).Runs;
        Assert.Contains(runs, r => r.Mode == RunMode.Drive && r.Seconds >= 12);
    }

    [Fact]
    public void Lane_keeping_stretches_are_left_out_and_said()
    {
        var result = Reduce(new Drive().Stand(10).Straight(90, lane: true).Chunks());
        Assert.Empty(result.Runs);
        Assert.True(result.Study.SecondsLaneKeeping > 80);
        Assert.Contains(result.Study.NotPossible, n => n.Contains("lane keeping"));
    }

    [Theory]
    [InlineData(TorqueUnit.Raw)]
    [InlineData(TorqueUnit.Unknown)]
    public void Torque_of_raw_or_unknown_unit_is_never_read(TorqueUnit unit)
    {
        var result = Reduce(Usual().Chunks(unit: unit));
        Assert.NotEmpty(result.Runs);
        Assert.All(result.Runs, r => Assert.Null(r.TorqueNm));
        Assert.All(result.Runs, r => Assert.NotNull(r.AngleDeg));
        Assert.Contains(result.Study.NotPossible, n => n.Contains("raw or unknown"));
    }

    [Fact]
    public void Without_assist_the_torsion_bar_alone_is_marked()
    {
        var runs = Reduce(Usual().Chunks(without: SteeringChannel.AssistTorque)).Runs;
        Assert.All(runs, r => Assert.False(r.TorqueIncludesAssist));
        Assert.All(runs, r => Assert.Equal(0.5, r.TorqueNm!.Value.Value, 0.06));
    }

    [Fact]
    public void A_frozen_torque_is_dropped_and_counted()
    {
        var chunks = new Drive { Noise = 0 }.Stand(10).Straight(90).Chunks(without: SteeringChannel.AssistTorque);
        var result = Reduce(chunks);
        Assert.All(result.Runs, r => Assert.Null(r.TorqueNm));
        Assert.True(result.Study.FrozenS[SteeringChannel.DriverTorque] > 80);
    }

    [Fact]
    public void Whole_newton_metres_and_degrees_give_no_figure_and_say_so()
    {
        var chunks = Usual().Chunks().Select(c => (c.Item1, new SteeringColumns(c.Item2.Start, c.Item2.RateHz, c.Item2.Columns.Select(k =>
            k.Channel is SteeringChannel.DriverTorque or SteeringChannel.AssistTorque or SteeringChannel.SteeringWheelAngle
                ? SteeringColumn.Of(k.Channel, k.Values!.Select(x => MathF.Round(x)).ToArray(), 1) : k)))).ToList();
        var result = Reduce(chunks);
        Assert.NotEmpty(result.Runs);
        Assert.All(result.Runs, r => Assert.True(r.TorqueNm is null && r.AngleDeg is null && r.BankReading is not null));
        Assert.Contains(result.Study.NotPossible, n => n.Contains("steps of 1 N·m"));
        Assert.Contains(result.Study.NotPossible, n => n.Contains("steps of 1 deg"));
    }

    [Fact]
    public void Standing_still_gives_no_run_and_says_why()
    {
        var result = Reduce(new Drive().Stand(300).Chunks());
        Assert.Empty(result.Runs);
        Assert.Contains(result.Study.NotPossible, n => n.StartsWith("straight running"));
    }

    [Fact]
    public void One_hertz_without_steering_still_reads_the_bank_but_no_pull()
    {
        var result = Reduce(new Drive(1).Stand(20).Straight(120).Chunks(60, TorqueUnit.NewtonMetre, SteeringChannel.DriverTorque, SteeringChannel.AssistTorque, SteeringChannel.SteeringWheelAngle));
        Assert.NotEmpty(result.Runs);
        Assert.All(result.Runs, r => Assert.True(r.TorqueNm is null && r.AngleDeg is null && r.BankReading is not null));
        Assert.Contains(result.Study.NotPossible, n => n.StartsWith("steering pull"));
        Assert.Contains(result.Study.NotPossible, n => n.StartsWith("off-centre angle"));
    }

    [Fact]
    public void Without_standstill_the_yaw_zero_comes_from_straight_driving()
    {
        var result = Reduce(new Drive().Straight(120).Chunks());
        Assert.Equal(YawZero.StraightDriving, result.Study.YawZero);
        Assert.All(result.Runs, r => Assert.Equal(2.0, r.AngleDeg!.Value.Value, 0.15));
    }

    [Fact]
    public void Opposite_signs_of_angle_and_yaw_are_reported()
    {
        var chunks = Usual().Chunks().Select(c => (c.Item1, new SteeringColumns(c.Item2.Start, c.Item2.RateHz,
            c.Item2.Columns.Select(k => k.Channel == SteeringChannel.YawRate ? k with { Values = k.Values!.Select(x => -x).ToArray() } : k)))).ToList();
        Assert.Contains(Reduce(chunks).Study.NotPossible, n => n.StartsWith("signs"));
        Assert.DoesNotContain(Reduce(Usual().Chunks()).Study.NotPossible, n => n.StartsWith("signs"));
    }

    [Fact]
    public void Pull_compensation_is_recognised_by_its_decay_and_the_torsion_bar_alone_then_says_nothing()
    {
        var drive = new Drive { Torque = 0.8 }.Stand(10);
        for (var k = 0; k < 5; k++) drive.Turn(6, 10).Straight(20).Straight(20, torqueFactor: 0.5).Straight(50, torqueFactor: 0.05);
        var bare = Reduce(drive.Chunks(without: SteeringChannel.AssistTorque));
        Assert.True(bare.Study.PullCompensation);
        Assert.All(bare.Runs, r => Assert.Null(r.TorqueNm));
        Assert.Contains(bare.Study.NotPossible, n => n.Contains("pull compensation"));
        var steady = new Drive { Torque = 0.8 }.Stand(10);
        for (var k = 0; k < 5; k++) steady.Turn(6, 10).Straight(90);
        Assert.False(Reduce(steady.Chunks()).Study.PullCompensation);
    }

    [Fact]
    public void Studies_of_two_trips_add_up()
    {
        var (a, b) = (Reduce(Usual().Chunks()).Study, Reduce(new Drive().Stand(30).Straight(60).Chunks()).Study);
        var both = VehicleSteeringStudy.Of([a, b]);
        Assert.Equal(a.SecondsStraight + b.SecondsStraight, both.SecondsStraight, 1e-9);
        Assert.Equal(VehicleSteeringStudy.Of([b, a]).TurnedLeftDeg, both.TurnedLeftDeg);
    }
}
