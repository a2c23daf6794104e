using System.Text.Json;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Roads;

public class RoadModelTests
{
    private static RoadFit Fit(RoadFleet fleet) => RoadModel.Fit(fleet.Runs, fleet.Fleet);

    private static (double Pull, double OffCentre, double Width) Coverage(Func<int, RoadFleet> fleet, int seeds)
    {
        var (pulls, angles, all, width) = (0, 0, 0, new List<double>());
        for (var seed = 1; seed <= seeds; seed++)
        {
            var f = fleet(seed);
            foreach (var v in Fit(f).Vehicles)
            {
                all++;
                var (pull, off) = (v.SteeringPullNm!.Value, v.OffCentreDeg!.Value);
                if (pull.Low <= f.Truth[v.VehicleId].Pull && f.Truth[v.VehicleId].Pull <= pull.High) pulls++;
                if (off.Low <= f.Truth[v.VehicleId].OffCentre && f.Truth[v.VehicleId].OffCentre <= off.High) angles++;
                width.Add(pull.High - pull.Low);
            }
        }
        return ((double)pulls / all, (double)angles / all, width.Order().ElementAt(all / 2));
    }

    [Fact]
    public void Pull_and_angle_on_shared_crowned_cells_lie_in_their_ninety_percent_intervals()
    {
        var (pull, angle, width) = Coverage(seed => new RoadFleet(seed).Drive(), 40);
        Assert.InRange(pull, 0.80, 0.98);
        Assert.InRange(angle, 0.80, 0.98);
        Assert.True(width < 1.0, $"median width {width} N·m");
    }

    [Fact]
    public void A_lone_vehicle_s_interval_holds_the_crown_it_cannot_see()
    {
        var (pull, _, width) = Coverage(seed => new RoadFleet(seed) { Vehicles = 1, Position = false, Acceleration = false }.Drive(), 60);
        Assert.InRange(pull, 0.80, 1.0);
        Assert.True(width > 2 * 1.645 * 55 * RoadPriors.NetworkError, $"median width {width} N·m is narrower than the crown allows");
    }

    [Fact]
    public void Vehicles_on_roads_of_their_own_stay_honest()
    {
        var (pull, _, _) = Coverage(seed => new RoadFleet(seed) { Apart = true, Vehicles = 8 }.Drive(), 30);
        Assert.InRange(pull, 0.80, 1.0);
    }

    [Fact]
    public void Road_share_says_how_the_road_was_removed()
    {
        Assert.All(Fit(new RoadFleet(1).Drive()).Vehicles, v => Assert.Equal(RoadShare.SharedCells, v.RoadShare));
        Assert.All(Fit(new RoadFleet(1) { Apart = true }.Drive()).Vehicles, v => Assert.Equal(RoadShare.OwnBankReading, v.RoadShare));
        Assert.All(Fit(new RoadFleet(1) { Position = false }.Drive()).Vehicles, v => Assert.Equal(RoadShare.OwnBankReading, v.RoadShare));
        Assert.All(Fit(new RoadFleet(1) { Position = false, Acceleration = false }.Drive()).Vehicles, v => Assert.Equal(RoadShare.UsualCrown, v.RoadShare));
        Assert.Equal(12, Fit(new RoadFleet(1) { Apart = true }.Drive()).Components);
        Assert.Equal(1, Fit(new RoadFleet(1).Drive()).Components);
    }

    [Fact]
    public void Shared_cells_narrow_the_interval_over_the_usual_crown()
    {
        double Error(RoadFleet f) => Fit(f.Drive()).Vehicles.Average(v => v.SteeringPullNm!.Value.StandardError);
        Assert.True(Error(new(5)) < 0.6 * Error(new(5) { Position = false, Acceleration = false }));
    }

    [Fact]
    public void Mirroring_the_world_mirrors_every_figure()
    {
        var (left, right) = (Fit(new RoadFleet(3).Drive()), Fit(new RoadFleet(3) { Hand = -1 }.Drive()));
        foreach (var (a, b) in left.Vehicles.Zip(right.Vehicles))
        {
            Assert.Equal(a.SteeringPullNm!.Value.Value, -b.SteeringPullNm!.Value.Value, 1e-7);
            Assert.Equal(a.OffCentreDeg!.Value.Value, -b.OffCentreDeg!.Value.Value, 1e-6);
            Assert.Equal(a.SteeringPullNm.Value.StandardError, b.SteeringPullNm.Value.StandardError, 1e-7);
        }
        Assert.Equal(left.Crowns[0].Bank.Value, -right.Crowns[0].Bank.Value, 1e-9);
        foreach (var (a, b) in left.Cells.Zip(right.Cells)) Assert.Equal(a.Bank.Value, -b.Bank.Value, 1e-9);
    }

    [Fact]
    public void Order_of_arrival_leaves_no_trace()
    {
        var fleet = new RoadFleet(4).Drive();
        var random = new Random(9);
        var shuffled = RoadModel.Fit(fleet.Runs.OrderBy(_ => random.Next()).ToList(), fleet.Fleet.OrderBy(_ => random.Next()).ToList());
        Assert.Equal(JsonSerializer.Serialize(Fit(fleet)), JsonSerializer.Serialize(shuffled));
    }

    [Fact]
    public void The_fit_settles_and_survives_json()
    {
        var fit = Fit(new RoadFleet(2).Drive());
        Assert.True(fit.Converged, $"{fit.Iterations} iterations");
        var text = JsonSerializer.Serialize(fit);
        Assert.Equal(text, JsonSerializer.Serialize(JsonSerializer.Deserialize<RoadFit>(text)));
    }

