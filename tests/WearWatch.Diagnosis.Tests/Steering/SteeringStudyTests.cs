using WearWatch.Diagnosis.Changes;
using WearWatch.Diagnosis.Steering;
using WearWatch.Diagnosis.Tests.Rules;

namespace WearWatch.Diagnosis.Tests.Steering;

/// <summary>What the signals hold beyond straight runs, on signals whose answer is known.</summary>
public class SteeringStudyTests
{
    private const double Wheelbase = 3.6, Ratio = 16;
    private static readonly ReductionVehicle s_van = new(Wheelbase, Ratio);

    private static VehicleSteeringStudy Study(IReadOnlyList<(long, SteeringColumns)> chunks) => RunReduction.ReduceStream("van", "trip", chunks, s_van).Study;

    /// <summary>A jolt of 0.3 s at the given second, felt by the channels named.</summary>
    private static Signals Jolted(double at, double lateral, double torque, double angle)
    {
        var s = new Signals();
        double Jolt(double t) => t >= at && t < at + 0.3 ? (Math.Round(t * 10) % 2 == 0 ? 1 : -1) : 0;
        return s.With(SteeringChannel.Speed, _ => 60).With(SteeringChannel.YawRate, _ => s.Noise(0.05))
            .With(SteeringChannel.LateralAcceleration, t => s.Noise(0.2) + lateral * Jolt(t)).With(SteeringChannel.DriverTorque, t => 0.5 + s.Noise(0.1) + torque * Jolt(t))
            .With(SteeringChannel.SteeringWheelAngle, t => 2 + s.Noise(0.3) + angle * Jolt(t));
    }

    [Fact]
    public void A_jolt_felt_by_two_signals_is_a_kerb_strike_candidate_with_its_second()
    {
        var strike = Assert.Single(Study(Jolted(200, 5, 6, 8).Chunks(400)).KerbStrikes);
        Assert.Equal(Drive.Start.AddSeconds(200), strike.At);
        Assert.Equal("trip/3", strike.Rests);
        Assert.InRange(strike.LateralRange!.Value, 9, 12);
    }

    [Fact]
    public void A_jolt_of_one_signal_alone_is_none_and_quiet_driving_has_none()
    {
        Assert.Empty(Study(Jolted(200, 5, 0, 0).Chunks(400)).KerbStrikes);
        Assert.Empty(Study(Jolted(200, 0, 0, 0).Chunks(400)).KerbStrikes);
    }

    [Fact]
    public void A_strike_among_the_events_draws_the_date_of_a_change_to_its_minute()
    {
        var at = Changes.SteeringHistory.First.AddDays(297).AddHours(5);
        var strike = new KerbStrikeCandidate(at, "other/7", 9, null, 12);
        var events = ChangeEvents.Of(Vehicles.Van().Vehicle, [], [], [strike]);
        var change = Assert.Single(ChangeDating.Find(new Changes.SteeringHistory(3) { StepAtDay = 297, Events = events }.Make()));
        Assert.Equal(EventKind.KerbStrike, Assert.Single(change.Happened).Kind);
        Assert.InRange((change.Likely - at).Duration(), TimeSpan.Zero, TimeSpan.FromMinutes(1));
    }

    [Fact]
    public void Turning_duty_tells_left_from_right_and_tight_from_wide()
    {
        // 90 deg left at 10 deg/s and 18 km/h (radius 28.6 m), then 180 deg right at 30 deg/s and 18 km/h (radius 9.5 m).
        // A last digit that moves: a yaw rate that never does would be taken for frozen.
        static double Alive(double t) => Math.Round(t * 10) % 2 == 0 ? 0.01 : -0.01;
        double Yaw(double t) => t is >= 60 and < 69 ? 10 : t is >= 100 and < 106 ? -30 : 0;
        var duty = Study(new Signals().With(SteeringChannel.Speed, t => t < 20 ? 0 : 18).With(SteeringChannel.YawRate, t => Yaw(t) + Alive(t)).Chunks(150)).Duty!;
        Assert.Equal(90, duty.LeftDeg, 0.05);
        Assert.Equal(180, duty.RightDeg, 0.05);
        Assert.Equal(0, duty.TightLeftM, 1e-6);
        Assert.Equal(30, duty.TightRightM, 1e-3);
        Assert.Equal(1 / 3.0, duty.LeftShare!.Value, 1e-3);
    }

