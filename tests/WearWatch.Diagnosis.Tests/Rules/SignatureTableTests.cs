using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;

namespace WearWatch.Diagnosis.Tests.Rules;

/// <summary>
/// The whole table of wear signatures and of steering signals: one example a row, the finding it must give, what stands first among the
/// causes and whether an alignment mends it; the same vehicle seen in a mirror must give the same with its sides changed over. Rows are
/// common practice, no source, where <see cref="SignatureTests"/> names none.
/// </summary>
public class SignatureTableTests
{
    /// <param name="Of">Table and row.</param>
    /// <param name="Example">A vehicle that shows it.</param>
    /// <param name="Kind">Finding.</param>
    /// <param name="First">First cause; null where no quantity is named.</param>
    /// <param name="Mends">Whether an alignment mends it.</param>
    /// <param name="Names">Word for the angle that two agreeing evidences name in the sentence; null where none may be named.</param>
    public sealed record Row(string Of, VehicleFigures Example, FindingKind Kind, Quantity? First, bool Mends, string? Names = null);

    private static VehicleFigures Trailer(int[] axles, double[] signs) => axles.Zip(signs)
        .Aggregate(Vehicles.Trailer(), (t, a) => t.Edge($"{a.First}L", -0.03 * a.Second, 0.005).Edge($"{a.First}R", 0.03 * a.Second, 0.005));

    private static VehicleFigures Seeing(VehicleFigures vehicle, Seen seen, params string[] positions) =>
        positions.Aggregate(vehicle, (v, p) => v.With(p, t => t with { Seen = [seen] }));

    private static VehicleFigures Braking(VehicleFigures vehicle, double newtonMetres) => vehicle with { Steering = vehicle.Signals() with { BrakePullNm = new(newtonMetres, 0.1) } };

