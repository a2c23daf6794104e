using System.Globalization;
using WearWatch.Diagnosis.Chassis;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Geometry;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Tests.Rules;

namespace WearWatch.Diagnosis.Tests.Chassis;

public class ChassisTests
{
    [Fact]
    public void Every_suspension_has_one_row_with_words_and_a_source()
    {
        foreach (var suspension in Enum.GetValues<Suspension>()) Assert.Single(SuspensionTable.Rows, r => r.Suspension == suspension);
        Assert.All(SuspensionTable.Rows, r =>
        {
            Assert.All(new[] { r.Called, r.Joints, r.Located, r.Height, r.Source }, w => Assert.False(string.IsNullOrWhiteSpace(w)));
            Assert.All(new[] { r.SteeredToe, r.FixedToe, r.Camber, r.Caster, r.Direction }, s => Assert.False(string.IsNullOrWhiteSpace(s.CanBeSet ? s.Where : s.Otherwise)));
            // Compression never leans a wheel's top out on these, and a beam's camber does not follow ride height.
            Assert.True(r.CamberDegPerCm <= 0 && r.ToeDegPerCm >= 0 && r.LadenCamberDeg <= 0);
            if (r.Beam) Assert.Equal(0, r.CamberDegPerCm);
        });
        Assert.All(SteeringGeometry.Rows, r => Assert.True(r.RatioLow < r.RatioHigh && r.Source.Length > 0));
        Assert.All(SteeringGeometry.RunningToe, r => Assert.True(r.Why.Length > 0 && r.Source.Length > 0));
    }

    [Fact]
    public void Usual_trail_and_scrub_radius_follow_from_the_wheel_they_name()
    {
        // Worked out by hand from the inputs named in each row's source.
        Assert.Equal(Trail.MechanicalMm(0.31, 4), SteeringGeometry.Of(VehicleClass.Car)!.TrailMm, 0.05);
        Assert.Equal(Trail.ScrubRadiusMm(56, 310, 12), SteeringGeometry.Of(VehicleClass.Car)!.ScrubRadiusMm, 0.05);
        Assert.Equal(Trail.MechanicalMm(0.35, 4), SteeringGeometry.Of(VehicleClass.Van)!.TrailMm, 0.1);
        Assert.Equal(Trail.ScrubRadiusMm(80, 350, 10), SteeringGeometry.Of(VehicleClass.Van)!.ScrubRadiusMm, 0.1);
        Assert.Equal(Trail.MechanicalMm(0.49, 3.5), SteeringGeometry.Of(VehicleClass.Truck)!.TrailMm, 0.05);
        Assert.Equal(Trail.ScrubRadiusMm(120, 490, 6), SteeringGeometry.Of(VehicleClass.Truck)!.ScrubRadiusMm, 0.05);
    }

    [Fact]
    public void Drag_turns_wheels_out_and_drive_turns_them_in_and_a_beam_keeps_its_toe()
    {
        foreach (var steered in new[] { true, false })
        {
            Assert.True(SteeringGeometry.RunningToeOf(steered, true, false).ChangeDeg > 0);
            Assert.True(SteeringGeometry.RunningToeOf(steered, false, false).ChangeDeg < 0);
        }
        Assert.Equal(0, SteeringGeometry.RunningToeOf(false, true, true).ChangeDeg);
        // A truck's steer beam: 1/16 in of toe-in standing, near zero loaded and running (tyre dealer's recommendations).
        Assert.Equal(0, 0.09 + SteeringGeometry.RunningToeOf(true, false, true).ChangeDeg, 0.01);
    }

    private static Finding OneWheel(Suspension suspension, Func<Axle, Axle>? change = null)
    {
        var van = Vehicles.Van().Edge("1L", 0.12).Edge("1R", 0.005);
        var axle = van.Vehicle.AxleAt(1)! with { Suspension = suspension };
        return GeometryRules.Find(van with { Vehicle = van.Vehicle with { Axles = [change?.Invoke(axle) ?? axle, van.Vehicle.AxleAt(2)!] } }).Only(FindingKind.OneEdgeWear);
    }

