using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Roads;

public class PresentLevelsTests
{
    private static RoadFit With(Func<int, double> angleOfTrip, string vehicle = "v02")
    {
        var fleet = new RoadFleet(41) { Vehicles = 20, Cells = 40, Trips = 12 }.Drive();
        StraightRun Moved(StraightRun r) => r.VehicleId != vehicle ? r
            : r with { AngleDeg = new Estimate(r.AngleDeg!.Value.Value + angleOfTrip(int.Parse(r.StreamId[(r.StreamId.IndexOf('-') + 1)..], System.Globalization.CultureInfo.InvariantCulture)), r.AngleDeg.Value.StandardError) };
        return RoadModel.Fit(fleet.Runs.Select(Moved).ToList(), fleet.Fleet);
    }

    private static readonly RoadFit Still = With(_ => 0);

    [Fact]
    public void A_step_half_way_is_followed_to_where_the_wheel_stands_now()
    {
        var (now, still) = (With(trip => trip < 6 ? 0 : 6).Of("v02")!, Still.Of("v02")!);
        Assert.Equal(still.OffCentreLatestDeg!.Value.Value + 6, now.OffCentreLatestDeg!.Value.Value, 0.7);
        Assert.True(now.OffCentreDeg!.Value.Value < still.OffCentreDeg!.Value.Value + 5); // the mean lies between
    }

    [Fact]
    public void A_vehicle_that_does_not_wander_stands_where_its_mean_is()
    {
        foreach (var v in Still.Vehicles)
        {
            Assert.True(Math.Abs(v.OffCentreLatestDeg!.Value.Value - v.OffCentreDeg!.Value.Value) < 3 * v.OffCentreLatestDeg.Value.StandardError);
            Assert.True(v.OffCentreLatestDeg.Value.StandardError >= v.OffCentreDeg.Value.StandardError);
            Assert.True(v.SteeringPullLatestNm!.Value.StandardError >= v.SteeringPullNm!.Value.StandardError);
        }
    }

    [Fact]
    public void The_mirrored_fleet_stands_at_the_mirrored_level()
    {
        var mirrored = new RoadFleet(41) { Vehicles = 20, Cells = 40, Trips = 12, Hand = -1 }.Drive();
        foreach (var (m, v) in RoadModel.Fit(mirrored.Runs, mirrored.Fleet).Vehicles.Zip(Still.Vehicles))
            Assert.Equal(-v.OffCentreLatestDeg!.Value.Value, m.OffCentreLatestDeg!.Value.Value, 1e-3);
    }
}
