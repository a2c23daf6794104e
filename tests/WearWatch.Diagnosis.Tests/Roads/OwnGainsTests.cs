using WearWatch.Diagnosis.Roads;

namespace WearWatch.Diagnosis.Tests.Roads;

public class OwnGainsTests
{
    private static readonly RoadFleet World = new RoadFleet(31) { Vehicles = 30, Cells = 60, Trips = 12, GainSd = 0.3 }.Drive();
    private static readonly RoadFit Fit = RoadModel.Fit(World.Runs, World.Fleet);

    [Fact]
    public void A_vehicle_that_answers_the_bank_more_than_its_class_is_told_so()
    {
        var own = Fit.Vehicles.Select(v => (Found: v.OffCentrePerSineDeg!.Value, True: World.Gains[v.VehicleId].Angle)).ToArray();
        var rms = Math.Sqrt(own.Average(x => Math.Pow(x.Found.Value - x.True, 2)));
        Assert.True(rms < Math.Sqrt(own.Average(x => Math.Pow(Fit.Gains[0].AngleDegPerSine!.Value.Value - x.True, 2))), $"{rms}");
        Assert.InRange(own.Count(x => x.Found.Low <= x.True && x.True <= x.Found.High) / 30.0, 0.75, 1);
    }

    [Fact]
    public void Intervals_hold_the_truth_though_the_gains_differ()
    {
        Assert.InRange(Fit.Vehicles.Count(v => Math.Abs(v.OffCentreDeg!.Value.Value - World.Truth[v.VehicleId].OffCentre) <= 1.645 * v.OffCentreDeg.Value.StandardError) / 30.0, 0.8, 1);
        Assert.InRange(Fit.Vehicles.Count(v => Math.Abs(v.SteeringPullNm!.Value.Value - World.Truth[v.VehicleId].Pull) <= 1.645 * v.SteeringPullNm.Value.StandardError) / 30.0, 0.8, 1);
    }

    [Fact]
    public void A_vehicle_alone_on_its_roads_cannot_tell_its_gain_from_its_own_angle()
    {
        var fleet = new RoadFleet(32) { Vehicles = 6, Apart = true, Acceleration = false, GainSd = 0.3 }.Drive();
        foreach (var v in RoadModel.Fit(fleet.Runs, fleet.Fleet).Vehicles)
            Assert.True(v.OffCentrePerSineDeg!.Value.StandardError > 2.5, $"{v.OffCentrePerSineDeg}"); // of about 18: nothing of its own
    }

    [Fact]
    public void Two_times_of_one_vehicle_share_its_gain()
    {
        var (runs, early) = (World.Runs.Select(r => r.VehicleId == "v03" && r.Start.Day < 8 ? r with { VehicleId = "v03 before" } : r).ToList(), World.Fleet.First(v => v.VehicleId == "v03"));
        var fit = RoadModel.Fit(runs, [.. World.Fleet, early with { VehicleId = "v03 before", SameAs = "v03" }]);
        Assert.Equal(fit.Of("v03")!.OffCentrePerSineDeg, fit.Of("v03 before")!.OffCentrePerSineDeg);
        var apart = RoadModel.Fit(runs, [.. World.Fleet, early with { VehicleId = "v03 before" }]);
        Assert.True(fit.Of("v03")!.OffCentrePerSineDeg!.Value.StandardError < apart.Of("v03")!.OffCentrePerSineDeg!.Value.StandardError);
    }
}
