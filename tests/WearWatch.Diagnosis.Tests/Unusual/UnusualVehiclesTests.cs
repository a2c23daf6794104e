using System.Text.Json;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tests.Rules;
using WearWatch.Diagnosis.Unusual;
using Xunit.Abstractions;

namespace WearWatch.Diagnosis.Tests.Unusual;

public class UnusualVehiclesTests(ITestOutputHelper output)
{
    /// <summary>Sound vehicles: figures that vary together (load drives wear, pressure and shoulders) and alone, some not known.</summary>
    private sealed class Fleet(int seed, bool heavy = false, double share = 0.85)
    {
        private readonly Random random = new(seed);

        private double Normal() => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());

        /// <summary>Student's law with 3 degrees of freedom, of standard deviation 1, where the tails are heavy.</summary>
        private double Own() => !heavy ? Normal() : Normal() / Math.Sqrt(Math.Pow(Normal(), 2) + Math.Pow(Normal(), 2) + Math.Pow(Normal(), 2));

        public VehicleFigures Sound(string id, Func<string, VehicleFigures> vehicle, double? knownShare = null)
        {
            var known = knownShare ?? share;
            var figures = vehicle(id);
            var (load, route) = (Normal(), Normal());
            Estimate? Figure(double common, double spread, double error) =>
                random.NextDouble() > known ? null : new(spread * (0.6 * common + 0.8 * Own()) + error * Normal(), error);
            foreach (var position in figures.Vehicle.Positions())
                figures = figures.With(position.ToString(), t => t with
                {
                    LogRateRatio = Figure(load + route, 0.15, 0.05),
                    EdgeSlopeMmPer1000Km = Figure(route, 0.004, 0.004),
                    ShoulderMmPer1000Km = Figure(load, 0.004, 0.004),
                    RoundVariationMm = Figure(0, 0.1, 0.05) is { } r ? new(Math.Abs(r.Value), r.StandardError) : null,
                    FeatherMm = Figure(route, 0.05, 0.05),
                    PressureShare = Figure(-load, 0.02, 0.01),
                    RemainingMm = Figure(0, 0.5, 0.1) is { } d ? new(8 + d.Value, d.StandardError) : null,
                });
            if (figures.Vehicle.Class == VehicleClass.Trailer || random.NextDouble() > 0.7) return figures;
            return figures with
            {
                Steering = figures.Signals() with
                {
                    SteeringPullNm = Figure(route, 0.12, 0.05),
                    OffCentreDeg = Figure(route, 0.8, 0.2),
                    BrakePullNm = Figure(0, 0.1, 0.1),
                    DrivePullNm = Figure(0, 0.1, 0.1),
                },
            };
        }

