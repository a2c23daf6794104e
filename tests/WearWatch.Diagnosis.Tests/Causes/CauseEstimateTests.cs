using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;
using Xunit.Abstractions;

namespace WearWatch.Diagnosis.Tests.Causes;

public sealed class CauseEstimateTests(ITestOutputHelper output)
{
    private const double Plain = 0.10, Doubtful = 0.055; // outboard less inboard, mm per 1000 km, on a normal wear of 0.10

    [Theory]
    [InlineData("van")]
    [InlineData("bus")]
    [InlineData("truck")]
    [InlineData("trailer")]
    public void A_vehicle_nobody_measured_stands_at_the_base_rate(string kind)
    {
        var verdict = Named(kind).Judge();
        output.WriteLine($"{verdict.MisalignedProbability:0.000}");
        Assert.InRange(verdict.MisalignedProbability, 0.18, 0.22);
        Assert.NotEmpty(verdict.CannotTell);
    }

    [Theory]
    [InlineData("van")]
    [InlineData("bus")]
    [InlineData("truck")]
    [InlineData("trailer")]
    public void A_vehicle_with_normal_figures_is_probably_sound(string kind)
    {
        var verdict = Named(kind).WithTyres(p => CauseCases.Tyre(p)).WithSteering().Judge();
        output.WriteLine($"{verdict.MisalignedProbability:0.000} {Words(verdict)}");
        Assert.InRange(verdict.MisalignedProbability, 0, 0.19);
    }

    [Fact]
    public void Mirrored_outboard_shoulder_wear_names_front_toe_in_first()
    {
        var verdict = ToeIn(Plain).Judge();
        output.WriteLine($"{verdict.MisalignedProbability:0.000} {Words(verdict)}");
        Assert.True(verdict.MisalignedProbability > 0.7);
        var first = verdict.Causes[0];
        Assert.Equal(Quantity.FrontTotalToe, first.Quantity);
        Assert.True(first.Value.Low > 0.30); // target 0.15, tolerance 0.15
    }

    [Fact]
    public void Rubs_that_agree_raise_toe_and_rubs_that_feel_nothing_lower_it()
    {
        var plain = ToeIn(Doubtful).Judge().Of(Quantity.FrontTotalToe);
        var felt = ToeIn(Doubtful).WithTyre("1L", t => t with { RubsCatchingOutward = 2 }).WithTyre("1R", t => t with { RubsCatchingOutward = 2 }).Judge().Of(Quantity.FrontTotalToe);
        var nothing = ToeIn(Doubtful).WithTyre("1L", t => t with { RubsCatchingNeither = 2 }).WithTyre("1R", t => t with { RubsCatchingNeither = 2 }).Judge().Of(Quantity.FrontTotalToe);
        output.WriteLine($"{nothing:0.000} {plain:0.000} {felt:0.000}");
        Assert.True(felt > plain);
        Assert.True(nothing < plain);
    }

    [Fact]
    public void Stronger_shoulder_wear_raises_the_probability_of_toe()
    {
        double Toe(double edge) => CauseCases.Van().WithTyres(p => CauseCases.Tyre(p, p.Axle == 1 ? edge : 0, p.Axle == 1 ? 2 * edge : 0)).WithSteering().Judge().Of(Quantity.FrontTotalToe);
        var steps = new[] { 0, 0.03, 0.06, 0.10 }.Select(Toe).ToArray();
        output.WriteLine(string.Join(" ", steps.Select(s => s.ToString("0.000"))));
        Assert.True(steps.Zip(steps.Skip(1)).All(pair => pair.First < pair.Second));
    }

    [Fact]
    public void One_tyre_outboard_and_its_mate_inboard_on_a_one_way_loop_is_not_toe()
    {
        var verdict = CauseCases.Bus().WithTyres(p => CauseCases.Tyre(p, Turn(p) * (p.Axle == 1 ? 0.08 : 0.05))).WithSteering(pull: null)
            with
        { Route = new UsualRoute { VehicleId = "V1", Loop = true, LeftTurnShare = 0.85 } };
        var judged = verdict.Judge();
        output.WriteLine($"{judged.MisalignedProbability:0.000} {Words(judged)}");
        Assert.True(judged.MisalignedProbability < 0.5);
        Assert.True(judged.Of(Quantity.FrontTotalToe) < 0.05);
    }

