using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Wear;

/// <summary>What one walk round a vehicle may say, and what it may not.</summary>
public class FirstWalkTests
{
    private static readonly Position s_left = new(1, Side.Left), s_right = new(1, Side.Right);

    private static readonly Vehicle s_truck = new()
    {
        VehicleId = "T",
        Depot = "north",
        Class = VehicleClass.Truck,
        KmPerWeek = 2000,
        GrossMassKg = 18_000,
        Axles = [new() { Number = 1, Steered = true }, new() { Number = 2, Driven = true, Duals = true }],
    };

    private static VehicleWearResult Walk(Func<Position, int, double> depth, int grooves = 4, double resolution = 0.1) => VehicleWear.Estimate(new VehicleTread
    {
        Vehicle = s_truck,
        Depot = SmallFleet.Yard,
        Surveys =
        [
            new("S1", new TreadSurvey
            {
                VehicleId = "T",
                At = SmallFleet.First,
                ResolutionMm = resolution,
                Tyres = [.. s_truck.Positions().Select(p => new TyreReadings { Position = p, Depths = grooves == 0 ? [new GrooveDepth(0, depth(p, 0))] : [.. Enumerable.Range(1, grooves).Select(g => new GrooveDepth(g, depth(p, g)))] })],
            }),
        ],
    }, FleetWear.Fit([], SmallFleet.AsOf), SmallFleet.AsOf);

    private static double Worn(Position p, int groove) => p == s_left ? 10 + 0.8 * groove : p == s_right ? 12 : p == new Position(2, Side.Left, Dual.Inner) ? 9 : 15;

    [Fact]
    public void It_tells_depth_and_limit_at_the_governing_groove()
    {
        var tyre = Walk(Worn).Tyres.First(t => t.Position == s_left);
        Assert.Equal((10.8, 1), (Math.Round(tyre.RemainingMm!.Value.Value, 6), tyre.GoverningGroove!.Value));
        Assert.Equal(1.6, tyre.LimitMm);
        Assert.Equal(4, tyre.Across.Count);
    }

    [Fact]
    public void It_makes_no_rate_of_its_own_and_no_slope_of_its_own()
    {
        Assert.All(Walk(Worn).Tyres, t =>
        {
            Assert.True(t.RateBorrowed);
            Assert.Null(t.LogRateRatio);
            Assert.Null(t.EdgeSlopeMmPer1000Km);
            Assert.Null(t.ShoulderMmPer1000Km);
        });
    }

    [Fact]
    public void One_rounded_depth_a_tyre_is_taken_and_gives_no_shape()
    {
        var result = Walk((_, _) => 8, grooves: 0, resolution: 1);
        Assert.All(result.Tyres, t => Assert.Empty(t.Across));
        Assert.All(result.Tyres, t => Assert.Equal(0, t.GoverningGroove));
        Assert.All(result.Tyres, t => Assert.True(t.RemainingKm!.Value.High > 2 * t.RemainingKm.Value.Low));
    }

    [Fact]
    public void Half_a_walk_leaves_the_other_tyres_unknown()
    {
        var whole = Walk(Worn);
        Assert.Equal(6, whole.Tyres.Count);
        var half = VehicleWear.Estimate(new VehicleTread
        {
            Vehicle = s_truck,
            Depot = SmallFleet.Yard,
            Surveys = [new("S1", new TreadSurvey { VehicleId = "T", At = SmallFleet.First, Finished = false, Tyres = [new() { Position = s_left, Depths = [new GrooveDepth(1, 9)] }, new() { Position = s_right, NotReached = "parked against a wall" }] })],
        }, FleetWear.Fit([], SmallFleet.AsOf), SmallFleet.AsOf);
        Assert.NotNull(half.Tyres.First(t => t.Position == s_left).RemainingMm);
        Assert.Null(half.Tyres.First(t => t.Position == s_right).RemainingMm);
        Assert.Null(half.Tyres.First(t => t.Position == s_right).RemainingKm);
    }

    // Sound tyres wear their outer grooves 10-50 % faster than the inner ones (NHTSA tread-wear groove patterns, 1985).
    [Fact]
    public void Outer_grooves_that_wear_10_to_50_percent_faster_on_sound_tyres_are_not_one_edge_wear()
    {
        var random = new Random(17);
        var share = new Dictionary<(string, Position), double>();
        VehicleTread Sound(TrueVehicle v)
        {
            foreach (var p in v.Tyres.Keys) share[(v.Tread.Vehicle.VehicleId, p)] = 0.1 + 0.4 * random.NextDouble();
            return v.Tread with
            {
                Surveys = [.. v.Tread.Surveys.Select(s => s with
                {
                    Survey = s.Survey with { Tyres = [.. s.Survey.Tyres.Select(t => t with { Depths = [.. t.Depths.Select(d => d with { DepthMm = Math.Round(Faster(v, t.Position, s.Survey.DistanceKm!.Value, d), 1) })] })] },
                })],
            };
        }
        // The two outer grooves lose that much more than the two inner ones.
        double Faster(TrueVehicle v, Position p, double km, GrooveDepth d)
        {
            var tyre = v.Tyres[p];
            var loss = (km - tyre.StartKm) / 1000 * tyre.RateMmPer1000Km;
            var more = share[(v.Tread.Vehicle.VehicleId, p)];
            var noise = d.DepthMm - tyre.Depth(km, d.Groove, 4);
            return Math.Max(0, tyre.NewMm - loss * (1 + (d.Groove is 1 or 4 ? 1 : -1) * more / (2 + more)) + noise);
        }
        VehicleTread[] fleet = [.. new SmallFleet(16) { FaultyShare = 0 }.Make(120).Select(Sound)];
        var wear = FleetWear.Fit(fleet, SmallFleet.AsOf);
        var found = fleet.Count(v =>
        {
            var result = VehicleWear.Estimate(v, wear, SmallFleet.AsOf);
            return OneEdgeWearRule.Find(new VehicleFigures { Vehicle = v.Vehicle, Depot = v.Depot, AsOf = SmallFleet.AsOf, Tyres = result.Tyres }).Any(f => f.Kind == FindingKind.OneEdgeWear);
        });
        Assert.True(found <= 0.03 * fleet.Length, $"{found} of {fleet.Length}");
    }
}