    [Fact]
    public void Camber_out_on_struts_is_a_bent_or_worn_part_on_a_beam_a_bent_axle_and_on_wishbones_it_is_set()
    {
        var strut = OneWheel(Suspension.Strut);
        Assert.Contains("cannot be set there; look for a bent strut, knuckle or arm, a worn lower-arm bush or top mount", strut.FirstCheck, StringComparison.Ordinal);
        Assert.False(strut.AlignmentMends);
        Assert.Contains("strut's spring", strut.Caution, StringComparison.Ordinal);

        var beam = OneWheel(Suspension.BeamLeaf);
        Assert.Contains("a bent beam or stub axle", beam.FirstCheck, StringComparison.Ordinal);
        Assert.Contains("kingpins", beam.FirstCheck, StringComparison.Ordinal);
        Assert.False(beam.AlignmentMends);

        var wishbones = OneWheel(Suspension.DoubleWishbone);
        Assert.Contains("set by shims or eccentrics", wishbones.FirstCheck, StringComparison.Ordinal);
        Assert.True(wishbones.AlignmentMends);
    }

    [Fact]
    public void The_operators_word_on_what_can_be_set_stands_above_the_table()
    {
        var slotted = OneWheel(Suspension.Strut, a => a with { CamberAdjustable = true });
        Assert.True(slotted.AlignmentMends);
        Assert.Contains("set where this vehicle provides for it", slotted.FirstCheck, StringComparison.Ordinal);
        var welded = OneWheel(Suspension.DoubleWishbone, a => a with { CamberAdjustable = false });
        Assert.False(welded.AlignmentMends);
        Assert.Contains("look for a bent wishbone", welded.FirstCheck, StringComparison.Ordinal);
        var axle = new Axle { Number = 1, Steered = true, ScrubRadiusMm = 12, TrailMm = 40 };
        var chassis = AxleChassis.Of(Vehicles.Van().Vehicle, axle, true);
        Assert.Equal((12, 40), (chassis.ScrubRadiusMm, chassis.TrailMm));
    }

    [Theory]
    [InlineData(CheckFor.Toe)]
    [InlineData(CheckFor.WheelCamber)]
    [InlineData(CheckFor.AxleDirection)]
    [InlineData(CheckFor.DiagonalWear)]
    public void A_check_goes_from_pressures_over_bearings_bushes_and_height_to_the_angle(CheckFor check)
    {
        foreach (var row in SuspensionTable.Rows)
        {
            var words = FirstCheck.For(check, row.Suspension);
            int[] at = [words.IndexOf("pressures", StringComparison.Ordinal), words.IndexOf("bearing", StringComparison.Ordinal), words.IndexOf(row.Located, StringComparison.Ordinal),
                words.IndexOf(row.Height, StringComparison.Ordinal), words.LastIndexOf(check switch { CheckFor.WheelCamber => "camber of both", CheckFor.AxleDirection => "axle's direction", _ => "total toe" }, StringComparison.Ordinal)];
            Assert.DoesNotContain(-1, at);
            Assert.Equal(at.Order(), at);
        }
    }

    [Fact]
    public void A_driven_axle_runs_further_in_than_it_stands_and_the_check_says_so()
    {
        var front = GeometryRules.Find(Vehicles.FrontDrivenVan().Edge("1L", 0.08).Edge("1R", 0.08)).Only(FindingKind.OneEdgeWear);
        Assert.Contains("0.05 deg further in when running", front.FirstCheck, StringComparison.Ordinal);
        Assert.Contains("rear axles before the front", front.FirstCheck, StringComparison.Ordinal);
    }

    [Theory]
    [InlineData(Suspension.BeamLeaf, true, "a live beam axle on leaf springs")]
    [InlineData(Suspension.BeamAir, false, "a dead beam axle on air springs")]
    [InlineData(Suspension.BeamCoil, false, "a dead beam axle on coil springs with links and a lateral rod")]
    [InlineData(Suspension.Strut, true, "an axle on struts")]
    public void A_beam_is_live_or_dead(Suspension suspension, bool driven, string called) =>
        Assert.Equal(called, AxleChassis.Of(Vehicles.Van().Vehicle, new Axle { Number = 2, Driven = driven, Suspension = suspension }, false).Called);

    private static Vehicle Of(VehicleClass kind, params Axle[] axles) => new() { VehicleId = "V", Depot = "D", Class = kind, Axles = axles };