    [Fact]
    public void An_off_centre_wheel_with_rear_tyres_scrubbing_one_way_names_thrust()
    {
        // 0.5 deg of thrust on a ratio of 16 turns the wheel by 8 deg.
        var van = CauseCases.Van().WithTyres(p => CauseCases.Tyre(p, p.Axle == 2 ? Turn(p) * 0.02 : 0)).WithSteering(offCentre: 8);
        var verdict = van.Judge();
        output.WriteLine($"{verdict.MisalignedProbability:0.000} {Words(verdict)}");
        Assert.Equal(Quantity.Thrust, verdict.First().Quantity);
        Assert.True(verdict.First().Value.Low > 0.2);
        // Without the rear tyres' word the zero of the sensor remains a strong rival.
        var alone = CauseCases.Van().WithSteering(offCentre: 8).Judge();
        output.WriteLine($"{alone.MisalignedProbability:0.000} {Words(alone)}");
        Assert.True(alone.Of(Quantity.SensorZeroOrFrontToeSplit) > 0.2);
    }

    [Fact]
    public void A_steady_pull_on_electric_steering_names_caster_split_with_conicity_as_rival()
    {
        var verdict = CauseCases.Van().WithTyres(p => CauseCases.Tyre(p)).WithSteering(pull: 1.1).Judge();
        output.WriteLine($"{verdict.MisalignedProbability:0.000} {Words(verdict)}");
        Assert.Equal(Quantity.CasterSplit, verdict.First().Quantity);
        Assert.True(verdict.First().Value.Value > 0.75);
        Assert.Contains(verdict.CannotTell, c => c.What.Contains("conicity", StringComparison.Ordinal));
        // A weaker pull may as well be a tyre: conicity stands among the first causes, and is not called misaligned.
        var weak = CauseCases.Van().WithTyres(p => CauseCases.Tyre(p)).WithSteering(pull: 0.45).Judge();
        output.WriteLine($"{weak.MisalignedProbability:0.000} {Words(weak)}");
        Assert.Contains(weak.Causes.Take(3), c => c.Quantity == Quantity.Conicity);
    }

    [Fact]
    public void A_caster_split_on_hydraulic_steering_leaves_almost_no_trace()
    {
        // 1.5 deg: 0.82 N·m at the column, of which about 0.12 remains where torque is measured.
        var verdict = CauseCases.Van(SteeringAssist.Hydraulic).WithTyres(p => CauseCases.Tyre(p)).WithSteering(pull: 0.12).Judge();
        output.WriteLine($"{verdict.MisalignedProbability:0.000} {Words(verdict)}");
        Assert.True(verdict.Of(Quantity.CasterSplit) < 0.3);
        Assert.Contains(verdict.CannotTell, c => c.Because.Contains("assist", StringComparison.Ordinal));
    }

    [Fact]
    public void Trailer_tyres_all_worn_to_one_side_name_trailer_skew_among_angles_but_turning_one_way_before_it()
    {
        // Skewed axles make the trailer run crabwise until hardly any side force is left; routes that turn one way, or roads
        // that fall one way more than usual, leave the same mark and are as common.
        var verdict = CauseCases.Trailer().WithTyres(p => CauseCases.Tyre(p, Turn(p) * 0.10, 0.5)).Judge();
        output.WriteLine($"{verdict.MisalignedProbability:0.000} {Words(verdict)}");
        Assert.Equal(Quantity.TrailerSkew, verdict.First().Quantity);
        Assert.True(verdict.First().Value.Value > 0.1);
        Assert.True(verdict.Of(Quantity.Duty) > verdict.Of(Quantity.TrailerSkew));
    }

    [Fact]
    public void Tandem_axles_worn_opposite_ways_name_tandem_skew()
    {
        // The axle that points uphill adds to the slip that holds the trailer on the crown, the other one takes from it.
        var verdict = CauseCases.Trailer(2).WithTyres(p => CauseCases.Tyre(p, Turn(p) * (p.Axle == 1 ? 0.05 : -0.05), p.Axle == 1 ? 0.5 : -0.35)).Judge();
        output.WriteLine($"{verdict.MisalignedProbability:0.000} {Words(verdict)}");
        Assert.Equal(Quantity.TandemSkew, verdict.First().Quantity);
        Assert.Equal(1, verdict.First().Axle);
    }

    [Fact]
    public void One_wheel_worn_on_its_inboard_shoulder_names_camber_there()
    {
        var verdict = CauseCases.Van().WithTyres(p => CauseCases.Tyre(p, p == Position.Parse("1L") ? -0.07 : 0)).WithSteering(pull: 0.6).Judge();
        output.WriteLine($"{verdict.MisalignedProbability:0.000} {Words(verdict)}");
        var first = verdict.First();
        Assert.True(first is { Quantity: Quantity.Camber, Axle: 1, Side: Side.Left } || first.Quantity == Quantity.CamberSplit);
        Assert.True(verdict.Of(Quantity.Camber) > 0.1);
    }

