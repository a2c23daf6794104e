using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Tests.Tread;

public class DepthLimitsTests
{
    private static readonly DateOnly s_summer = new(2026, 7, 1), s_winter = new(2026, 12, 20);

    private static Vehicle Vehicle(VehicleClass vehicleClass, double? grossMassKg) => new()
    {
        VehicleId = "v",
        Depot = "d",
        Class = vehicleClass,
        GrossMassKg = grossMassKg,
        Axles = [new() { Number = 1, Steered = true }, new() { Number = 2, Driven = true, Duals = vehicleClass == VehicleClass.Truck }],
    };

    private static DepthLimit Limit(string jurisdiction, VehicleClass vehicleClass, double? kg, int axle = 1, DateOnly? on = null, bool winterTyre = false, params DepthLimitFact[] own) =>
        DepthLimits.For(jurisdiction, Vehicle(vehicleClass, kg), new(axle, Side.Left), winterTyre, on ?? s_summer, own);

    private static bool Legal(DepthLimit limit, params double[] depths) =>
        DepthLimits.Judge(limit, [.. depths.Select((d, i) => new GrooveDepth(i + 1, d))])!.Legal;

    [Fact]
    public void Britain_allows_1_2_mm_above_3500_kg() => // Construction and Use Regulations, reg. 27
        Assert.True(Legal(Limit("GB", VehicleClass.Truck, 3600), 1.2, 1.4, 1.4, 1.2));

    [Fact]
    public void Britain_forbids_1_2_mm_up_to_3500_kg() =>
        Assert.False(Legal(Limit("GB", VehicleClass.Van, 3500), 1.2, 1.8, 1.8, 1.8));

    [Fact]
    public void Austria_forbids_1_8_mm_above_3500_kg() => // KDV § 4(4)
        Assert.False(Legal(Limit("AT", VehicleClass.Truck, 3600), 1.8, 2.4, 2.4));

    [Fact]
    public void The_United_States_forbid_3_1_mm_on_the_front_of_a_truck_only() // 49 CFR 393.75
    {
        Assert.False(Legal(Limit("US", VehicleClass.Truck, 15000), 3.1, 5, 5));
        Assert.True(Legal(Limit("US", VehicleClass.Truck, 15000, axle: 2), 3.1, 5, 5));
        Assert.True(Legal(Limit("US", VehicleClass.Truck, 15000), 4 * 0.79375, 5, 5));
    }

    [Fact]
    public void France_allows_one_of_four_points_below_1_mm_on_a_heavy_vehicle() // JORFARTI000038987859
    {
        var limit = Limit("FR", VehicleClass.Truck, 19000);
        DepthJudgement Judge(params double[] points) => DepthLimits.Judge(limit, [.. points.Select((d, i) => new GrooveDepth(2, d, i * 90))])!;
        Assert.True(Judge(0.9, 1.2, 1.3, 1.1).Legal);
        Assert.False(Judge(0.9, 1.2, 1.3, 0.9).Legal);
        Assert.False(Judge(0.9, 1.2, 1.3).Legal);
    }

    [Fact]
    public void Swedish_winter_asks_for_more_and_of_trailers_not()
    {
        Assert.Equal(5.0, Limit("SE", VehicleClass.Truck, 18000, on: s_winter).LimitMm);
        Assert.Equal(3.0, Limit("SE", VehicleClass.Van, 3500, on: s_winter).LimitMm);
        Assert.Equal(1.6, Limit("SE", VehicleClass.Trailer, 18000, on: s_winter).LimitMm);
        Assert.Equal(1.6, Limit("SE", VehicleClass.Truck, 18000).LimitMm);
        Assert.Equal(5.0, Limit("NO", VehicleClass.Truck, 18000, on: s_winter).LimitMm);
    }

    [Fact]
    public void Austrian_winter_tyre_needs_4_mm_in_winter_only()
    {
        Assert.Equal(4.0, Limit("AT", VehicleClass.Car, 1800, on: s_winter, winterTyre: true).LimitMm);
        Assert.Equal(1.6, Limit("AT", VehicleClass.Car, 1800, winterTyre: true).LimitMm);
    }

    [Fact]
    public void Every_limit_names_its_source_and_date()
    {
        foreach (var where in new[] { "US", "DE", "GB", "UK", "AT", "FR", "AU", "SE", "NO", "PL", "ZZ" })
            foreach (var kind in Enum.GetValues<VehicleClass>())
                Assert.False(string.IsNullOrWhiteSpace(Limit(where, kind, 3000).Source));
        Assert.Contains("no rule on file for ZZ", Limit("ZZ", VehicleClass.Van, 3000).Source);
        Assert.Contains("2026-12-01", Limit("DE", VehicleClass.Van, 3000).Source);
        Assert.Contains("89/459/EEC", Limit("PL", VehicleClass.Van, 3000).Source);
    }

    [Fact]
    public void Unknown_gross_mass_takes_the_stricter_line()
    {
        var limit = Limit("GB", VehicleClass.Trailer, null);
        Assert.Equal(1.6, limit.LimitMm);
        Assert.Contains("gross mass not recorded", limit.Source);
    }

    [Fact]
    public void The_operators_own_limit_replaces_the_table_from_its_date()
    {
        var own = new DepthLimitFact { Jurisdiction = "DE", Class = VehicleClass.Van, LimitMm = 3, From = new(2026, 6, 1), Source = "house rule 12" };
        Assert.Equal(3, Limit("DE", VehicleClass.Van, 3500, own: own).LimitMm);
        Assert.Contains("house rule 12", Limit("DE", VehicleClass.Van, 3500, own: own).Source);
        Assert.Equal(1.6, Limit("DE", VehicleClass.Van, 3500, on: new(2026, 5, 31), own: own).LimitMm);
        Assert.Equal(1.6, Limit("DE", VehicleClass.Car, 1500, own: own).LimitMm);
    }

    [Fact]
    public void The_least_groove_governs_never_the_mean()
    {
        var judged = DepthLimits.Judge(Limit("DE", VehicleClass.Van, 3500), [new(1, 1.5), new(2, 9), new(3, 9), new(4, 9)])!;
        Assert.Equal((false, 1.5, 1), (judged.Legal, judged.GoverningMm, judged.Groove));
    }
}
