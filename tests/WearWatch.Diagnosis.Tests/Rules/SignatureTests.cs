using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;

namespace WearWatch.Diagnosis.Tests.Rules;

/// <summary>
/// The table of wear signatures, one row a test. Rows are common practice, no source, except: sharp edges and toe
/// (Buick Shop Manual 1948, pp. 212-213; Chevrolet 1942-47, section 10) and the dual depth gap of 4/32 in (fleet press).
/// </summary>
public class SignatureTests
{
    [Fact]
    public void Toe_in_on_both_wheels_wears_both_outer_shoulders_with_the_fin_inboard()
    {
        var findings = GeometryRules.Find(Vehicles.Van().Edge("1L", 0.062).Edge("1R", 0.055).Feather("1L", 0.6).Feather("1R", 0.5));
        var wear = findings.Only(FindingKind.OneEdgeWear);
        Assert.Equal(1, wear.Axle);
        Assert.Null(wear.Side);
        Assert.Equal([Quantity.FrontTotalToe, Quantity.Camber], wear.Causes.Take(2));
        Assert.True(wear.AlignmentMends);
        Assert.StartsWith("Both steer tyres wear their outboard shoulders faster than normal (left 0.062, right 0.055 mm per 1000 km; 90 % 0.047 to 0.070)", wear.Sentence, StringComparison.Ordinal);
        Assert.Contains("toe-in", wear.Sentence, StringComparison.Ordinal);
        Assert.Contains("toe-in", findings.Only(FindingKind.Feathering).Sentence, StringComparison.Ordinal);
        Assert.Equal(["survey-1L", "survey-1R"], wear.EvidenceFor.SelectMany(e => e.Rests).Distinct());
    }

    [Fact]
    public void Toe_out_wears_both_inner_shoulders_with_the_fin_outboard()
    {
        var wear = GeometryRules.Find(Vehicles.Van().Edge("1L", -0.08).Edge("1R", -0.07).Feather("1L", -0.6).Feather("1R", -0.5)).Only(FindingKind.OneEdgeWear);
        Assert.Contains("inboard shoulders", wear.Sentence, StringComparison.Ordinal);
        Assert.Contains("toe-out", wear.Sentence, StringComparison.Ordinal);
        Assert.Equal(Quantity.FrontTotalToe, wear.Causes[0]);
    }

    [Fact]
    public void Both_outer_shoulders_rounded_without_a_fin_speak_for_cornering_and_no_alignment()
    {
        var wear = GeometryRules.Find(Vehicles.Bus().Edge("1L", 0.08).Edge("1R", 0.08).Feather("1L", 0.0, 0.08).Feather("1R", 0.05, 0.08)).Only(FindingKind.OneEdgeWear);
        Assert.Equal(Quantity.Duty, wear.Causes[0]);
        Assert.False(wear.AlignmentMends);
        Assert.Contains(wear.EvidenceAgainst, e => e.Statement.Contains("clean", StringComparison.Ordinal));
    }

    [Fact]
    public void Outer_shoulders_with_the_fin_on_the_wrong_side_speak_for_camber_before_toe()
    {
        var wear = GeometryRules.Find(Vehicles.Van().Edge("1L", 0.08).Edge("1R", 0.08).Feather("1L", -0.5).Feather("1R", -0.5)).Only(FindingKind.OneEdgeWear);
        Assert.Equal(Quantity.Camber, wear.Causes[0]);
        Assert.NotEmpty(wear.EvidenceAgainst);
    }

    [Fact]
    public void One_steer_tyre_outer_and_the_other_inner_sends_one_to_the_rear_axles_first()
    {
        // Left wears outboard, right inboard: toward the vehicle's left, against the crown of right-hand traffic.
        var wear = GeometryRules.Find(Vehicles.Truck().Edge("1L", 0.04, 0.005).Edge("1R", -0.035, 0.005)).Only(FindingKind.OneEdgeWear);
        Assert.Equal([Quantity.Thrust, Quantity.TandemSkew], wear.Causes.Take(2));
        Assert.Contains("rear axles", wear.FirstCheck, StringComparison.Ordinal);
        Assert.Contains("vehicle's left", wear.Sentence, StringComparison.Ordinal);
        Assert.DoesNotContain(Quantity.Crown, wear.Causes);
        Assert.True(wear.AlignmentMends);
    }

    [Theory]
    [InlineData(+1, true)]
    [InlineData(-1, false)]
    public void A_tandem_pushes_the_steer_axle_away_from_where_its_front_axle_points(int frontAxlePointsLeft, bool agrees)
    {
        // Steer tyres worn toward the vehicle's left: the road pushes them right, as with the tandem's front axle pointing left.
        var truck = Vehicles.Truck().Edge("1L", 0.04, 0.005).Edge("1R", -0.04, 0.005);
        foreach (var dual in new[] { "O", "I" })
            truck = truck.Edge($"2L{dual}", -0.03 * frontAxlePointsLeft, 0.005).Edge($"2R{dual}", 0.03 * frontAxlePointsLeft, 0.005)
                .Edge($"3L{dual}", 0.03 * frontAxlePointsLeft, 0.005).Edge($"3R{dual}", -0.03 * frontAxlePointsLeft, 0.005);
        var wear = GeometryRules.Find(truck).Only(FindingKind.OneEdgeWear);
        Assert.Equal(agrees, wear.Sentence.Contains("rear tyres agree", StringComparison.Ordinal));
        Assert.Equal(agrees, !wear.EvidenceAgainst.Any(e => e.Rests.Contains("survey-2LO")));
    }