        public List<VehicleFigures> Mixed(int each) =>
        [
            .. Enumerable.Range(0, each).Select(i => Sound($"van-{i:D3}", Vehicles.Van)),
            .. Enumerable.Range(0, each).Select(i => Sound($"truck-{i:D3}", Vehicles.Truck)),
            .. Enumerable.Range(0, each).Select(i => Sound($"bus-{i:D3}", Vehicles.Bus)),
            .. Enumerable.Range(0, each).Select(i => Sound($"trailer-{i:D3}", Vehicles.Trailer)),
        ];
    }

    private static VehicleFigures WithBrakePull(VehicleFigures figures, double newtonMetres) =>
        figures with { Steering = figures.Signals() with { BrakePullNm = new(newtonMetres, 0.1) } };

    /// <summary>Sound fleets: vehicles a class, heavy tails, share of figures known.</summary>
    public static TheoryData<string, int[], bool, double> SoundFleets => new()
    {
        { "twenty a class", [20, 20, 20, 20], false, 0.85 },
        { "sixty a class", [60, 60, 60, 60], false, 0.85 },
        { "heavy tails", [60, 60, 60, 60], true, 0.85 },
        { "half of the figures missing", [60, 60, 60, 60], false, 0.5 },
        { "small classes", [40, 12, 8, 10], false, 0.85 },
        { "small classes, heavy tails, figures missing", [40, 12, 8, 10], true, 0.6 },
        { "large fleet, heavy tails", [300, 120, 110, 110], true, 0.85 },
    };

    [Theory]
    [MemberData(nameof(SoundFleets))]
    public void No_more_than_the_stated_rate_of_sound_vehicles_is_flagged(string name, int[] sizes, bool heavy, double known)
    {
        Func<string, VehicleFigures>[] classes = [Vehicles.Van, Vehicles.Truck, Vehicles.Bus, Vehicles.Trailer];
        List<VehicleFigures> Of(int seed, int[] counts)
        {
            var fleet = new Fleet(seed, heavy, known);
            return [.. classes.SelectMany((c, k) => Enumerable.Range(0, counts[k]).Select(i => fleet.Sound($"{k}-{i:D3}", c)))];
        }
        // Vehicles of one fleet are judged by one fit and stand or fall together: the error is taken over fleets.
        var fleets = sizes.Sum() > 500 ? 5 : 12;
        var shares = new double[fleets];
        for (var k = 0; k < fleets; k++)
        {
            var fit = UnusualVehicles.Fit(Of(201 + k, sizes));
            var judged = Of(1201 + k, [60, 60, 60, 60]).Where(v => fit.CannotJudge(v) is null).ToList();
            shares[k] = judged.Count(v => fit.Judge(v) is not null) / (double)judged.Count;
        }
        var mean = shares.Average();
        var error = Math.Sqrt(shares.Sum(s => (s - mean) * (s - mean)) / (fleets - 1) / fleets);
        output.WriteLine($"{name}: {100 * mean:F2} % ± {100 * error:F2} of sound vehicles flagged");
        Assert.True(mean - 2 * error <= DistanceSpread.StatedRate, $"{name}: {mean:F4} ± {error:F4}");
    }

    [Fact]
    public void Magnitude_is_kept_where_a_relative_score_would_lose_it()
    {
        var fit = UnusualVehicles.Fit(new Fleet(3).Mixed(30));
        UnusualDistances At(double spreads) => fit.Distances(WithBrakePull(new Fleet(8).Sound("other", Vehicles.Van, 1), spreads * 0.15))!;
        var (near, far) = (At(3), At(30));
        Assert.InRange(far.SquaredPredictionError / near.SquaredPredictionError, 10, 200);
        Assert.True(far.Errors > 3 * near.Errors);
    }

    [Fact]
    public void Distance_along_the_common_directions_grows_with_the_square_of_a_deviation()
    {
        var fit = UnusualVehicles.Fit(new Fleet(3).Mixed(30));
        Assert.NotEmpty(fit.Components);
        var own = fit.Classes.First(c => c.Class == VehicleClass.Truck);
        // A vehicle lying out along the first direction, times of the class's spread.
        double T2(double times) => fit.Against([.. fit.Components[0].Select(x => times * x)], own).HotellingT2;
        Assert.Equal(100, T2(30) / T2(3), 6);
    }

    [Fact]
    public void The_odd_one_is_found_and_the_figure_that_makes_it_odd_is_named()
    {
        var fleet = new Fleet(4);
        var vehicles = fleet.Mixed(25);
        var odd = WithBrakePull(fleet.Sound("odd-truck", Vehicles.Truck), 1.8);
        var finding = UnusualVehicles.Fit([.. vehicles, odd]).Judge(odd);
        Assert.NotNull(finding);
        Assert.Equal(FindingKind.Unusual, finding.Kind);
        Assert.StartsWith("extra steering pull while braking 1.80 N·m (90 % 1.64 to 1.96)", finding.EvidenceFor[0].Statement, StringComparison.Ordinal);
        Assert.Contains(finding.EvidenceFor[0].Statement, finding.Sentence, StringComparison.Ordinal);
        Assert.Equal(["stream-a/3", "stream-a/9"], finding.EvidenceFor[0].Rests);
    }

    [Fact]
    public void An_inspection_is_asked_for_and_no_cause_claimed()
    {
        var fleet = new Fleet(4);
        var odd = WithBrakePull(fleet.Sound("odd-truck", Vehicles.Truck), 1.8);
        var finding = UnusualVehicles.Fit([.. fleet.Mixed(25), odd]).Judge(odd)!;
        Assert.Empty(finding.Causes);
        Assert.False(finding.AlignmentMends);
        Assert.StartsWith("Inspect", finding.FirstCheck, StringComparison.Ordinal);
    }

    [Fact]
    public void What_a_rule_already_names_is_not_reported_again()
    {
        var fleet = new Fleet(4);
        var fit = UnusualVehicles.Fit(fleet.Mixed(25));
        var pulling = fleet.Sound("puller", Vehicles.Truck, 1).Pull(3);
        Assert.True(fit.Distances(pulling)!.BeyondLimit);
        Assert.Contains(GeometryRules.Find(pulling), f => f.Kind == FindingKind.SteeringPull);
        Assert.DoesNotContain(fit.Judge(pulling)?.EvidenceFor ?? [], e => e.Statement.Contains("steering pull", StringComparison.Ordinal));
    }

    [Fact]
    public void The_order_of_the_fleet_does_not_matter_and_a_stored_fit_judges_alike()
    {
        var fleet = new Fleet(5);
        var vehicles = fleet.Mixed(12);
        var random = new Random(1);
        var fit = UnusualVehicles.Fit(vehicles);
        var stored = JsonSerializer.Serialize(fit);
        Assert.Equal(stored, JsonSerializer.Serialize(UnusualVehicles.Fit([.. vehicles.OrderBy(_ => random.Next())])));
        var read = JsonSerializer.Deserialize<UnusualFit>(stored)!;
        foreach (var v in vehicles) Assert.Equal(fit.Distances(v)?.Errors, read.Distances(v)?.Errors);
    }

    [Fact]
    public void A_class_of_fewer_than_eight_cannot_be_judged_and_says_so()
    {
        var fleet = new Fleet(6);
        VehicleFigures[] vehicles = [.. Enumerable.Range(0, 20).Select(i => fleet.Sound($"van-{i}", Vehicles.Van)), .. Enumerable.Range(0, 7).Select(i => fleet.Sound($"bus-{i}", Vehicles.Bus))];
        var fit = UnusualVehicles.Fit(vehicles);
        Assert.Contains("fewer than 8", fit.CannotJudge(vehicles[^1]), StringComparison.Ordinal);
        Assert.Null(fit.Judge(WithBrakePull(vehicles[^1], 30)));
        Assert.Null(fit.CannotJudge(vehicles[0]));
    }

    [Fact]
    public void Empty_missing_and_constant_figures_are_withstood()
    {
        Assert.Null(UnusualVehicles.Fit([]).Judge(Vehicles.Van()));
        // Nothing known of any vehicle.
        VehicleFigures[] bare = [.. Enumerable.Range(0, 12).Select(i => Vehicles.Van($"van-{i:D2}"))];
        Assert.NotNull(UnusualVehicles.Fit(bare).CannotJudge(bare[0]));
        // Every vehicle the same but one.
        VehicleFigures[] same = [.. Enumerable.Range(0, 12).Select(i => WithBrakePull(Vehicles.Van($"van-{i:D2}"), 0.1))];
        var fit = UnusualVehicles.Fit(same);
        Assert.All(same, v => Assert.Null(fit.Judge(v)));
        Assert.NotNull(fit.Judge(WithBrakePull(Vehicles.Van("other"), 2)));
        // Not numbers.
        Assert.Null(fit.Judge(WithBrakePull(Vehicles.Van("broken"), double.NaN)));
        Assert.DoesNotContain("NaN", JsonSerializer.Serialize(fit), StringComparison.Ordinal);
    }

    [Fact]
    public void An_uncertain_figure_counts_less()
    {
        var fleet = new Fleet(7);
        var fit = UnusualVehicles.Fit(fleet.Mixed(25));
        var van = fleet.Sound("van-x", Vehicles.Van, 1);
        var sure = van with { Steering = van.Signals() with { BrakePullNm = new(1.2, 0.1) } };
        var vague = van with { Steering = van.Signals() with { BrakePullNm = new(1.2, 1.0) } };
        Assert.True(fit.Distances(sure)!.Errors > fit.Distances(vague)!.Errors);
    }

    [Fact]
    public void A_few_faulty_vehicles_do_not_make_their_fault_usual()
    {
        var fleet = new Fleet(9);
        var sound = fleet.Mixed(25);
        VehicleFigures[] faulty = [.. Enumerable.Range(0, 3).Select(i => WithBrakePull(fleet.Sound($"faulty-{i}", Vehicles.Truck), 2))];
        var fit = UnusualVehicles.Fit([.. sound, .. faulty]);
        Assert.All(faulty, v => Assert.NotNull(fit.Judge(v)));
    }
}
