using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Steering;
using WearWatch.Diagnosis.Tests.Rules;

namespace WearWatch.Diagnosis.Tests.Steering;

/// <summary>From samples through the road model to the findings, for logs that cannot tell: each says why and what would help, and none accuses.</summary>
public class CannotTellTests
{
    private static (VehicleSteeringStudy Study, SteeringFigures? Figures, IReadOnlyList<Finding> Findings) Whole(IReadOnlyList<(long, SteeringColumns)> chunks)
    {
        var vehicle = Vehicles.Van();
        var id = vehicle.Vehicle.VehicleId;
        var (runs, study) = RunReduction.ReduceStream(id, "trip", chunks, new(3.6, 16));
        var kind = runs.Any(r => r.TorqueNm is not null) ? TorqueKind.Total : TorqueKind.None;
        var figures = RoadModel.Fit(runs, [new(id, VehicleClass.Van, TrafficSide.Right, kind)]).Of(id);
        return (study, figures, [.. GeometryRules.Find(vehicle with { Steering = figures })]);
    }

    private static void NoPullVerdict((VehicleSteeringStudy Study, SteeringFigures? Figures, IReadOnlyList<Finding> Findings) told)
    {
        Assert.Null(told.Figures?.SteeringPullNm);
        Assert.DoesNotContain(told.Findings, f => f.Kind == FindingKind.SteeringPull);
        Assert.All(told.Study.NotPossible, n => Assert.Contains("would help", n));
    }

    [Fact]
    public void A_log_without_any_straight_run()
    {
        var drive = new Drive { Torque = 3 }.Stand(10);
        for (var k = 0; k < 20; k++) drive.Turn(15, k % 2 == 0 ? 9 : -9).Straight(4, 40);
        var told = Whole(drive.Chunks());
        NoPullVerdict(told);
        Assert.Null(told.Figures?.OffCentreDeg);
        Assert.Contains(told.Study.NotPossible, n => n.StartsWith("straight running: no steady straight stretch", StringComparison.Ordinal) && n.Contains("a faster route"));
    }

    [Fact]
    public void A_log_with_lane_keeping_nearly_throughout()
    {
        var told = Whole(new Drive { Torque = 3 }.Stand(10).Straight(600, lane: true).Straight(4).Chunks());
        NoPullVerdict(told);
        Assert.InRange(told.Study.SecondsLaneKeeping, 590, 600);
        Assert.Contains(told.Study.NotPossible, n => n.StartsWith("straight running: lane keeping", StringComparison.Ordinal) && n.Contains("driving with it off"));
    }

    [Fact]
    public void A_log_at_1_Hz_without_steering()
    {
        var told = Whole(new Drive(1).Stand(20).Straight(600).Chunks(60, TorqueUnit.NewtonMetre, SteeringChannel.DriverTorque, SteeringChannel.AssistTorque, SteeringChannel.SteeringWheelAngle));
        NoPullVerdict(told);
        Assert.Null(told.Figures?.OffCentreDeg);
        Assert.Contains(told.Study.NotPossible, n => n.StartsWith("steering pull: no driver torque", StringComparison.Ordinal) && n.Contains("torque channel in N·m"));
        Assert.Contains(told.Study.NotPossible, n => n.StartsWith("off-centre angle: no steering-wheel angle", StringComparison.Ordinal));
    }

    [Fact]
    public void A_stationary_log()
    {
        var told = Whole(new Drive { Torque = 3 }.Stand(900).Chunks());
        NoPullVerdict(told);
        Assert.Null(told.Figures?.OffCentreDeg);
        Assert.Contains(told.Study.NotPossible, n => n == "straight running: the vehicle stood all the time; a log of driving would help");
    }

    [Fact]
    public void A_log_of_whole_degrees_and_newton_metres()
    {
        var chunks = new Drive { Torque = 1.3, Assist = 1.2 }.Stand(20).Straight(900).Chunks().Select(c => (c.Item1, new SteeringColumns(c.Item2.Start, c.Item2.RateHz, c.Item2.Columns.Select(k =>
            k.Channel is SteeringChannel.DriverTorque or SteeringChannel.AssistTorque or SteeringChannel.SteeringWheelAngle ? SteeringColumn.Of(k.Channel, [.. k.Values!.Select(x => MathF.Round(x))], 1) : k)))).ToList();
        var told = Whole(chunks);
        NoPullVerdict(told);
        Assert.Contains(told.Study.NotPossible, n => n.StartsWith("steering pull: torque comes in steps of 1 N·m", StringComparison.Ordinal) && n.Contains("0.1 N·m or finer"));
        Assert.Contains(told.Study.NotPossible, n => n.StartsWith("off-centre angle: angle comes in steps of 1 deg", StringComparison.Ordinal));
    }
}