    /// <summary>Turns to either side in turn, each followed by half a minute of straight road on which the wheel rests short of the middle.</summary>
    private static Signals Turning(double shortLeft, double shortRight, double halfLoop)
    {
        var s = new Signals();
        static (bool Turn, int Side, double After) Phase(double t) => t < 20 ? (false, 0, 60) : ((t - 20) % 40 < 6, (int)((t - 20) / 40) % 2 == 0 ? 1 : -1, (t - 20) % 40 - 6);
        double Rest(double t) => Phase(t) is { Turn: false, After: < 6 } p ? p.Side : 0;
        return s.With(SteeringChannel.Speed, t => t < 20 ? 0 : 60).With(SteeringChannel.YawRate, t => (Phase(t).Turn ? 10 * Phase(t).Side : 0) + s.Noise(0.02))
            .With(SteeringChannel.SteeringWheelAngle, t => 1 + (Phase(t).Turn ? Phase(t).Side * Ratio * Wheelbase / (60 / 3.6) * 10 : 0) + (Rest(t) > 0 ? shortLeft : Rest(t) < 0 ? -shortRight : 0) + s.Noise(0.05))
            .With(SteeringChannel.DriverTorque, t => 0.3 + Rest(t) * halfLoop + s.Noise(0.03));
    }

    [Fact]
    public void The_wheel_that_rests_short_after_turns_shows_half_the_friction_loop_and_no_asymmetry()
    {
        var back = Study(Turning(0.8, 0.8, 0.25).Chunks(660)).Return!;
        Assert.InRange(back.AfterLeft, 7, 8);
        Assert.Equal(0.8, back.RestAfterLeftDeg!.Value.Value, 0.1);
        Assert.Equal(-0.8, back.RestAfterRightDeg!.Value.Value, 0.1);
        Assert.Equal(0.25, back.HalfLoopNm!.Value.Value, 0.04);
        Assert.InRange(0, back.ReleaseAsymmetryDeg!.Value.Value - 0.1, back.ReleaseAsymmetryDeg.Value.Value + 0.1);
    }

    [Fact]
    public void A_wheel_that_stops_short_on_one_side_only_has_a_release_asymmetry() =>
        Assert.Equal(1.2, Study(Turning(1.5, 0.3, 0.2).Chunks(660)).Return!.ReleaseAsymmetryDeg!.Value.Value, 0.15);

    [Fact]
    public void Bends_of_many_kinds_give_the_understeer_gradient_of_each_side()
    {
        // Gillespie, Fundamentals of Vehicle Dynamics (SAE 1992), bicycle model: K = 0.02194 rad/g; here 0.022 to the left and 0.030 to the right.
        static double Yaw(double t) => t % 20 < 10 && t > 20 ? ((int)(t / 20) % 2 == 0 ? 1 : -1) * (2.5 + (int)(t / 40) % 5 * 1.2) : 0;
        var s = new Signals();
        const double v = 22;
        s.With(SteeringChannel.Speed, t => t < 20 ? 0 : v * 3.6).With(SteeringChannel.YawRate, t => Yaw(t) + s.Noise(0.02))
            .With(SteeringChannel.SteeringWheelAngle, t => 3 + Ratio * (Wheelbase * Yaw(t) / v + (Yaw(t) > 0 ? 0.022 : 0.030) * v * Yaw(t) / SteeringEquations.Gravity) + s.Noise(0.1));
        var read = Study(s.Chunks(900)).Understeer!;
        Assert.Equal(0.022, read.LeftRadPerG!.Value.Value, 0.002);
        Assert.Equal(0.030, read.RightRadPerG!.Value.Value, 0.002);
        Assert.InRange(read.LeftTurns, 15, 25);
    }