    [Fact]
    public void Crown_wears_the_nearside_of_both_steer_tyres_and_is_a_cause_only_on_that_side()
    {
        var nearside = Vehicles.Truck().Edge("1L", -0.04, 0.005).Edge("1R", 0.035, 0.005);
        Assert.Contains(Quantity.Crown, GeometryRules.Find(nearside).Only(FindingKind.OneEdgeWear).Causes);
        var leftTraffic = nearside with { Depot = nearside.Depot with { TrafficSide = TrafficSide.Left } };
        Assert.DoesNotContain(Quantity.Crown, GeometryRules.Find(leftTraffic).Only(FindingKind.OneEdgeWear).Causes);
    }

    [Fact]
    public void A_loop_run_one_way_round_comes_before_the_axles()
    {
        // Turning left the road pushes the tyres left: the right tyre's outboard and the left one's inboard shoulder.
        var bus = Vehicles.Bus().Edge("1L", -0.06).Edge("1R", 0.06);
        bus = bus with { Route = new UsualRoute { VehicleId = "bus-1", Loop = true, LeftTurnShare = 0.8 } };
        var wear = GeometryRules.Find(bus).Only(FindingKind.OneEdgeWear);
        Assert.Equal(Quantity.Duty, wear.Causes[0]);
        Assert.False(wear.AlignmentMends);
    }

    [Fact]
    public void One_wheel_one_shoulder_with_a_clean_mate_is_camber_or_bearing_of_that_wheel()
    {
        var wear = GeometryRules.Find(Vehicles.Van().Edge("1L", 0.12).Edge("1R", 0.005)).Only(FindingKind.OneEdgeWear);
        Assert.Equal(Side.Left, wear.Side);
        Assert.Equal(Quantity.Camber, wear.Causes[0]);
        Assert.Contains(wear.Confounders, c => c.What.Contains("bearing", StringComparison.Ordinal));
    }

    [Fact]
    public void One_steer_tyre_feathered_in_and_its_mate_out_asks_for_turning_angles()
    {
        var feather = GeometryRules.Find(Vehicles.Van().Feather("1L", 0.6).Feather("1R", -0.6)).Only(FindingKind.Feathering);
        Assert.Contains("20 deg", feather.FirstCheck, StringComparison.Ordinal);
        Assert.Contains(Quantity.Thrust, feather.Causes);
    }

    [Fact]
    public void Hand_rubs_alone_find_feathering_once_both_wheels_agree_more_than_once()
    {
        var once = Vehicles.Van().With("1L", t => t with { RubsCatchingOutward = 1 }).With("1R", t => t with { RubsCatchingOutward = 1 });
        Assert.Empty(GeometryRules.Find(once));
        var twice = Vehicles.Van().With("1L", t => t with { RubsCatchingOutward = 2 }).With("1R", t => t with { RubsCatchingOutward = 2 });
        var feather = GeometryRules.Find(twice).Only(FindingKind.Feathering);
        Assert.Contains("inboard", feather.Sentence, StringComparison.Ordinal);
        Assert.Equal(Quantity.FrontTotalToe, feather.Causes[0]);
    }

    [Fact]
    public void Worn_shoulders_on_both_sides_of_the_tread_are_low_pressure_and_no_alignment_matter()
    {
        var wear = GeometryRules.Find(Vehicles.Van().With("1L", t => t with { ShoulderMmPer1000Km = new(0.1, 0.02), PressureShare = new(-0.08, 0.02) })).Only(FindingKind.ShoulderWear);
        Assert.Equal(Quantity.Pressure, wear.Causes[0]);
        Assert.False(wear.AlignmentMends);
        Assert.Contains(wear.EvidenceFor, e => e.Statement.Contains("below its setting", StringComparison.Ordinal));
    }

    [Fact]
    public void A_worn_centre_is_high_pressure_and_no_alignment_matter()
    {
        var wear = GeometryRules.Find(Vehicles.Van().With("2L", t => t with { ShoulderMmPer1000Km = new(-0.1, 0.02) }).With("2R", t => t with { ShoulderMmPer1000Km = new(-0.09, 0.02) })).Only(FindingKind.CentreWear);
        Assert.Null(wear.Side);
        Assert.False(wear.AlignmentMends);
        Assert.Equal([Quantity.Pressure], wear.Causes);
    }