    private static readonly Row[] Rows =
    [
        new("wear 1: both outer shoulders, fin inboard", Vehicles.Van().Edge("1L", 0.08).Edge("1R", 0.07).Feather("1L", 0.6).Feather("1R", 0.5), FindingKind.OneEdgeWear, Quantity.FrontTotalToe, true, "toe-in"),
        new("wear 2: both outer shoulders, no fin", Vehicles.Van().Edge("1L", 0.08).Edge("1R", 0.08).Feather("1L", 0.0, 0.08).Feather("1R", 0.05, 0.08), FindingKind.OneEdgeWear, Quantity.Duty, false),
        new("wear 2: the same on every axle of a bus", Vehicles.Bus().Edge("1L", 0.08).Edge("1R", 0.08).Edge("2LO", 0.06).Edge("2RO", 0.06), FindingKind.OneEdgeWear, Quantity.Duty, false),
        new("wear 3: both inner shoulders, fin outboard", Vehicles.Van().Edge("1L", -0.08).Edge("1R", -0.07).Feather("1L", -0.6).Feather("1R", -0.5), FindingKind.OneEdgeWear, Quantity.FrontTotalToe, true, "toe-out"),
        new("wear 4: one outer, other inner", Vehicles.Truck().Edge("1L", 0.04, 0.005).Edge("1R", -0.035, 0.005), FindingKind.OneEdgeWear, Quantity.Thrust, true),
        new("wear 5: one wheel one shoulder, struts", Vehicles.Van().Edge("1L", 0.12).Edge("1R", 0.005), FindingKind.OneEdgeWear, Quantity.Camber, false),
        new("wear 6: one wheel feathered in, mate out", Vehicles.Van().Feather("1L", 0.9).Feather("1R", -0.9), FindingKind.Feathering, Quantity.FrontTotalToe, true),
        new("wear 7: both shoulders", Vehicles.Van().With("2L", t => t with { ShoulderMmPer1000Km = new(0.1, 0.02), PressureShare = new(-0.05, 0.02) }), FindingKind.ShoulderWear, Quantity.Pressure, false),
        new("wear 8: centre", Vehicles.Van().With("2L", t => t with { ShoulderMmPer1000Km = new(-0.1, 0.02) }), FindingKind.CentreWear, Quantity.Pressure, false),
        new("wear 9: heel and toe", Seeing(Vehicles.Truck(), Seen.HeelToe, "2LO", "2LI", "2RO", "2RI"), FindingKind.HeelToe, Quantity.Duty, false),
        new("wear 10: cupping", Vehicles.Van().With("1R", t => t with { RoundVariationMm = new(0.9, 0.1), Seen = [Seen.Cupped] }), FindingKind.Cupping, Quantity.Damper, false),
        new("wear 11: diagonal wipe", Vehicles.Trailer().Feather("2L", 0.6).With("2L", t => t with { RoundVariationMm = new(0.9, 0.1) }), FindingKind.DiagonalWear, Quantity.RearTotalToe, false),
        new("wear 12: flat spot", Seeing(Vehicles.Van(), Seen.FlatSpot, "2L"), FindingKind.FlatSpot, null, false),
        new("wear 13: rib depression", Seeing(Vehicles.Trailer(), Seen.RibDepression, "1L", "1R"), FindingKind.RibWear, Quantity.Pressure, false),
        new("wear 14: river wear", Seeing(Vehicles.Trailer(), Seen.RiverWear, "1L"), FindingKind.RibWear, Quantity.Duty, false),
        new("wear 15: inner duals inboard, both sides", Vehicles.Truck().Edge("2LI", -0.04, 0.005).Edge("2RI", -0.04, 0.005), FindingKind.OneEdgeWear, Quantity.Camber, false, "camber"),
        new("wear 16: depth gap within a dual pair", Vehicles.Truck().With("2LO", t => t with { RemainingMm = new(10, 0.1) }).With("2LI", t => t with { RemainingMm = new(6.5, 0.1) }), FindingKind.DepthGap, null, false),
        new("wear 16: one dual wears fast", Vehicles.Truck().With("2LO", t => t with { LogRateRatio = new(0.9, 0.1) }).With("2LI", t => t with { LogRateRatio = new(0, 0.1) }), FindingKind.FastWear, Quantity.Pressure, false),
        new("wear 17: all trailer tyres one way", Trailer([1, 2, 3], [1, 1, 1]), FindingKind.AxleSkew, Quantity.TrailerSkew, true, "pointing left"),
        new("wear 18: trailer axles 1 and 3 opposite", Trailer([1, 3], [1, -1]), FindingKind.AxleSkew, Quantity.Duty, false),

        new("signals: camber split", Vehicles.Van().Pull(0.8).Edge("1R", 0.1).Edge("1L", 0.0), FindingKind.SteeringPull, Quantity.CamberSplit, true, "camber"),
        new("signals: caster split", Vehicles.Truck().Pull(-1.5).Returning(5, 3), FindingKind.UnevenReturn, Quantity.CasterSplit, true, "less caster on the left"),
        new("signals: caster split on struts that cannot be set", Vehicles.Van().Pull(-0.8).Returning(5, 3), FindingKind.UnevenReturn, Quantity.CasterSplit, false, "less caster on the left"),
        new("signals: uneven return alone", Vehicles.Van().Returning(-5, -3), FindingKind.UnevenReturn, Quantity.CasterSplit, false),
        new("signals: front toe split or sensor zero", Vehicles.Van().OffCentre(4.8), FindingKind.OffCentreWheel, Quantity.SensorZeroOrFrontToeSplit, false),
        new("signals: rear thrust", Vehicles.Van().OffCentre(4.8).Edge("2L", -0.08).Edge("2R", 0.08), FindingKind.OffCentreWheel, Quantity.Thrust, true, "rear axle pointing left"),
        new("signals: brake drag", Braking(Vehicles.Van().Pull(0.8), -0.9), FindingKind.BrakeDrag, Quantity.Drag, false),
        new("signals: pressure split", Vehicles.Van().Pull(0.8).With("1R", t => t with { PressureShare = new(-0.18, 0.02) }).With("1L", t => t with { PressureShare = new(0, 0.02) }), FindingKind.SteeringPull, Quantity.Pressure, false),
        new("signals: pull by the tyre's construction or a split", Vehicles.Van().Pull(0.8), FindingKind.SteeringPull, Quantity.CamberSplit, true),
        new("signals: binding", Vehicles.Van().Returning(6, -6), FindingKind.SteeringBinds, null, false),
        new("signals: worn damper with wheel hop", Vehicles.Van().Hopping(0.4, 0.7), FindingKind.WheelHop, Quantity.Damper, false),
        new("signals: one-way duty", Vehicles.Bus().Turning(900, 300).Edge("1L", -0.06).Edge("1R", 0.06), FindingKind.OneWayDuty, Quantity.Duty, false),
    ];

    public static TheoryData<string> Names => [.. Rows.Select(r => r.Of)];

    private static Finding FindingOf(VehicleFigures figures, Row row) =>
        GeometryRules.Find(figures).Where(f => f.Kind == row.Kind).OrderBy(f => f.Axle).First();

