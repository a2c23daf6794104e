using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tests.Statistics;
using WearWatch.Diagnosis.Wear;
using Xunit.Abstractions;

namespace WearWatch.Diagnosis.Tests.Wear;

/// <summary>Published degradation sets dressed as tyres of one-axle trailers: what the whole wear model makes of them.</summary>
public class PublishedWearTests(ITestOutputHelper output)
{
    private static readonly Position s_place = new(1, Side.Left);

    private static VehicleTread Unit(string id, IEnumerable<(double Km, double DepthMm)> readings) => new()
    {
        Vehicle = new() { VehicleId = id, Depot = "north", Class = VehicleClass.Trailer, GrossMassKg = 9000, KmPerWeek = 2000, Axles = [new() { Number = 1 }] },
        Depot = SmallFleet.Yard,
        Surveys = [.. readings.Select((r, i) => new StoredSurvey($"{id}-{i:00}", new()
        {
            VehicleId = id,
            At = SmallFleet.First.AddDays(7 * r.Km / 2000),
            Technician = "lab",
            DistanceKm = r.Km,
            DistanceSource = DistanceSource.Odometer,
            Tyres = [new() { Position = s_place, Depths = [new(0, r.DepthMm)] }],
        }))],
    };

    private static readonly DateOnly s_asOf = new(2028, 1, 1);

    [Fact]
    public void A_cylinder_liner_measured_once_borrows_its_rate_and_says_so()
    {
        // Giorgio, Guida and Pulcini: 32 liners, 15 of them with a single reading; pooled least squares 0.4774 + 0.6331 mm per 10 000 h.
        var d = ReferenceData.Read("cylinder_liners.csv");
        // 10 000 h stand for 20 000 km.
        var units = Enumerable.Range(0, d["unit"].Length).GroupBy(i => d["unit"][i])
            .Select(g => Unit($"L{g.Key:00}", g.Select(i => (d["time"][i] * 20_000, 12 - d["wear"][i])))).ToList();
        Assert.Equal(32, units.Count);
        var fleet = FleetWear.Fit(units, s_asOf);
        var single = 0;
        foreach (var unit in units)
        {
            var figures = VehicleWear.Estimate(unit, fleet, s_asOf).Tyres.Single(t => t.Position == s_place);
            if (unit.Surveys.Count > 1) continue;
            single++;
            Assert.True(figures.RateBorrowed);
            Assert.Null(figures.LogRateRatio);
        }
        Assert.Equal(15, single);
        // What is borrowed is the liners' own pooled rate: 0.6331 mm per 20 000 km, 0.0317 mm per 1000 km.
        Assert.InRange(fleet.For(units[0].Vehicle, s_place).RateMmPer1000Km, 0.022, 0.042);
    }

    [Fact]
    public void Lasers_reach_their_limit_within_the_interval_from_their_first_two_thirds()
    {
        // Meeker and Escobar 1998, GaAs lasers: hours to 10 % by the least-squares line through all 17 readings, recomputed in R 4.2.2.
        double[] toLimit = [3702, 4194, 5847, 6172, 5301, 3592, 6051, 6538, 5110, 3306, 5326, 4995, 4721, 5689, 6102];
        var d = ReferenceData.Read("gaas_laser.csv");
        // 1 % stands for 1 mm above a limit of 1.6 mm at 11.6 mm, an hour for 40 km; the last third of each unit is held back.
        var units = Enumerable.Range(0, 15).Select(u => Unit($"G{u:00}", Enumerable.Range(17 * u, 12).Select(i => (d["x"][i] * 40, 11.6 - d["y"][i])))).ToList();
        var fleet = FleetWear.Fit(units, s_asOf);
        int held = 0, narrow = 0;
        for (var u = 0; u < units.Count; u++)
        {
            var left = VehicleWear.Estimate(units[u], fleet, s_asOf).Tyres.Single(t => t.Position == s_place).RemainingKm!.Value;
            var truth = (toLimit[u] - d["x"][17 * u + 11]) * 40;
            output.WriteLine($"{truth:0} in {left.Low:0}..{left.High:0}");
            if (truth >= left.Low && truth <= left.High) held++;
            if (left.High < 2 * left.Low) narrow++;
        }
        // 90 % of 15, less two standard errors of such a count.
        Assert.True(held >= 11, $"{held} of 15");
        Assert.True(narrow >= 11, $"{narrow} of 15 tell something");
    }

    [Fact]
    public void The_loss_of_run_in_is_found_and_taken_off_the_start()
    {
        var plain = new SmallFleet(131) { FaultyShare = 0 }.Make(80);
        VehicleTread RunIn(TrueVehicle v) => Enumerable.Range(0, v.Tread.Surveys.Count).Aggregate(v.Tread, (tread, s) => SmallFleet.Change(tread, s,
            t => t with { Depths = [.. t.Depths.Select(g => g with { DepthMm = Math.Max(0, g.DepthMm - 0.4) })] }));
        var without = FleetWear.Fit([.. plain.Select(v => v.Tread)], SmallFleet.AsOf).Noise.RunIn;
        var with = FleetWear.Fit([.. plain.Select(RunIn)], SmallFleet.AsOf).Noise.RunIn;
        output.WriteLine($"{without} {with}");
        Assert.True(with.Fittings > 40);
        Assert.Equal(0, without.SlowDown);
        Assert.Equal(0.4, with.ExcessMm.Value - without.ExcessMm.Value, 0.12);
    }
}
