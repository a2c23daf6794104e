using System.Globalization;
using System.Text.RegularExpressions;
using CsCheck;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Rules;

/// <summary>What must hold of every finding, whatever the vehicle.</summary>
public partial class RuleSetTests
{
    [GeneratedRegex(@"(?<!heel and )toe|camber|caster|thrust|skew|parallel|pointing|out of direction", RegexOptions.IgnoreCase)]
    private static partial Regex AngleWords();

    [GeneratedRegex(@"\d (mm per 1000 km|mm|deg|N·m|m/s²|% \(|times the normal rate)|in mm|many mm")]
    private static partial Regex FigureWithUnit();

    private static Gen<Estimate> Figure(double size, double error) =>
        from v in Gen.Double[-size, size]
        from e in Gen.Double[error / 4, error]
        select new Estimate(v, e);

    private static Gen<Estimate?> Maybe(Gen<Estimate> gen) => Gen.Select(Gen.Bool, gen, (known, e) => known ? e : (Estimate?)null);

    private static Gen<TyreFigures> Tyre(Position position) =>
        from edge in Maybe(Figure(0.15, 0.03))
        from shoulder in Maybe(Figure(0.15, 0.03))
        from feather in Maybe(Figure(1, 0.2))
        from round in Maybe(Figure(1, 0.2))
        from ratio in Maybe(Figure(1, 0.2))
        from pressure in Maybe(Figure(0.3, 0.05))
        from depth in Maybe(from v in Gen.Double[0.5, 15] from e in Gen.Double[0.05, 0.4] select new Estimate(v, e))
        from rubs in Gen.Int[0, 3].Array[3]
        from seen in Gen.Int[-10, 8]
        select new TyreFigures
        {
            Position = position,
            // One id a place on either side, so that a mirrored vehicle rests on the same ids.
            SurveyIds = [$"survey-{position.Axle}{position.Dual}"],
            EdgeSlopeMmPer1000Km = edge,
            ShoulderMmPer1000Km = shoulder,
            FeatherMm = feather,
            RoundVariationMm = round is { } r ? new(Math.Abs(r.Value), r.StandardError) : null,
            LogRateRatio = ratio,
            PressureShare = pressure,
            RemainingMm = depth,
            LimitMm = 1.6,
            RubsCatchingOutward = rubs[0],
            RubsCatchingInward = rubs[1],
            RubsCatchingNeither = rubs[2],
            Seen = seen >= 0 ? [(Seen)seen] : [],
        };

    private static readonly Gen<VehicleFigures> AnyVehicle =
        from which in Gen.Int[0, 4]
        let vehicle = which switch { 0 => Vehicles.Van(), 1 => Vehicles.Bus(), 2 => Vehicles.FrontDrivenVan(), 3 => Vehicles.Truck(), _ => Vehicles.Trailer() }
        from tyres in vehicle.Vehicle.Positions().Select(Tyre).Aggregate(Gen.Const(Array.Empty<TyreFigures>()), (all, one) => Gen.Select(all, one, (a, o) => (TyreFigures[])[.. a, o]))
        from pull in Maybe(Figure(1.5, 0.3))
        from angle in Maybe(Figure(8, 1))
        from brake in Maybe(Figure(1.5, 0.5))
        from share in Gen.Int[0, 2]
        from turns in Gen.Double[0.2, 0.8]
        from routed in Gen.Bool
        from symptoms in Gen.Int[0, 3].Array[0, 3]
        from after in Maybe(Figure(8, 1)).Array[2]
        from turned in Gen.Double[100, 900].Array[2]
        from hop in Gen.Double[0, 1]
        from studied in Gen.Bool
        let withTyres = vehicle with
        {
            Tyres = tyres,
            Route = routed ? new UsualRoute { VehicleId = vehicle.Vehicle.VehicleId, LeftTurnShare = turns } : null,
            DriverReports = [.. symptoms.Select((s, i) => new DriverReport { VehicleId = vehicle.Vehicle.VehicleId, Symptom = (Symptom)s, At = new DateTimeOffset(2026, 11, 1 + i, 8, 0, 0, TimeSpan.Zero) })],
        }
        select which == 4 ? withTyres : withTyres with
        {
            Study = !studied ? null : withTyres.StudyOf() with
            {
                TurnedLeftDeg = turned[0],
                TurnedRightDeg = turned[1],
                WheelHop = new WheelHop(SteeringChannel.DriverTorque, hop, 1 - hop, 600),
                Return = new ReturnToCentre { AfterLeft = 10, AfterRight = 10, RestAfterLeftDeg = after[0], RestAfterRightDeg = after[1] },
            },
            Steering = withTyres.Signals() with { SteeringPullNm = pull, OffCentreDeg = angle, BrakePullNm = brake, RoadShare = (Diagnosis.Roads.RoadShare)share },
        };

