using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;

namespace WearWatch.Diagnosis.Tests.Rules;

public class SafetyRuleTests
{
    [Fact]
    public void A_reading_below_the_limit_counts_even_within_its_noise_and_says_so()
    {
        var van = Vehicles.Van().With("1L", t => t with { RemainingMm = new(1.5, 0.3), LimitMm = 1.6, LimitSource = "StVZO §36, 2026-12-01", GoverningGroove = 1 });
        var below = GeometryRules.Find(van).Only(FindingKind.BelowLimit);
        Assert.Contains("1.5 mm (90 % 1.0 to 2.0) in groove 1 from the outboard side, below the limit of 1.6 mm (StVZO §36, 2026-12-01)", below.Sentence, StringComparison.Ordinal);
        Assert.Contains("measure it again", below.Sentence, StringComparison.Ordinal);
        Assert.NotNull(below.Caution);
    }

    [Fact]
    public void A_reading_at_the_limit_is_not_below_it() =>
        Assert.Empty(GeometryRules.Find(Vehicles.Van().With("1L", t => t with { RemainingMm = new(1.6, 0.1), LimitMm = 1.6 })));

    [Theory]
    [InlineData(Seen.Cord)]
    [InlineData(Seen.Cut)]
    [InlineData(Seen.Bulge)]
    [InlineData(Seen.Unsafe)]
    public void Damage_seen_takes_the_tyre_off_the_road(Seen seen)
    {
        var unsafeTyre = GeometryRules.Find(Vehicles.Truck().With("2RI", t => t with { Seen = [seen] })).Only(FindingKind.UnsafeTyre);
        Assert.Equal((2, Side.Right, Dual.Inner), (unsafeTyre.Axle, unsafeTyre.Side, unsafeTyre.Dual));
    }

    [Fact]
    public void Safety_comes_before_strength()
    {
        var van = Vehicles.Van().Edge("1L", 0.5).Edge("1R", 0.5).Pull(0.8, 0.3)
            .With("2L", t => t with { Seen = [Seen.Bulge] })
            .With("2R", t => t with { RemainingMm = new(1.5, 0.3), LimitMm = 1.6 })
            .With("1R", t => t with { PressureShare = new(-0.3, 0.1) });
        Assert.Equal([FindingKind.UnsafeTyre, FindingKind.BelowLimit, FindingKind.PressureOff, FindingKind.SteeringPull, FindingKind.OneEdgeWear], GeometryRules.Find(van).Select(f => f.Kind));
    }

    [Fact]
    public void A_very_soft_tyre_is_inspected_before_it_is_inflated()
    {
        var soft = GeometryRules.Find(Vehicles.Truck().With("2LI", t => t with { PressureShare = new(-0.25, 0.02) })).Only(FindingKind.PressureOff);
        Assert.Equal("Left inner tyre of axle 2: pressure is 25 % (90 % 22 to 28) below its setting.", soft.Sentence);
        Assert.Contains("before inflating", soft.Caution!, StringComparison.Ordinal);
        Assert.Null(GeometryRules.Find(Vehicles.Truck().With("2LI", t => t with { PressureShare = new(0.15, 0.02) })).Only(FindingKind.PressureOff).Caution);
    }

    [Fact]
    public void France_allows_five_millimetres_across_an_axle_and_makers_two()
    {
        // France, JORFARTI000038987859: 5 mm; vehicle makers' manuals: 2 mm before an alignment check.
        static VehicleFigures Gap(double mm, string country) => Vehicles.Van() with
        {
            Depot = Vehicles.RightHandDepot with { Jurisdiction = country },
            Tyres = Vehicles.Van().With("1L", t => t with { RemainingMm = new(8, 0.1) }).With("1R", t => t with { RemainingMm = new(8 - mm, 0.1) }).Tyres,
        };
        Assert.Empty(GeometryRules.Find(Gap(1.9, "FR")));
        Assert.DoesNotContain("French", GeometryRules.Find(Gap(4.9, "FR")).Only(FindingKind.DepthGap).Sentence, StringComparison.Ordinal);
        Assert.Contains("French", GeometryRules.Find(Gap(5.2, "FR")).Only(FindingKind.DepthGap).Sentence, StringComparison.Ordinal);
        Assert.DoesNotContain("French", GeometryRules.Find(Gap(5.2, "DE")).Only(FindingKind.DepthGap).Sentence, StringComparison.Ordinal);
    }

    [Fact]
    public void Fast_wear_is_well_beyond_what_drivers_alone_do()
    {
        // Drivers alone move wear by up to 35 % (Fleet Maintenance, 10 March 2017).
        static VehicleFigures Fast(double ratio) => Vehicles.Van()
            .With("1L", t => t with { LogRateRatio = new(Math.Log(ratio), 0.08), RateMmPer1000Km = new(0.18 * ratio, 0.01) })
            .With("2L", t => t with { LogRateRatio = new(0, 0.08) });
        Assert.Empty(GeometryRules.Find(Fast(1.35)));
        var fast = GeometryRules.Find(Fast(1.9)).Only(FindingKind.FastWear);
        Assert.Equal("Left steer tyre wears fast: worst 1.9 times the normal rate (90 % 1.7 to 2.2), 0.342 mm per 1000 km (90 % 0.326 to 0.358).", fast.Sentence);
        Assert.False(fast.AlignmentMends);
        Assert.True(GeometryRules.Find(Fast(1.9).Edge("1L", 0.15)).Only(FindingKind.FastWear).AlignmentMends);
    }

    [Fact]
    public void A_borrowed_rate_says_nothing_of_the_tyre() =>
        Assert.Empty(GeometryRules.Find(Vehicles.Van().With("1L", t => t with { LogRateRatio = new(1, 0.1), RateBorrowed = true })));

    [Fact]
    public void Every_tyre_wearing_fast_is_the_vehicles_duty_and_one_finding()
    {
        var van = Vehicles.Van();
        foreach (var p in van.Vehicle.Positions()) van = van.With(p.ToString(), t => t with { LogRateRatio = new(0.7, 0.08) });
        var fast = GeometryRules.Find(van).Only(FindingKind.FastWear);
        Assert.Equal((null, Quantity.Duty), ((int?)fast.Axle, fast.Causes[0]));
    }
}
