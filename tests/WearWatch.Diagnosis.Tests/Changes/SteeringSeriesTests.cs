using WearWatch.Diagnosis.Changes;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Steering;
using WearWatch.Diagnosis.Tests.Roads;
using WearWatch.Diagnosis.Tests.Wear;

namespace WearWatch.Diagnosis.Tests.Changes;

public class SteeringSeriesTests
{
    private const int StepTrip = 12;

    /// <summary>One vehicle of the fleet steps from its thirteenth trip on, by torque and by angle.</summary>
    private static (RoadFit Fit, RoadFleet Fleet, List<StraightRun> Runs) Stepped(double hand, double torqueNm, double deg)
    {
        var fleet = new RoadFleet(7) { Vehicles = 8, Trips = 24, RunsPerTrip = 8, Hand = hand }.Drive();
        var at = fleet.Runs.Min(r => r.Start).AddDays(StepTrip - 0.5);
        var runs = fleet.Runs.Select(r => r.VehicleId != "v03" || r.Start < at ? r : r with
        {
            TorqueNm = r.TorqueNm is { } t ? t with { Value = t.Value + hand * torqueNm } : null,
            AngleDeg = r.AngleDeg is { } a ? a with { Value = a.Value + hand * deg } : null,
        }).ToList();
        return (RoadModel.Fit(runs, fleet.Fleet), fleet, runs);
    }

    [Theory]
    [InlineData(1)]
    [InlineData(-1)]
    public void A_step_stands_out_once_the_roads_share_is_off_on_either_traffic_side(double hand)
    {
        var (fit, fleet, runs) = Stepped(hand, 0.9, 4);
        var series = new SteeringSeries(fit);
        foreach (var vehicle in fleet.Fleet)
        {
            var changes = series.Read(vehicle, [.. runs.Where(r => r.VehicleId == vehicle.VehicleId)], []).Changes;
            if (vehicle.VehicleId != "v03")
            {
                Assert.Empty(changes);
                continue;
            }
            Assert.Equal([ChangeQuantity.SteeringPull, ChangeQuantity.OffCentreAngle], changes.Select(c => c.Quantity).Order());
            var first = runs.Min(r => r.Start);
            Assert.All(changes, c => Assert.InRange(c.Likely, first.AddDays(StepTrip - 1), first.AddDays(StepTrip + 0.1)));
            Assert.Equal(hand * 0.9, changes.Single(c => c.Quantity == ChangeQuantity.SteeringPull).Size.Value, 0.25);
            Assert.Equal(hand * 4, changes.Single(c => c.Quantity == ChangeQuantity.OffCentreAngle).Size.Value, 0.6);
        }
    }

    [Fact]
    public void Runs_after_a_fit_raise_the_step_on_its_roads()
    {
        var (_, fleet, runs) = Stepped(1, 0.9, 6);
        var at = runs.Min(r => r.Start).AddDays(StepTrip - 0.5);
        var fit = RoadModel.Fit([.. runs.Where(r => r.Start < at)], fleet.Fleet);
        var series = new SteeringSeries(fit);
        var vehicle = fleet.Fleet.Single(v => v.VehicleId == "v03");
        var then = series.Read(vehicle, [.. runs.Where(r => r.VehicleId == "v03" && r.Start < at)], []);
        var raised = series.Watch(vehicle, then, [.. runs.Where(r => r.VehicleId == "v03" && r.Start >= at)], [], 600);
        Assert.Contains(raised, c => c.Quantity == ChangeQuantity.OffCentreAngle && c.Provisional && Math.Abs(c.Size.Value - 6) < 1.2);
        var quiet = fleet.Fleet.Single(v => v.VehicleId == "v05");
        Assert.Empty(series.Watch(quiet, series.Read(quiet, [.. runs.Where(r => r.VehicleId == "v05" && r.Start < at)], []), [.. runs.Where(r => r.VehicleId == "v05" && r.Start >= at)], [], 600));
    }

    [Fact]
    public void A_vehicle_without_usable_torque_is_judged_on_its_angle_alone()
    {
        var (fit, fleet, runs) = Stepped(1, 0.9, 4);
        var series = new SteeringSeries(fit).Of(fleet.Fleet[0] with { Torque = TorqueKind.UnknownUnit }, [.. runs.Where(r => r.VehicleId == fleet.Fleet[0].VehicleId)], []);
        Assert.Equal(ChangeQuantity.OffCentreAngle, Assert.Single(series).Quantity);
    }

    [Fact]
    public void A_fleet_whose_wear_goes_on_as_it_was_shows_hardly_a_change_of_wear()
    {
        var fleet = new SmallFleet(3) { Surveys = 12, WeeksBetween = 4 }.Make(40);
        var wear = Diagnosis.Wear.FleetWear.Fit([.. fleet.Select(v => v.Tread)], SmallFleet.AsOf);
        var changes = fleet.SelectMany(v => WearSeries.Of(v.Tread, wear, SmallFleet.AsOf, [])).SelectMany(ChangeDating.Find).ToList();
        Assert.InRange(changes.Count / (fleet.Count * 44 / 52.0), 0, 0.1);
    }
}
