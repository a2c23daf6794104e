using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Rules;

namespace WearWatch.Diagnosis.Tests.Rules;

/// <summary>The truth table of the steering signals: signs after ISO 8855, a vehicle that pulls right is held by a positive torque.</summary>
public class SteeringRuleTests
{
    [Fact]
    public void A_positive_holding_torque_is_a_pull_to_the_right()
    {
        var pull = GeometryRules.Find(Vehicles.Van().Pull(0.82)).Only(FindingKind.SteeringPull);
        Assert.Equal(Side.Right, pull.Side);
        Assert.Equal("The vehicle pulls right: holding it straight on a flat road takes 0.82 N·m (90 % 0.66 to 0.98) to the left at the steering wheel.", pull.Sentence);
        Assert.Equal(["stream-a/3", "stream-a/9"], pull.EvidenceFor[0].Rests);
    }

    [Fact]
    public void Camber_pulls_to_the_side_that_leans_out_more_and_is_named_when_its_tyre_agrees()
    {
        var agreeing = GeometryRules.Find(Vehicles.Van().Pull(0.8).Edge("1R", 0.1).Edge("1L", 0.0)).Only(FindingKind.SteeringPull);
        Assert.Equal(Quantity.CamberSplit, agreeing.Causes[0]);
        Assert.Contains("camber", agreeing.Sentence, StringComparison.Ordinal);
        Assert.True(agreeing.AlignmentMends);

        var opposing = GeometryRules.Find(Vehicles.Van().Pull(0.8).Edge("1L", 0.1).Edge("1R", 0.0)).Only(FindingKind.SteeringPull);
        Assert.DoesNotContain("camber", opposing.Sentence, StringComparison.Ordinal);
        Assert.Contains(opposing.EvidenceAgainst, e => e.Rests.Contains("survey-1L"));
    }

    [Fact]
    public void One_wheel_worn_and_a_pull_to_the_same_side_name_its_camber()
    {
        var wear = GeometryRules.Find(Vehicles.Van().Pull(0.8).Edge("1R", 0.1).Edge("1L", 0.0)).Only(FindingKind.OneEdgeWear);
        Assert.Contains("camber", wear.Sentence, StringComparison.Ordinal);
    }

    [Fact]
    public void A_soft_tyre_on_the_pull_side_comes_before_any_angle()
    {
        var van = Vehicles.Van().Pull(0.8).With("1R", t => t with { PressureShare = new(-0.18, 0.02) }).With("1L", t => t with { PressureShare = new(0, 0.02) });
        var pull = GeometryRules.Find(van).Only(FindingKind.SteeringPull);
        Assert.Equal(Quantity.Pressure, pull.Causes[0]);
        Assert.False(pull.AlignmentMends);
    }

    [Fact]
    public void A_pull_that_flips_under_braking_is_a_dragging_brake_first()
    {
        var van = Vehicles.Van().Pull(0.8);
        van = van with { Steering = van.Signals() with { BrakePullNm = new(-1.0, 0.2) } };
        Assert.Equal(Quantity.Drag, GeometryRules.Find(van).Only(FindingKind.SteeringPull).Causes[0]);
    }

    [Fact]
    public void An_assumed_crown_is_a_cause_only_toward_the_traffic_side()
    {
        var right = Vehicles.Van().Pull(0.8);
        right = right with { Steering = right.Signals() with { RoadShare = RoadShare.UsualCrown } };
        Assert.Contains(Quantity.Crown, GeometryRules.Find(right).Only(FindingKind.SteeringPull).Causes);
        var left = Vehicles.Van().Pull(-0.8);
        left = left with { Steering = left.Signals() with { RoadShare = RoadShare.UsualCrown } };
        Assert.DoesNotContain(Quantity.Crown, GeometryRules.Find(left).Only(FindingKind.SteeringPull).Causes);
    }

    [Fact]
    public void Torque_without_the_assist_is_a_lower_bound_and_says_so()
    {
        var van = Vehicles.Van().Pull(0.8);
        van = van with { Steering = van.Signals() with { TorqueIncludesAssist = false } };
        Assert.Contains("at least 0.80 N·m", GeometryRules.Find(van).Only(FindingKind.SteeringPull).Sentence, StringComparison.Ordinal);
    }

    [Fact]
    public void Drivers_reports_count_while_fresh_and_on_the_side_they_name()
    {
        static DriverReport Report(Symptom symptom, int daysAgo) => new() { VehicleId = "van-1", Symptom = symptom, At = new DateTimeOffset(Vehicles.AsOf.AddDays(-daysAgo), new TimeOnly(8, 0), TimeSpan.Zero) };
        var van = Vehicles.Van().Pull(0.8) with { DriverReports = [Report(Symptom.PullsRight, 10), Report(Symptom.PullsRight, 200), Report(Symptom.PullsLeft, 5)] };
        var pull = GeometryRules.Find(van).Only(FindingKind.SteeringPull);
        Assert.Contains(pull.EvidenceFor, e => e.Rests.SequenceEqual(["report/2026-11-20T08:00:00Z"]));
        Assert.Contains(pull.EvidenceAgainst, e => e.Rests.SequenceEqual(["report/2026-11-25T08:00:00Z"]));
    }

    [Fact]
    public void A_wheel_off_centre_alone_names_no_axle_and_ranks_the_sensor_zero_first()
    {
        var wheel = GeometryRules.Find(Vehicles.Van().OffCentre(4.8)).Only(FindingKind.OffCentreWheel);
        Assert.Equal("Travelling straight on a flat road the steering wheel stands 4.8 deg (90 % 4.3 to 5.3) to the left.", wheel.Sentence);
        Assert.Equal([Quantity.SensorZeroOrFrontToeSplit, Quantity.Thrust], wheel.Causes);
        Assert.False(wheel.AlignmentMends);
    }

    [Fact]
    public void A_wheel_off_centre_toward_where_the_rear_axle_points_is_thrust()
    {
        // Off-centre angle = ratio × thrust: both to the left. An axle pointing left wears left inboard and right outboard.
        var van = Vehicles.Van().OffCentre(4.8).Edge("2L", -0.08).Edge("2R", 0.08);
        var findings = GeometryRules.Find(van);
        var wheel = findings.Only(FindingKind.OffCentreWheel);
        Assert.Equal(Quantity.Thrust, wheel.Causes[0]);
        Assert.Contains("rear axle pointing left", wheel.Sentence, StringComparison.Ordinal);
        Assert.Contains(findings.Only(FindingKind.AxleSkew).EvidenceFor, e => e.Rests.Contains("stream-a/3"));
        var opposed = GeometryRules.Find(van.OffCentre(-4.8)).Only(FindingKind.OffCentreWheel);
        Assert.Equal(Quantity.SensorZeroOrFrontToeSplit, opposed.Causes[0]);
        Assert.NotEmpty(opposed.EvidenceAgainst);
    }
}
