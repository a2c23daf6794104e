using System.Text.Json;
using CsCheck;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Roads;

public class RoadUpdateTests
{
    private static readonly RoadFleet World = new RoadFleet(21) { Vehicles = 30, Cells = 60, Trips = 9 }.Drive();

    private static bool LastTrip(StraightRun r) => r.StreamId.EndsWith("-8", StringComparison.Ordinal);
    private static bool Touched(string vehicleId) => string.CompareOrdinal(vehicleId, "v10") < 0;

    private static readonly RoadFit Earlier = RoadModel.Fit(World.Runs.Where(r => !LastTrip(r)).ToList(), World.Fleet);
    private static readonly RoadFit Full = RoadModel.Fit(World.Runs.Where(r => !LastTrip(r) || Touched(r.VehicleId)).ToList(), World.Fleet);
    private static readonly RoadFit Updated = RoadModel.Update(Earlier, RoadRuns.Of(World.Runs.Where(r => LastTrip(r) && Touched(r.VehicleId)).ToList()), World.Fleet);

    [Fact]
    public void An_update_says_that_it_is_provisional_and_a_full_fit_that_it_is_not()
    {
        Assert.True(Updated.Provisional);
        Assert.False(Earlier.Provisional);
        Assert.True(JsonSerializer.Deserialize<RoadFit>(JsonSerializer.Serialize(Updated))!.Provisional);
    }

    [Fact]
    public void An_update_agrees_with_the_full_fit_within_its_standard_errors()
    {
        foreach (var (now, full) in Updated.Vehicles.Zip(Full.Vehicles))
        {
            Assert.Equal(full.VehicleId, now.VehicleId);
            Assert.Equal(full.SteeringPullNm!.Value.Value, now.SteeringPullNm!.Value.Value, full.SteeringPullNm.Value.StandardError / 2);
            Assert.Equal(full.OffCentreDeg!.Value.Value, now.OffCentreDeg!.Value.Value, full.OffCentreDeg.Value.StandardError / 2);
            Assert.InRange(now.SteeringPullNm.Value.StandardError / full.SteeringPullNm.Value.StandardError, 0.8, 1.25);
            Assert.InRange(now.OffCentreDeg.Value.StandardError / full.OffCentreDeg.Value.StandardError, 0.8, 1.25);
            Assert.Equal(full.Runs, now.Runs);
        }
        foreach (var (now, full) in Updated.Cells.Zip(Full.Cells))
        {
            Assert.Equal(full.Cell, now.Cell);
            Assert.Equal(full.Runs, now.Runs);
            Assert.Equal(full.Bank.Value, now.Bank.Value, full.Bank.StandardError);
        }
    }

    [Fact]
    public void An_update_is_nearer_to_the_full_fit_than_the_earlier_one_was()
    {
        double Away(RoadFit fit) => fit.Vehicles.Zip(Full.Vehicles).Where(x => Touched(x.First.VehicleId))
            .Sum(x => Math.Pow((x.First.OffCentreDeg!.Value.Value - x.Second.OffCentreDeg!.Value.Value) / x.Second.OffCentreDeg.Value.StandardError, 2));
        // The full fit also learns more of each vehicle's own gain, which an update leaves as it was.
        Assert.True(Away(Updated) < Away(Earlier), $"{Away(Updated)} against {Away(Earlier)}");
    }

    [Fact]
    public void Vehicles_without_new_runs_stand_as_they_were()
    {
        foreach (var (now, before) in Updated.Vehicles.Zip(Earlier.Vehicles).Where(x => !Touched(x.First.VehicleId))) Assert.Same(before, now);
        Assert.Equal(JsonSerializer.Serialize(Earlier.Gains), JsonSerializer.Serialize(Updated.Gains));
    }

    [Fact]
    public void A_vehicle_new_to_the_fleet_is_fitted_on_the_roads_already_known()
    {
        var known = World.Fleet.Where(v => v.VehicleId != "v03").ToList();
        var earlier = RoadModel.Fit(World.Runs.Where(r => r.VehicleId != "v03").ToList(), known);
        Assert.Null(earlier.Of("v03"));
        var pull = RoadModel.Update(earlier, RoadRuns.Of(World.Runs.Where(r => r.VehicleId == "v03").ToList()), World.Fleet).Of("v03")!.SteeringPullNm!.Value;
        Assert.Equal(Full.Of("v03")!.SteeringPullNm!.Value.Value, pull.Value, 1.5 * pull.StandardError);
    }

    [Fact]
    public void A_day_without_runs_changes_nothing_but_the_mark()
    {
        var same = RoadModel.Update(Earlier, new RoadRuns(), World.Fleet);
        Assert.Equal(JsonSerializer.Serialize(Earlier.Vehicles), JsonSerializer.Serialize(same.Vehicles));
        Assert.Equal(JsonSerializer.Serialize(Earlier.Cells), JsonSerializer.Serialize(same.Cells));
        Assert.True(same.Provisional);
    }

    /// <summary>Any fleet: runs without position or without a witness, driven and braked ones, the same run twice, two traffic sides.</summary>
    [Fact]
    public void Any_runs_in_any_order_give_the_same_fit_to_the_last_bit() => Gen.Select(Gen.Int[1, 1000], Gen.Int[2, 8], Gen.Int[3, 20], Gen.Int).Sample((seed, vehicles, cells, order) =>
    {
        var fleet = new RoadFleet(seed) { Vehicles = vehicles, Cells = cells, Trips = 3, RunsPerTrip = 5 }.Drive();
        var random = new Random(seed);
        var runs = fleet.Runs.Select(r => random.Next(8) switch
        {
            0 => r with { RoadCell = null },
            1 => r with { TorqueNm = null },
            2 => r with { BankReading = null, RoadCell = null },
            3 => r with { AngleDeg = new Estimate(double.NaN, 0.1) },
            4 => r with { Mode = RunMode.Drive },
            5 => r with { Mode = RunMode.Brake, TorqueIncludesAssist = false },
            _ => r,
        }).ToList();
        runs.AddRange(runs.Take(5).ToList());
        var vehiclesOf = fleet.Fleet.Select((v, i) => v with { TrafficSide = (TrafficSide)(i % 2), Class = i % 3 == 0 ? VehicleClass.Bus : VehicleClass.Van }).ToList();
        var shuffle = new Random(order);
        var shuffled = RoadModel.Fit(runs.OrderBy(_ => shuffle.Next()).ToList(), vehiclesOf.OrderBy(_ => shuffle.Next()).ToList());
        Assert.Equal(JsonSerializer.Serialize(RoadModel.Fit(runs, vehiclesOf)), JsonSerializer.Serialize(shuffled));
    }, iter: 30);

    [Fact]
    public void A_fleet_cut_into_several_parts_gives_the_same_bits_in_any_order()
    {
        var fleet = new RoadFleet(2) { Vehicles = 300, Cells = 900, Trips = 8, RunsPerTrip = 20 }.Drive(); // 48 000 runs
        var random = new Random(3);
        var a = RoadModel.Fit(RoadRuns.Of(fleet.Runs), fleet.Fleet);
        var b = RoadModel.Fit(RoadRuns.Of(fleet.Runs.OrderBy(_ => random.Next()).ToList()), fleet.Fleet);
        Assert.True(a.Converged);
        Assert.Equal(JsonSerializer.Serialize(a), JsonSerializer.Serialize(b));
    }
}
