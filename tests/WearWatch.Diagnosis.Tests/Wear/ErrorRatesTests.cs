using System.Text.Json;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;
using WearWatch.Diagnosis.Wear;
using Xunit.Abstractions;

namespace WearWatch.Diagnosis.Tests.Wear;

public class ErrorRatesTests(ITestOutputHelper output)
{
    private static readonly ErrorRates s_memory = new();

    private static (string Name, double Seen, double Memory)[] Beside(ErrorRates rates) =>
        [.. typeof(ErrorRates).GetProperties().Where(p => p.PropertyType == typeof(double)).Select(p => (p.Name, (double)p.GetValue(rates)!, (double)p.GetValue(s_memory)!))];

    /// <summary>Sound vehicles whose left tyres stand clearly deeper than the right ones and those of axle 2 than those of axle 1, so that an exchange shows.</summary>
    private static VehicleTread[] Uneven(int vehicles) =>
    [
        .. new SmallFleet(207) { FaultyShare = 0, StartsRecorded = false }.Make(vehicles).Select(v => Enumerable.Range(0, v.Tread.Surveys.Count).Aggregate(v.Tread, (tread, s) =>
            SmallFleet.Change(tread, s, t => t with { Depths = [.. t.Depths.Select(d => d with { DepthMm = d.DepthMm + (t.Position.Side == Side.Left ? 2 : 0) + (t.Position.Axle == 2 ? 1 : 0) })] }))),
    ];

    /// <summary>Of all surveys after the first, in turn over the fleet, every so manyth written the wrong way round.</summary>
    private static VehicleTread[] Swapped(VehicleTread[] fleet, int every)
    {
        var n = 0;
        return [.. fleet.Select(v => Enumerable.Range(1, v.Surveys.Count - 1).Aggregate(v, (tread, s) => ++n % every == 0 ? SmallFleet.SwapSides(tread, s) : tread))];
    }

    [Fact]
    public void Without_surveys_the_rates_are_those_from_memory()
    {
        Assert.Equal(s_memory, FleetWear.Fit([], SmallFleet.AsOf).Errors);
        var once = new SmallFleet(201) { Surveys = 1 }.Make(20).Select(v => v.Tread).ToArray();
        Assert.Equal(s_memory, FleetWear.Fit(once, SmallFleet.AsOf).Errors);
    }

    [Fact]
    public void A_snapshot_of_before_has_the_rates_from_memory() =>
        Assert.Equal(s_memory, JsonSerializer.Deserialize<FleetWear>("""{"AsOf":"2026-12-01"}""")!.Errors);

    [Fact]
    public void One_survey_in_ten_swapped_raises_that_rate_and_no_other()
    {
        var rates = FleetWear.Fit(Swapped(Uneven(60), 10), SmallFleet.AsOf).Errors;
        foreach (var (name, seen, memory) in Beside(rates)) output.WriteLine($"{name} {seen:0.00000} from memory {memory}");
        Assert.True(rates.SidesSwapped > 3 * s_memory.SidesSwapped, $"{rates.SidesSwapped}");
        foreach (var (name, seen, memory) in Beside(rates).Where(r => r.Name != nameof(ErrorRates.SidesSwapped)))
            Assert.True(seen <= memory * 1.05, $"{name} {seen} from memory {memory}");
    }

    [Fact]
    public void A_fleet_that_writes_well_lowers_the_rates()
    {
        var rates = FleetWear.Fit(Uneven(60), SmallFleet.AsOf).Errors;
        foreach (var (name, seen, memory) in Beside(rates)) output.WriteLine($"{name} {seen:0.00000} from memory {memory}");
        Assert.InRange(rates.SidesSwapped, 0.1 * s_memory.SidesSwapped, 0.6 * s_memory.SidesSwapped);
    }

    [Fact]
    public void No_rate_leaves_its_bounds()
    {
        var fleet = Uneven(120);
        var swapped = FleetWear.Fit(Swapped(fleet, 4), SmallFleet.AsOf).Errors;
        Assert.Equal(5 * s_memory.SidesSwapped, swapped.SidesSwapped, 1e-12);
        foreach (var (name, seen, memory) in Beside(swapped)) Assert.True(seen >= 0.1 * memory && seen <= 5 * memory, $"{name} {seen}");
        // 5760 clean surveys beside the 300 of the prior would leave a twentieth.
        var many = FleetWear.Fit([.. Uneven(120).SelectMany(v => Enumerable.Range(0, 8).Select(k => Renamed(v, k)))], SmallFleet.AsOf).Errors;
        foreach (var (name, seen, memory) in Beside(many)) Assert.True(seen >= 0.1 * memory && seen <= 5 * memory, $"{name} {seen}");
        Assert.Equal(0.1 * s_memory.OtherVehicle, many.OtherVehicle, 1e-12);
    }

    private static VehicleTread Renamed(VehicleTread v, int copy)
    {
        var id = $"{v.Vehicle.VehicleId}-{copy}";
        return v with { Vehicle = v.Vehicle with { VehicleId = id }, Surveys = [.. v.Surveys.Select(s => s with { Survey = s.Survey with { VehicleId = id } })] };
    }

    [Fact]
    public void The_rates_do_not_depend_on_the_order_of_the_facts()
    {
        var fleet = Swapped(Uneven(30), 7);
        VehicleTread[] turned = [.. fleet.Reverse().Select(v => v with { Surveys = [.. v.Surveys.Reverse()], Fittings = [.. v.Fittings.Reverse()] })];
        Assert.Equal(FleetWear.Fit(fleet, SmallFleet.AsOf).Errors, FleetWear.Fit(turned, SmallFleet.AsOf).Errors);
    }

    [Fact]
    public void The_vehicles_own_reading_uses_the_fleets_rates()
    {
        var fleet = Uneven(20);
        var wear = FleetWear.Fit(fleet, SmallFleet.AsOf);
        double Doubt(double rate) => VehicleWear.Estimate(fleet[0], wear with { Errors = s_memory with { OtherVehicle = rate } }, SmallFleet.AsOf)
            .Surveys.Sum(s => s.Explanations.Where(e => e.Explanation.Kind == ExplanationKind.OtherVehicle).Sum(e => e.Weight));
        Assert.InRange(Doubt(0.01) / Doubt(0.001), 5, 11);
    }
}