    [Theory]
    [MemberData(nameof(Names))]
    public void Row_of_the_table(string name)
    {
        var row = Rows.First(r => r.Of == name);
        var finding = FindingOf(row.Example, row);
        Assert.Equal(row.First, finding.Causes.Count == 0 ? null : finding.Causes[0]);
        Assert.Equal(row.Mends, finding.AlignmentMends);
        Assert.NotEmpty(finding.Confounders);
        Assert.NotEmpty(finding.FirstCheck);
        if (row.Names is not { } names) Assert.DoesNotMatch("toe-|camber|caster|pointing", finding.Sentence);
        else
        {
            Assert.Contains(names, finding.Sentence, StringComparison.Ordinal);
            Assert.True(finding.EvidenceFor.Count >= 2);
        }
    }

    [Theory]
    [MemberData(nameof(Names))]
    public void The_mirrored_vehicle_has_the_mirrored_finding(string name)
    {
        static string Swapped(string text) => text.Replace("left", "#", StringComparison.Ordinal).Replace("right", "left", StringComparison.Ordinal).Replace("#", "right", StringComparison.Ordinal);
        var row = Rows.First(r => r.Of == name);
        var (here, there) = (FindingOf(row.Example, row), FindingOf(row.Example.Mirrored(), row));
        Assert.Equal(here.Side is { } s ? (s == Side.Left ? Side.Right : Side.Left) : null, there.Side);
        Assert.Equal(here.Causes, there.Causes);
        Assert.Equal(here.AlignmentMends, there.AlignmentMends);
        Assert.Equal(here.Strength, there.Strength, 9);
        Assert.Equal((here.EvidenceFor.Count, here.EvidenceAgainst.Count), (there.EvidenceFor.Count, there.EvidenceAgainst.Count));
        if (row.Names is { } names) Assert.Contains(Swapped(names), there.Sentence, StringComparison.Ordinal);
    }

    [Fact]
    public void Every_kind_of_finding_but_safety_and_dates_has_a_row()
    {
        FindingKind[] elsewhere = [FindingKind.BelowLimit, FindingKind.UnsafeTyre, FindingKind.Unusual, FindingKind.SteeringPullChange, FindingKind.OffCentreChange, FindingKind.WearRateChange, FindingKind.PressureOff];
        Assert.Empty(Enum.GetValues<FindingKind>().Except(elsewhere).Except(Rows.Select(r => r.Kind)));
    }

    [Fact]
    public void Roll_is_not_named_where_the_rib_edges_speak_for_toe()
    {
        var bus = Vehicles.Bus().Edge("1L", 0.08).Edge("1R", 0.08).Edge("2LO", 0.06).Edge("2RO", 0.06).Feather("1L", 0.6).Feather("1R", 0.6);
        var front = GeometryRules.Find(bus).First(f => f.Kind == FindingKind.OneEdgeWear && f.Axle == 1);
        Assert.Equal(Quantity.FrontTotalToe, front.Causes[0]);
        Assert.True(front.AlignmentMends);
    }

    [Fact]
    public void Caster_is_not_named_where_a_steer_tyre_speaks_for_camber()
    {
        var finding = GeometryRules.Find(Vehicles.Truck().Pull(-1.5).Returning(5, 3).Edge("1L", 0.1).Edge("1R", 0.0)).Only(FindingKind.UnevenReturn);
        Assert.DoesNotContain("caster", finding.Sentence, StringComparison.Ordinal);
        Assert.Equal(Quantity.CamberSplit, finding.Causes[0]);
        Assert.NotEmpty(finding.EvidenceAgainst);
    }

    [Fact]
    public void A_pull_that_only_weakens_a_little_under_braking_is_no_dragging_brake() =>
        Assert.DoesNotContain(GeometryRules.Find(Braking(Vehicles.Van().Pull(0.8), -0.3)), f => f.Kind == FindingKind.BrakeDrag);

    [Fact]
    public void Wheel_hop_beside_cupping_is_evidence_of_one_finding_and_not_two()
    {
        var findings = GeometryRules.Find(Vehicles.Van().Hopping(0.4, 0.7).With("1R", t => t with { RoundVariationMm = new(0.9, 0.1) }));
        Assert.DoesNotContain(findings, f => f.Kind == FindingKind.WheelHop);
        Assert.Contains(findings.Only(FindingKind.Cupping).EvidenceFor, e => e.Statement.Contains("8 and 16 Hz", StringComparison.Ordinal));
    }
}