    [Fact]
    public void Gains_and_banks_come_out_near_the_truth()
    {
        var fit = Fit(new RoadFleet(6) { Vehicles = 20 }.Drive());
        Assert.InRange(fit.Gains[0].TorqueNmPerSine!.Value.Value, 45, 65); // truth 55
        Assert.InRange(fit.Gains[0].AngleDegPerSine!.Value.Value, 8, 28);  // truth 18
        Assert.InRange(fit.Crowns[0].Bank.Value, 0.005, 0.035);
    }

    [Theory]
    [InlineData(TorqueKind.UnknownUnit)]
    [InlineData(TorqueKind.None)]
    public void Torque_of_unknown_unit_never_gives_a_pull(TorqueKind kind)
    {
        var fleet = new RoadFleet(1).Drive();
        var fit = RoadModel.Fit(fleet.Runs, fleet.Fleet.Select((v, i) => i == 3 ? v with { Torque = kind } : v).ToList());
        Assert.Null(fit.Vehicles[3].SteeringPullNm);
        Assert.Null(fit.Vehicles[3].BrakePullNm);
        Assert.NotNull(fit.Vehicles[3].OffCentreDeg);
        Assert.Contains(fit.Vehicles[3].NotPossible, n => n.StartsWith("steering pull"));
        Assert.NotNull(fit.Vehicles[4].SteeringPullNm);
    }

    [Fact]
    public void A_gust_in_one_run_and_a_gross_error_in_another_barely_move_the_pull()
    {
        var fleet = new RoadFleet(1).Drive();
        var clean = Fit(fleet).Vehicles[0].SteeringPullNm!.Value;
        fleet.Runs[0] = fleet.Runs[0] with { TorqueNm = new Estimate(40, 0.05) };
        fleet.Runs[20] = fleet.Runs[20] with { TorqueNm = new Estimate(9, 0.05) };
        Assert.Equal(clean.Value, Fit(fleet).Vehicles[0].SteeringPullNm!.Value.Value, 2 * clean.StandardError);
    }

    [Fact]
    public void A_far_off_vehicle_is_not_drawn_to_its_class()
    {
        var fleet = new RoadFleet(1).Drive();
        for (var i = 0; i < fleet.Runs.Count; i++)
            if (fleet.Runs[i].VehicleId == "v05") fleet.Runs[i] = fleet.Runs[i] with { TorqueNm = fleet.Runs[i].TorqueNm!.Value + new Estimate(3, 0) };
        var pull = Fit(fleet).Of("v05")!.SteeringPullNm!.Value;
        Assert.InRange(fleet.Truth["v05"].Pull + 3, pull.Low - pull.StandardError, pull.High + pull.StandardError);
    }

    [Fact]
    public void A_vehicle_found_in_order_anchors_the_zero()
    {
        var fleet = new RoadFleet(8).Drive();
        var at = fleet.Fleet[2].VehicleId;
        var free = RoadModel.Fit(fleet.Runs, fleet.Fleet).Of(at)!.SteeringPullNm!.Value;
        // All pulls moved up by one: only a vehicle known to be straight can show that.
        var moved = fleet.Runs.Select(r => r with { TorqueNm = r.TorqueNm!.Value + new Estimate(1 - fleet.Truth[at].Pull, 0) }).ToList();
        var anchored = RoadModel.Fit(moved.Select(r => r.VehicleId == at ? r with { TorqueNm = r.TorqueNm!.Value - new Estimate(1, 0) } : r).ToList(),
            fleet.Fleet.Select(v => v.VehicleId == at ? v with { FoundInOrder = true } : v).ToList());
        var others = anchored.Vehicles.Where(v => v.VehicleId != at).ToArray();
        Assert.True(Math.Abs(others.Average(v => v.SteeringPullNm!.Value.Value - fleet.Truth[v.VehicleId].Pull + fleet.Truth[at].Pull) - 1) < 0.35);
        Assert.True(free.StandardError > 0);
    }

    [Fact]
    public void Pull_under_braking_is_the_torque_beyond_steady_running()
    {
        var fleet = new RoadFleet(1).Drive();
        var braked = fleet.Runs.Where(r => r.VehicleId == "v01").Select(r => r with { Mode = RunMode.Brake, Start = r.Start.AddHours(1), TorqueNm = r.TorqueNm!.Value + new Estimate(0.7, 0) });
        var fit = RoadModel.Fit([.. fleet.Runs, .. braked], fleet.Fleet).Of("v01")!;
        Assert.Equal(0.7, fit.BrakePullNm!.Value.Value, 0.05);
        Assert.Null(Fit(fleet).Of("v01")!.BrakePullNm);
    }

    [Fact]
    public void Evidence_names_runs_of_the_vehicle_itself()
    {
        var fit = Fit(new RoadFleet(1).Drive());
        Assert.All(fit.Vehicles, v => Assert.True(v.EvidenceRuns.Count > 0 && v.EvidenceRuns.All(e => e.StartsWith(v.VehicleId))));
    }

    [Fact]
    public void A_fleet_without_runs_gets_a_truthful_cannot_tell()
    {
        var fit = RoadModel.Fit([], [new("idle", VehicleClass.Bus, TrafficSide.Left, TorqueKind.Total)]);
        Assert.Null(fit.Vehicles[0].SteeringPullNm);
        Assert.Contains("no straight run", Assert.Single(fit.Vehicles[0].NotPossible));
    }
}