    [Fact]
    public void A_soft_tyre_worn_on_both_shoulders_is_pressure_and_no_angle()
    {
        var van = CauseCases.Van().WithTyres(p => CauseCases.Tyre(p)).WithSteering()
            .WithTyre("2R", t => t with { PressureShare = new Estimate(-0.3, 0.02), ShoulderMmPer1000Km = new Estimate(0.03, 0.01) });
        var verdict = van.Judge();
        output.WriteLine($"{verdict.MisalignedProbability:0.000} {Words(verdict)}");
        Assert.True(verdict.Causes[0] is { Quantity: Quantity.Pressure, Axle: 2, Side: Side.Right });
        Assert.True(verdict.Of(Quantity.Pressure) > 0.8);
        Assert.True(verdict.MisalignedProbability < 0.3);
    }

    [Fact]
    public void One_wild_reading_does_not_decide()
    {
        var sound = CauseCases.Van().WithTyres(p => CauseCases.Tyre(p)).WithSteering();
        var wild = sound.WithTyre("2L", t => t with { EdgeSlopeMmPer1000Km = new Estimate(0.35, 0.01) });
        output.WriteLine($"{sound.Judge().MisalignedProbability:0.000} {wild.Judge().MisalignedProbability:0.000}");
        Assert.True(wild.Judge().MisalignedProbability < 0.9);
    }

    [Fact]
    public void A_recent_bench_record_in_order_lowers_every_fault_and_fades_with_time()
    {
        VehicleFigures With(int days) => ToeIn(Doubtful) with
        {
            WorkshopRecords = [new() { VehicleId = "V1", At = At(days), Result = WorkshopResult.InOrder }],
        };
        var (none, old, recent) = (ToeIn(Doubtful).Judge().MisalignedProbability, With(900).Judge().MisalignedProbability, With(20).Judge().MisalignedProbability);
        output.WriteLine($"{none:0.000} {old:0.000} {recent:0.000}");
        Assert.True(recent < old && old < none);
    }

    [Fact]
    public void Angles_measured_before_count_when_nothing_was_adjusted()
    {
        var record = new WorkshopRecord
        {
            VehicleId = "V1",
            At = At(20),
            Result = WorkshopResult.CouldNotAdjust,
            Angles = [new() { Quantity = Quantity.FrontTotalToe, BeforeDeg = 0.55 }],
        };
        var measured = (CauseCases.Van() with { WorkshopRecords = [record] }).Judge();
        var adjusted = (CauseCases.Van() with { WorkshopRecords = [record with { Result = WorkshopResult.Adjusted }] }).Judge();
        output.WriteLine($"{measured.MisalignedProbability:0.000} {Words(measured)} | {adjusted.MisalignedProbability:0.000}");
        Assert.True(measured.Of(Quantity.FrontTotalToe) > 0.7);
        Assert.InRange(measured.First().Value.Value, 0.45, 0.65);
        Assert.True(adjusted.MisalignedProbability < 0.1);
    }

    [Fact]
    public void A_driver_report_moves_the_probability_a_little_and_the_right_way()
    {
        var van = CauseCases.Van();
        var report = new DriverReport { VehicleId = "V1", At = At(30), Symptom = Symptom.PullsRight };
        var (without, with, old) = (van.Judge().Of(Quantity.CasterSplit), (van with { DriverReports = [report] }).Judge().Of(Quantity.CasterSplit),
            (van with { DriverReports = [report with { At = At(400) }] }).Judge().Of(Quantity.CasterSplit));
        output.WriteLine($"{without:0.0000} {with:0.0000}");
        Assert.InRange(with / without, 1.01, 2);
        Assert.Equal(without, old, 1e-12);
    }

    internal static double Turn(Position p) => p.Side == Side.Right ? 1 : -1;

    private static DateTimeOffset At(int daysBefore) => new(CauseCases.Day.AddDays(-daysBefore), TimeOnly.MinValue, TimeSpan.Zero);

    private static VehicleFigures ToeIn(double edge) => CauseCases.Van()
        // On a road that falls right, toe-in adds to the right wheel's slip and takes from the left one's.
        .WithTyres(p => CauseCases.Tyre(p, p.Axle == 1 ? edge : 0, p.Axle == 1 ? (p.Side == Side.Right ? 9 : 0.5) * edge : 0)).WithSteering();

    internal static VehicleFigures Named(string kind) => kind switch { "bus" => CauseCases.Bus(), "truck" => CauseCases.Truck(), "trailer" => CauseCases.Trailer(), _ => CauseCases.Van() };

    private static string Words(Diagnosis.Causes.Verdict verdict) => string.Join("; ", verdict.Causes.Take(5)
        .Select(c => $"{c.Quantity.WireName()} {c.Axle}{c.Side} {c.Value.Value:0.00} [{c.Value.Low:0.00} {c.Value.High:0.00}] p {c.Probability:0.000}"));
}