    /// <summary>What a finding says without its words, and its words with left and right taken out.</summary>
    private static string Shape(Finding f, bool mirror)
    {
        var side = f.Side is { } s && mirror ? (s == Side.Left ? Side.Right : Side.Left) : f.Side;
        // A depth gap's side and a wheel's side turn over; words keep their figures in another order.
        var figures = string.Join(' ', Regex.Matches(f.Sentence, @"\d+\.?\d*").Select(m => m.Value).Order(StringComparer.Ordinal));
        return string.Create(CultureInfo.InvariantCulture,
            $"{f.Kind} {f.Axle} {side} {f.Dual} {f.Strength:F6} {f.AlignmentMends} [{string.Join(',', f.Causes)}] for {f.EvidenceFor.Count} against {f.EvidenceAgainst.Count} confounders {f.Confounders.Count} | {figures} | {f.FirstCheck} | {f.Caution}");
    }

    private static string Shapes(VehicleFigures figures, bool mirror) =>
        string.Join('\n', GeometryRules.Find(figures).Select(f => Shape(f, mirror)).Order(StringComparer.Ordinal));

    [Fact]
    public void Mirroring_left_and_right_mirrors_every_finding() =>
        AnyVehicle.Sample(v => Assert.Equal(Shapes(v, false), Shapes(v.Mirrored(), true)), iter: 500);

    [Fact]
    public void A_mirrored_sentence_says_left_where_the_other_said_right() =>
        AnyVehicle.Sample(v =>
        {
            static string Words(string s, bool swap) => string.Join(' ', Regex.Matches(s, "left|right", RegexOptions.IgnoreCase)
                .Select(m => m.Value.Equals("left", StringComparison.OrdinalIgnoreCase) != swap ? "left" : "right").Order(StringComparer.Ordinal));
            static IEnumerable<string> All(VehicleFigures f, bool swap) => GeometryRules.Find(f).Select(x => $"{x.Kind} {x.Axle} {x.Strength:F4} {Words(x.Sentence, swap)}").Order(StringComparer.Ordinal);
            Assert.Equal(All(v, false), All(v.Mirrored(), true));
        }, iter: 500);

    [Fact]
    public void The_order_of_the_tyres_does_not_matter() =>
        AnyVehicle.Sample(v => Assert.Equal(Shapes(v, false), Shapes(v with { Tyres = [.. v.Tyres.Reverse()] }, false)), iter: 500);

    [Fact]
    public void Every_sentence_holds_a_figure_with_its_unit_and_ends_as_one_sentence() =>
        AnyVehicle.Sample(v =>
        {
            foreach (var f in GeometryRules.Find(v))
            {
                Assert.Matches(FigureWithUnit(), f.Sentence);
                Assert.EndsWith(".", f.Sentence, StringComparison.Ordinal);
                Assert.DoesNotContain("NaN", f.Sentence, StringComparison.Ordinal);
                Assert.True(char.IsUpper(f.Sentence[0]));
            }
        }, iter: 500);

    [Fact]
    public void An_angle_is_named_only_on_two_evidences() =>
        AnyVehicle.Sample(v =>
        {
            foreach (var f in GeometryRules.Find(v).Where(f => AngleWords().IsMatch(f.Sentence)))
                Assert.True(f.EvidenceFor.Count >= 2, f.Sentence);
        }, iter: 500);

    [Fact]
    public void Every_finding_rests_on_named_facts_and_says_what_to_check() =>
        AnyVehicle.Sample(v =>
        {
            foreach (var f in GeometryRules.Find(v))
            {
                Assert.NotEmpty(f.EvidenceFor);
                Assert.All(f.EvidenceFor, e => Assert.NotEmpty(e.Rests));
                Assert.NotEmpty(f.FirstCheck);
                Assert.InRange(f.Strength, 0, RuleLimits.StrengthCap);
            }
        }, iter: 500);

    [Fact]
    public void No_condition_is_found_twice_in_one_place() =>
        AnyVehicle.Sample(v =>
        {
            var places = GeometryRules.Find(v).Select(f => (f.Kind, f.Axle, f.Side, f.Dual, f.Kind == FindingKind.PressureOff ? f.Sentence : "")).ToList();
            Assert.Equal(places.Count, places.Distinct().Count());
        }, iter: 500);