    [Fact]
    public void A_weave_gives_pull_friction_gradient_and_sensitivity()
    {
        // ISO 13674-1's manner: 100 km/h, 0.2 Hz; torque = 0.4 pull + 1.5 per m/s² ± 0.3 friction.
        const double v = 100 / 3.6, peak = 1.5;
        static double Lateral(double t) => t > 20 ? peak * Math.Sin(2 * Math.PI * 0.2 * t) : 0;
        static double Way(double t) => t > 20 ? Math.Sign(Math.Cos(2 * Math.PI * 0.2 * t)) : 0;
        var s = new Signals();
        s.With(SteeringChannel.Speed, t => t < 20 ? 0 : 100).With(SteeringChannel.YawRate, t => Lateral(t) / v * 180 / Math.PI + s.Noise(0.01))
            .With(SteeringChannel.SteeringWheelAngle, t => 1 + Lateral(t) / 0.08 + s.Noise(0.05)).With(SteeringChannel.DriverTorque, t => 0.4 + 1.5 * Lateral(t) + 0.3 * Way(t) + s.Noise(0.03));
        var centre = Study(s.Chunks(140)).OnCentre!;
        Assert.InRange(centre.Cycles, 20, 25);
        Assert.Equal(0.4, centre.TorqueAtZeroNm!.Value.Value, 0.03);
        Assert.Equal(0.3, centre.FrictionNm!.Value.Value, 0.06);
        Assert.Equal(1.5, centre.TorqueGradient!.Value.Value, 0.08);
        Assert.Equal(8, centre.SensitivityPer100Deg!.Value.Value, 0.4);
    }

    [Fact]
    public void Straight_driving_is_no_weave() => Assert.Null(Study(new Drive().Stand(20).Straight(300).Chunks()).OnCentre);

    [Theory]
    [InlineData(12, 0.2)]
    [InlineData(2, 0.03)]
    public void A_shimmy_in_the_band_of_wheel_hop_is_seen_and_a_slow_sway_is_not(double hz, double most)
    {
        var s = new Signals(100);
        s.With(SteeringChannel.Speed, t => t < 10 ? 0 : 90).With(SteeringChannel.YawRate, _ => s.Noise(0.02)).With(SteeringChannel.DriverTorque, t => 0.3 * Math.Sin(2 * Math.PI * hz * t));
        var hop = Study(s.Chunks(120)).WheelHop!;
        Assert.Equal(SteeringChannel.DriverTorque, hop.Channel);
        if (hz > 8) Assert.InRange(hop.Rms, most, 0.3 / Math.Sqrt(2) + 0.01);
        else Assert.InRange(hop.Rms, 0, most);
        Assert.Null(Study(Jolted(0, 0, 0, 0).Chunks(120)).WheelHop);
    }

    [Theory]
    [InlineData(SteeringChannel.SteeringWheelAngle)]
    [InlineData(SteeringChannel.LateralAcceleration)]
    public void A_turned_round_sign_is_named_and_what_rests_on_it_is_left_out(SteeringChannel turned)
    {
        var chunks = new Drive().Stand(20).Turn(10, 8).Straight(95).Turn(10, -12).Straight(40).Chunks().Select(c => (c.Item1, new SteeringColumns(c.Item2.Start, c.Item2.RateHz,
            c.Item2.Columns.Select(k => k.Channel == turned ? k with { Values = [.. k.Values!.Select(x => -x)] } : k)))).ToList();
        var (runs, study) = RunReduction.ReduceStream("van", "trip", chunks, s_van);
        Assert.Equal(turned == SteeringChannel.SteeringWheelAngle, study.Signs.Angle == SignVerdict.Opposite);
        Assert.Equal(turned == SteeringChannel.LateralAcceleration, study.Signs.LateralAcceleration == SignVerdict.Opposite);
        Assert.NotEmpty(runs);
        Assert.All(runs, r => Assert.Equal(turned == SteeringChannel.SteeringWheelAngle, r.AngleDeg is null));
        Assert.All(runs, r => Assert.Equal(turned == SteeringChannel.LateralAcceleration, r.BankReading is null));
        Assert.Contains(study.NotPossible, n => n.StartsWith("signs:", StringComparison.Ordinal));
    }
}