    private static readonly Axle Steer = new() { Number = 1, Steered = true, Suspension = Suspension.BeamLeaf };
    private static readonly Axle Drive = new() { Number = 2, Driven = true, Suspension = Suspension.BeamAir };

    [Fact]
    public void Sound_chassis_data_are_taken_as_they_are()
    {
        foreach (var figures in new[] { Vehicles.Van(), Vehicles.Bus(), Vehicles.Truck(), Vehicles.Trailer(), Vehicles.FrontDrivenVan() })
        {
            var check = ChassisCheck.Of(figures.Vehicle, []);
            Assert.Empty(check.Problems);
            Assert.Equal(figures.Vehicle.Axles, check.Vehicle.Axles);
        }
    }

    [Fact]
    public void A_driven_axle_on_a_trailer_is_taken_as_free_rolling_and_said_so()
    {
        var check = ChassisCheck.Of(Of(VehicleClass.Trailer, Drive with { Number = 1 }), []);
        Assert.False(check.Vehicle.Axles[0].Driven);
        var problem = Assert.Single(check.Problems);
        Assert.Contains("recorded as driven; taken as free-rolling", problem.Because, StringComparison.Ordinal);
        Assert.NotEmpty(problem.WouldHelp);
    }

    [Fact]
    public void A_steered_live_axle_with_a_trailer_class_is_taken_as_self_steering()
    {
        var check = ChassisCheck.Of(Of(VehicleClass.Trailer, Steer with { Driven = true }), []);
        Assert.True(check.Vehicle.Axles[0] is { Steered: true, Driven: false });
        Assert.Contains("steered and driven", Assert.Single(check.Problems).Because, StringComparison.Ordinal);
        // A self-steering trailer axle that is not driven is no contradiction.
        Assert.Empty(ChassisCheck.Of(Of(VehicleClass.Trailer, Steer), []).Problems);
    }

    [Theory]
    [InlineData(false, false, null, VehicleClass.Trailer)]
    [InlineData(true, true, 12_000.0, VehicleClass.Truck)]
    [InlineData(true, true, 2_800.0, VehicleClass.Van)]
    public void A_missing_class_is_read_from_the_axles_and_said_so(bool steered, bool driven, double? mass, VehicleClass expected)
    {
        var vehicle = Of((VehicleClass)99, new Axle { Number = 1, Steered = steered }, new Axle { Number = 2, Driven = driven }) with { GrossMassKg = mass };
        var check = ChassisCheck.Of(vehicle, []);
        Assert.Equal(expected, check.Vehicle.Class);
        Assert.Contains("no class is recorded", Assert.Single(check.Problems).Because, StringComparison.Ordinal);
    }

    [Theory]
    [InlineData(0.0)]
    [InlineData(-0.1)]
    public void Tolerances_that_exclude_their_target_give_way_to_the_class(double tolerance)
    {
        var vehicle = Of(VehicleClass.Truck, Steer with { TargetTotalToeDeg = 0.1, ToleranceTotalToeDeg = tolerance }, Drive);
        ToleranceFact[] own = [new() { Class = VehicleClass.Truck, Quantity = Quantity.Thrust, PlusMinus = tolerance, From = new(2026, 1, 1) }];
        var check = ChassisCheck.Of(vehicle, own);
        Assert.Equal(2, check.Problems.Count);
        Assert.All(check.Problems, p => Assert.Contains("excludes its own target", p.Because, StringComparison.Ordinal));
        Assert.Equal((0.1, 0.045), (Tolerances.For(check.Vehicle, Quantity.FrontTotalToe, 1, own, Vehicles.AsOf)!.Value.Target, Tolerances.For(check.Vehicle, Quantity.FrontTotalToe, 1, own, Vehicles.AsOf)!.Value.PlusMinus));
        Assert.Equal(0.10, Tolerances.For(check.Vehicle, Quantity.Thrust, null, own, Vehicles.AsOf)!.Value.PlusMinus);
    }