    public static TheoryData<string> SingleEvidence => ["pull", "off-centre", "one edge", "feather", "feather pair", "fast", "rubs", "rear feather pair"];

    [Theory]
    [MemberData(nameof(SingleEvidence))]
    public void One_evidence_alone_names_no_angle(string what)
    {
        var van = what switch
        {
            "pull" => Vehicles.Van().Pull(1.5),
            "off-centre" => Vehicles.Van().OffCentre(9),
            "one edge" => Vehicles.Van().Edge("1L", 0.3),
            "feather" => Vehicles.Van().Feather("1L", 0.9),
            "feather pair" => Vehicles.Van().Feather("1L", 0.9).Feather("1R", 0.9),
            "fast" => Vehicles.Van().With("1L", t => t with { LogRateRatio = new(1, 0.1) }),
            "rubs" => Vehicles.Van().With("1L", t => t with { RubsCatchingInward = 9 }),
            _ => Vehicles.Van().Feather("2L", 0.9).Feather("2R", -0.9),
        };
        var finding = Assert.Single(GeometryRules.Find(van));
        Assert.DoesNotMatch(AngleWords(), finding.Sentence);
        Assert.NotEmpty(finding.Causes);
    }

    [Fact]
    public void A_large_figure_within_its_noise_opens_nothing() =>
        Assert.Empty(GeometryRules.Find(Vehicles.Van().Pull(0.9, 0.6).OffCentre(6, 4).Edge("1L", 0.2, 0.15).Edge("1R", 0.2, 0.15).Feather("1L", 0.9, 0.6)));

    [Fact]
    public void A_sure_figure_within_its_limit_opens_nothing() =>
        Assert.Empty(GeometryRules.Find(Vehicles.Van().Pull(0.3, 0.01).OffCentre(2, 0.01).Edge("1L", 0.02, 0.001).Edge("1R", 0.02, 0.001).Feather("1L", 0.1, 0.01)));

    [Fact]
    public void Figures_that_are_not_numbers_open_nothing() =>
        Assert.Empty(GeometryRules.Find(Vehicles.Van().Pull(double.NaN).OffCentre(double.PositiveInfinity, 1).Edge("1L", 1, double.NaN)));

    [Theory]
    [InlineData(0.25, 0.01)]
    [InlineData(0.33, 0.08)]
    [InlineData(0.50, 0.15)]
    public void Chance_alone_seldom_opens_a_finding_on_a_sound_ten_tyred_truck(double noiseOverLimit, double atMost)
    {
        var random = new Random(20261130);
        double Normal() => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());
        Estimate Noise(double limit) => new(Normal() * limit * noiseOverLimit, limit * noiseOverLimit);
        var normal = RuleLimits.NormalTruck.Value;
        var found = 0;
        const int vehicles = 2000;
        for (var i = 0; i < vehicles; i++)
        {
            var v = Vehicles.Truck();
            foreach (var p in v.Vehicle.Positions())
                v = v.With(p.ToString(), t => t with
                {
                    EdgeSlopeMmPer1000Km = Noise(RuleLimits.OneEdgeShare.Value * normal),
                    ShoulderMmPer1000Km = Noise(RuleLimits.ShoulderShare.Value * normal),
                    FeatherMm = Noise(RuleLimits.Feather.Value),
                    LogRateRatio = Noise(Math.Log(RuleLimits.FastWear.Value)),
                    PressureShare = new(Normal() * 0.02, 0.02),
                });
            v = v with { Steering = v.Signals() with { SteeringPullNm = Noise(RuleLimits.SteeringPull.Value), OffCentreDeg = Noise(RuleLimits.OffCentre.Value) } };
            if (GeometryRules.Find(v).Count > 0) found++;
        }
        Assert.InRange(found, 0, vehicles * atMost);
    }

    [Fact]
    public void Every_limit_has_a_unit_and_a_source() =>
        Assert.All(RuleLimits.All, l => Assert.False(string.IsNullOrWhiteSpace(l.Unit) || string.IsNullOrWhiteSpace(l.Source) || l.Value <= 0));

    [Fact]
    public void Every_check_has_words_for_every_suspension_and_no_limit_bears_two_meanings()
    {
        foreach (var check in Enum.GetValues<CheckFor>())
            foreach (var suspension in Enum.GetValues<Suspension>())
                Assert.NotEmpty(FirstCheck.For(check, suspension));
        Assert.Equal(RuleLimits.All.Count, RuleLimits.All.Select(l => l.Name).Distinct().Count());
    }
}