    [Fact]
    public void Cupping_on_one_wheel_asks_for_the_damper_before_toe()
    {
        var cupped = GeometryRules.Find(Vehicles.Van().With("1R", t => t with { RoundVariationMm = new(0.9, 0.1), Seen = [Seen.Cupped] })).Only(FindingKind.Cupping);
        Assert.Equal((Side.Right, Quantity.Damper, false), (cupped.Side, cupped.Causes[0], cupped.AlignmentMends));
        Assert.StartsWith("Damper", cupped.FirstCheck, StringComparison.Ordinal);
    }

    [Fact]
    public void A_flat_spot_is_not_cupping() =>
        Assert.Equal(FindingKind.FlatSpot, Assert.Single(GeometryRules.Find(Vehicles.Van().With("1R", t => t with { RoundVariationMm = new(0.9, 0.1), Seen = [Seen.FlatSpot] }))).Kind);

    [Fact]
    public void Diagonal_wipe_needs_a_free_rolling_rear_tyre_that_slides_and_varies_round()
    {
        static VehicleFigures Wiped(VehicleFigures v) => v.Feather("2L", 0.6).With("2L", t => t with { RoundVariationMm = new(0.9, 0.1) });
        var wipe = GeometryRules.Find(Wiped(Vehicles.FrontDrivenVan())).Only(FindingKind.DiagonalWear);
        Assert.Equal(Quantity.RearTotalToe, wipe.Causes[0]);
        Assert.DoesNotContain(GeometryRules.Find(Wiped(Vehicles.FrontDrivenVan())), f => f.Kind == FindingKind.Cupping);
        Assert.DoesNotContain(GeometryRules.Find(Wiped(Vehicles.Van())), f => f.Kind == FindingKind.DiagonalWear);
    }

    [Fact]
    public void Inner_duals_worn_inboard_on_both_sides_speak_for_the_beam_under_load()
    {
        var wear = GeometryRules.Find(Vehicles.Truck().Edge("2LI", -0.04, 0.005).Edge("2RI", -0.04, 0.005)).Only(FindingKind.OneEdgeWear);
        Assert.Equal((2, Dual.Inner, Quantity.Camber), (wear.Axle, wear.Dual, wear.Causes[0]));
    }

    [Fact]
    public void All_trailer_tyres_worn_toward_one_side_of_the_vehicle_are_a_skewed_trailer_axle_group()
    {
        var trailer = Vehicles.Trailer();
        foreach (var axle in new[] { 1, 2, 3 }) trailer = trailer.Edge($"{axle}L", -0.03, 0.005).Edge($"{axle}R", 0.03, 0.005);
        var findings = GeometryRules.Find(trailer);
        var skew = findings.Only(FindingKind.AxleSkew);
        Assert.Single(findings);
        Assert.Equal(Quantity.TrailerSkew, skew.Causes[0]);
        Assert.Contains("pointing left", skew.Sentence, StringComparison.Ordinal);
        Assert.Contains("kingpin", skew.FirstCheck, StringComparison.Ordinal);
    }

    [Fact]
    public void Trailer_axles_one_and_three_opposed_are_tight_turning_before_spacing()
    {
        var trailer = Vehicles.Trailer().Edge("1L", -0.03, 0.005).Edge("1R", 0.03, 0.005).Edge("3L", 0.03, 0.005).Edge("3R", -0.03, 0.005);
        var skew = GeometryRules.Find(trailer).Only(FindingKind.AxleSkew);
        Assert.Equal([Quantity.Duty, Quantity.TandemSkew], skew.Causes.Take(2));
        Assert.False(skew.AlignmentMends);
    }

    [Fact]
    public void Drive_axles_worn_opposite_ways_do_not_run_parallel()
    {
        var truck = Vehicles.Truck();
        foreach (var dual in new[] { "O", "I" })
            truck = truck.Edge($"2L{dual}", -0.03, 0.005).Edge($"2R{dual}", 0.03, 0.005).Edge($"3L{dual}", 0.03, 0.005).Edge($"3R{dual}", -0.03, 0.005);
        var skew = GeometryRules.Find(truck).Only(FindingKind.AxleSkew);
        Assert.Equal(Quantity.TandemSkew, skew.Causes[0]);
        Assert.Contains("do not run parallel", skew.Sentence, StringComparison.Ordinal);
    }

    [Fact]
    public void A_dual_pair_may_differ_by_four_thirty_seconds_of_an_inch()
    {
        static VehicleFigures Duals(double inner) => Vehicles.Truck()
            .With("2LO", t => t with { RemainingMm = new(10, 0.1) }).With("2LI", t => t with { RemainingMm = new(inner, 0.1) });
        Assert.Empty(GeometryRules.Find(Duals(10 - 3.1)));
        var gap = GeometryRules.Find(Duals(10 - 3.3)).Only(FindingKind.DepthGap);
        Assert.Equal(Side.Left, gap.Side);
        Assert.Contains("inner being shallower", gap.Sentence, StringComparison.Ordinal);
    }
}
