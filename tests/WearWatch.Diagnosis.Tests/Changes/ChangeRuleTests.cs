using WearWatch.Diagnosis.Changes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Tests.Rules;

namespace WearWatch.Diagnosis.Tests.Changes;

public class ChangeRuleTests
{
    private static readonly DateTimeOffset s_day = new(2026, 9, 7, 10, 20, 0, TimeSpan.Zero);

    private static DatedChange Change(ChangeQuantity quantity, double size, double error, params ChangeEvent[] happened) => new()
    {
        Quantity = quantity,
        Form = ChangeForm.Sudden,
        Axle = quantity == ChangeQuantity.WearRate ? 2 : null,
        From = s_day,
        To = s_day.AddDays(5),
        Likely = s_day.AddDays(2),
        Size = new(size, error),
        Before = 0.2,
        After = 0.2 + size,
        TripsBefore = 20,
        TripsAfter = 11,
        Happened = happened,
        Rests = ["stream-a/3"],
    };

    private static VehicleFigures Van(params DatedChange[] changes) => Vehicles.Van() with { Changes = changes };

    [Fact]
    public void A_sure_step_of_the_wheel_is_told_with_date_size_and_that_nothing_was_recorded()
    {
        var finding = Assert.Single(GeometryRules.Find(Van(Change(ChangeQuantity.OffCentreAngle, 3.5, 0.2))));
        Assert.Equal(FindingKind.OffCentreChange, finding.Kind);
        Assert.Equal(Side.Left, finding.Side);
        Assert.Contains("3.5 deg (90 % 3.2 to 3.8) to the left, between 2026-09-07 and 2026-09-12 (90 %); nothing was recorded then.", finding.Sentence, StringComparison.Ordinal);
        Assert.True(finding.AlignmentMends);
        Assert.Contains("kerb", finding.FirstCheck, StringComparison.Ordinal);
        Assert.NotEmpty(finding.Caution!);
    }

    [Fact]
    public void A_step_with_new_steer_tyres_is_the_tyres_and_no_alignment_mends_it()
    {
        var finding = Assert.Single(GeometryRules.Find(Van(Change(ChangeQuantity.SteeringPull, 0.6, 0.05, new ChangeEvent(EventKind.SteerTyres, s_day, "tyres fitted at 1L, 1R", "f-1")))));
        Assert.Equal(FindingKind.SteeringPullChange, finding.Kind);
        Assert.Equal(Side.Right, finding.Side);
        Assert.False(finding.AlignmentMends);
        Assert.Equal(Quantity.Conicity, finding.Causes[0]);
        Assert.Contains("tyres fitted at 1L, 1R (2026-09-07)", finding.Sentence, StringComparison.Ordinal);
        Assert.Contains(finding.EvidenceFor, e => e.Rests.Contains("f-1"));
    }

    [Theory]
    [InlineData(-3, false)]
    [InlineData(3, true)]
    public void Work_that_brought_the_wheel_nearer_to_straight_needs_no_more_work(double size, bool mends)
    {
        var change = Change(ChangeQuantity.OffCentreAngle, size, 0.2, new ChangeEvent(EventKind.Workshop, s_day, "workshop visit, adjusted", "w-1")) with { Before = 3, After = 3 + size };
        Assert.Equal(mends, Assert.Single(GeometryRules.Find(Van(change))).AlignmentMends);
    }

    [Fact]
    public void A_small_a_vague_and_an_old_change_are_not_told()
    {
        Assert.Empty(GeometryRules.Find(Van(Change(ChangeQuantity.OffCentreAngle, 1.5, 0.05))));
        Assert.Empty(GeometryRules.Find(Van(Change(ChangeQuantity.OffCentreAngle, 4, 2))));
        Assert.Empty(GeometryRules.Find(Van(Change(ChangeQuantity.OffCentreAngle, 4, 0.2) with { From = s_day.AddDays(-400), To = s_day.AddDays(-390), Likely = s_day.AddDays(-395) })));
    }

    [Fact]
    public void The_torsion_bar_alone_is_told_from_half_the_size()
    {
        var van = Van(Change(ChangeQuantity.SteeringPull, 0.2, 0.02));
        Assert.Empty(GeometryRules.Find(van));
        Assert.Single(GeometryRules.Find(van with { Steering = van.Signals() with { TorqueIncludesAssist = false } }));
    }

    [Fact]
    public void Mirroring_the_change_mirrors_the_finding()
    {
        var (a, b) = (Assert.Single(GeometryRules.Find(Van(Change(ChangeQuantity.SteeringPull, 0.6, 0.05)))), Assert.Single(GeometryRules.Find(Van(Change(ChangeQuantity.SteeringPull, -0.6, 0.05)))));
        Assert.Equal((Side.Right, Side.Left), (a.Side!.Value, b.Side!.Value));
        Assert.Equal(a.Sentence.Replace("right", "left", StringComparison.Ordinal), b.Sentence);
        Assert.Equal(a.Strength, b.Strength);
    }

    [Fact]
    public void The_latest_of_several_speaks_and_the_others_stand_in_the_evidence()
    {
        var earlier = Change(ChangeQuantity.OffCentreAngle, -2.5, 0.2) with { From = s_day.AddDays(-60), To = s_day.AddDays(-55), Likely = s_day.AddDays(-57) };
        var finding = Assert.Single(GeometryRules.Find(Van(earlier, Change(ChangeQuantity.OffCentreAngle, 3.5, 0.2))));
        Assert.Contains("3.5 deg", finding.Sentence, StringComparison.Ordinal);
        Assert.Equal(2, finding.EvidenceFor.Count);
    }

    [Fact]
    public void A_provisional_change_says_so() =>
        Assert.Contains("provisional", Assert.Single(GeometryRules.Find(Van(Change(ChangeQuantity.OffCentreAngle, 3.5, 0.2) with { Provisional = true }))).Sentence, StringComparison.Ordinal);

    [Fact]
    public void A_change_of_wear_names_its_axle()
    {
        var finding = Assert.Single(GeometryRules.Find(Van(Change(ChangeQuantity.WearRate, 0.9, 0.2))));
        Assert.Equal((FindingKind.WearRateChange, 2), (finding.Kind, finding.Axle!.Value));
        Assert.Contains("90 % of the normal rate", finding.Sentence, StringComparison.Ordinal);
    }

    [Fact]
    public void Every_limit_of_changes_has_a_unit_and_a_source() =>
        Assert.All(ChangeLimits.All, l => Assert.False(string.IsNullOrWhiteSpace(l.Unit) || string.IsNullOrWhiteSpace(l.Source) || l.Value <= 0));

    [Fact]
    public void Work_on_both_steer_tyres_on_one_day_is_one_event()
    {
        FittingRecord Fitted(string position) => new() { VehicleId = "van-1", At = s_day, Event = FittingEvent.Fitted, Position = Position.Parse(position) };
        var events = ChangeEvents.Of(Vehicles.Van().Vehicle, [("f-2", Fitted("1R")), ("f-1", Fitted("1L")), ("f-3", Fitted("2L"))], [("w-1", new WorkshopRecord { VehicleId = "van-1", At = s_day.AddDays(1), Result = WorkshopResult.Adjusted })]);
        Assert.Equal([EventKind.SteerTyres, EventKind.OtherTyres, EventKind.Workshop], events.Select(e => e.Kind));
        Assert.Equal("tyres fitted at 1L, 1R", events[0].Words);
        Assert.Equal("f-1", events[0].Rests);
    }
}