    [Fact]
    public void Targets_in_minutes_of_arc_and_figures_that_are_not_numbers_give_way_to_the_class()
    {
        var check = ChassisCheck.Of(Of(VehicleClass.Truck, Steer with { TargetTotalToeDeg = 6, TargetCamberDeg = double.NaN, ToleranceCamberDeg = double.PositiveInfinity }, Drive), []);
        Assert.True(check.Vehicle.Axles[0] is { TargetTotalToeDeg: null, TargetCamberDeg: null, ToleranceCamberDeg: null });
        Assert.Equal(3, check.Problems.Count);
    }

    [Fact]
    public void What_is_doubtful_of_axles_is_named_one_by_one()
    {
        string[] Because(Vehicle v) => [.. ChassisCheck.Of(v, []).Problems.Select(p => p.Because)];
        Assert.Contains("no axle is recorded", Assert.Single(Because(Of(VehicleClass.Van))), StringComparison.Ordinal);
        Assert.Contains("as driven", Assert.Single(Because(Of(VehicleClass.Van, Steer, new Axle { Number = 2 }))), StringComparison.Ordinal);
        Assert.Contains("axle 1 is taken for the steer axle", Assert.Single(Because(Of(VehicleClass.Van, new Axle { Number = 1 }, Drive))), StringComparison.Ordinal);
        Assert.Contains("two axles bear one number", Assert.Single(Because(Of(VehicleClass.Van, Steer, Drive, Drive with { Lifting = true }))), StringComparison.Ordinal);
        Assert.Contains("which do not steer", Assert.Single(Because(Of(VehicleClass.Van, Steer with { Suspension = Suspension.TrailingArm }, Drive))), StringComparison.Ordinal);
        Assert.Contains("twin tyres", Assert.Single(Because(Of(VehicleClass.Truck, Steer with { Duals = true }, Drive))), StringComparison.Ordinal);
        Assert.Contains("kg does not fit a car", Assert.Single(Because(Of(VehicleClass.Car, Steer, Drive) with { GrossMassKg = 18_000 })), StringComparison.Ordinal);
        var ratio = ChassisCheck.Of(Of(VehicleClass.Van, Steer, Drive) with { SteeringRatio = 160 }, []);
        Assert.Null(ratio.Vehicle.SteeringRatio);
        Assert.Contains("160", Assert.Single(ratio.Problems).Because, StringComparison.Ordinal);
    }

    [Fact]
    public void A_finding_on_contradictory_data_says_what_they_leave_open()
    {
        var trailer = Vehicles.Trailer().Edge("1L", -0.03, 0.005).Edge("1R", 0.03, 0.005);
        var odd = trailer with { Vehicle = trailer.Vehicle with { Axles = [.. trailer.Vehicle.Axles.Select(a => a with { Driven = a.Number == 2 })] } };
        var (sound, doubtful) = (GeometryRules.Find(trailer).Only(FindingKind.AxleSkew), GeometryRules.Find(odd).Only(FindingKind.AxleSkew));
        Assert.Equal(sound.Confounders.Count + 1, doubtful.Confounders.Count);
        Assert.Contains("free-rolling", doubtful.Confounders[^1].What, StringComparison.Ordinal);
        Assert.Equal(sound.Sentence, doubtful.Sentence);
    }

    [Fact]
    public void Where_no_axle_is_recorded_as_driven_none_is_taken_for_free_rolling()
    {
        var van = Vehicles.FrontDrivenVan().Feather("2L", 0.6).With("2L", t => t with { RoundVariationMm = new(0.9, 0.1) });
        Assert.Contains(GeometryRules.Find(van), f => f.Kind == FindingKind.DiagonalWear);
        var unknown = van with { Vehicle = van.Vehicle with { Axles = [.. van.Vehicle.Axles.Select(a => a with { Driven = false })] } };
        Assert.DoesNotContain(GeometryRules.Find(unknown), f => f.Kind == FindingKind.DiagonalWear);
        Assert.Contains(GeometryRules.Find(unknown), f => f.Kind == FindingKind.Cupping);
    }

    [Fact]
    public void A_strange_vehicle_gives_findings_and_no_exception()
    {
        var figures = Vehicles.Van().Edge("1L", 0.12).Pull(0.9) with { Vehicle = Of((VehicleClass)99) };
        Assert.All(GeometryRules.Find(figures), f => Assert.NotEmpty(f.Sentence.ToString(CultureInfo.InvariantCulture)));
    }
}
