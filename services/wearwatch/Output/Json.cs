using System.Text.Json;
using System.Text.Json.Nodes;
using WearWatch.Contracts.V1;
using WearWatch.Import;

namespace WearWatch.Output;

/// <summary>
/// JSON of the command, snake_case, one place for every name. Unknown is null, never zero; low and high bound 90 %.
/// </summary>
internal static class Json
{
    private static readonly JsonSerializerOptions s_indented = new() { WriteIndented = true, Encoder = System.Text.Encodings.Web.JavaScriptEncoder.UnsafeRelaxedJsonEscaping };

    public static string Text(JsonNode node) => node.ToJsonString(s_indented);

    public static JsonObject Vehicle(GetVehicleReportResponse report)
    {
        var d = report.Diagnosis;
        return new JsonObject
        {
            ["vehicle_id"] = d.VehicleId,
            ["depot"] = d.Depot,
            ["as_of"] = d.AsOf,
            ["misaligned_probability"] = Round(d.MisalignedProbability),
            ["causes"] = List(d.Causes, Cause),
            ["odds"] = List(d.Odds, o => JsonValue.Create(o)),
            ["misaligned_by_tread"] = d.HasMisalignedByTread ? Round(d.MisalignedByTread) : null,
            ["misaligned_by_steering"] = d.HasMisalignedBySteering ? Round(d.MisalignedBySteering) : null,
            ["cost_of_waiting_per_week"] = Money(d.CostOfWaitingPerWeek),
            ["net_benefit"] = Money(d.NetBenefit),
            ["steering_pull"] = Range(d.SteeringPull),
            ["off_centre_angle"] = Range(d.OffCentreAngle),
            ["tyres"] = List(d.Tyres, Tyre),
            ["findings"] = List(d.Findings, Finding),
            ["changes"] = List(d.Changes, Change),
            ["cannot_tell"] = List(d.CannotTell, c => new JsonObject { ["what"] = c.What, ["because"] = c.Because, ["would_help"] = c.WouldHelp }),
            ["below_limit"] = List(report.BelowLimit, Unsafe),
            ["survey_notes"] = List(d.SurveyNotes, n => new JsonObject { ["survey_id"] = n.SurveyId, ["note"] = n.Note }),
            ["km_per_week"] = Range(d.KmPerWeek),
            ["straight_runs"] = d.StraightRuns,
            ["job_price"] = new JsonObject { ["value"] = d.JobPrice, ["currency"] = d.NetBenefit?.Unit, ["source"] = d.JobPriceSource },
            ["facts_through"] = d.FactsThrough?.ToDateTimeOffset().ToString("yyyy-MM-ddTHH:mm:ssZ"),
            ["fleet_fit"] = d.FleetFit,
            ["method"] = d.Method,
            ["notice"] = report.Notice,
        };
    }

    public static JsonObject Worklist(WorklistPages list) => new()
    {
        ["as_of"] = list.AsOf,
        ["total"] = list.Total,
        ["below_limit"] = List(list.BelowLimit, Unsafe),
        ["vehicles"] = List(list.Vehicles, Row),
        ["gauge_first"] = List(list.GaugeFirst, g => new JsonObject { ["vehicle_id"] = g.VehicleId, ["depot"] = g.Depot, ["why"] = g.Why, ["worth"] = Money(g.Worth) }),
        ["other_matters"] = List(list.OtherMatters, m => new JsonObject
        {
            ["vehicle_id"] = m.VehicleId,
            ["depot"] = m.Depot,
            ["finding_id"] = m.FindingId,
            ["kind"] = m.Kind,
            ["sentence"] = m.Sentence,
            ["first_check"] = m.FirstCheck,
        }),
        ["notice"] = list.Notice,
    };

    private static JsonObject Row(WorklistRow r) => new()
    {
        ["vehicle_id"] = r.VehicleId,
        ["depot"] = r.Depot,
        ["as_of"] = r.AsOf,
        ["misaligned_probability"] = Round(r.MisalignedProbability),
        ["causes"] = List(r.Causes, Cause),
        ["cost_of_waiting_per_week"] = Money(r.CostOfWaitingPerWeek),
        ["net_benefit"] = Money(r.NetBenefit),
        ["rank"] = r.Rank,
        ["class"] = r.VehicleClass,
        ["listed_because"] = EnumWords.Word(r.ListedBecause),
        ["why"] = r.Why,
        ["first_check"] = r.FirstCheck,
    };

    private static JsonObject Cause(Cause c) => new()
    {
        ["quantity"] = EnumWords.Word(c.Quantity),
        ["axle"] = c.HasAxle ? c.Axle : null,
        ["side"] = Side(c.Side),
        ["value"] = Round(c.Value),
        ["low"] = Round(c.Low),
        ["high"] = Round(c.High),
        ["unit"] = c.Unit,
        ["outside_tolerance"] = c.OutsideTolerance,
        ["probability"] = Round(c.Probability),
        ["since"] = c.Since is { } s ? new JsonObject { ["likely"] = Day(s.Likely), ["earliest"] = Day(s.Earliest), ["latest"] = Day(s.Latest) } : null,
    };

    private static string? Day(string day) => day.Length > 0 ? day : null;

    private static JsonObject Tyre(TyreDiagnosis t) => new()
    {
        ["position"] = t.Position,
        ["rate_mm_per_1000_km"] = Range(t.RateMmPer1000Km),
        ["rate_borrowed"] = t.RateBorrowed,
        ["depth_mm"] = Range(t.DepthMm),
        ["remaining_km"] = Range(t.RemainingKm),
        ["limit_mm"] = t.HasLimitMm ? t.LimitMm : null,
        ["limit_source"] = t.LimitSource,
        ["limit_on"] = Dates(t.LimitOn),
        ["change_at_mm"] = t.HasChangeAtMm ? t.ChangeAtMm : null,
        ["to_change_km"] = Range(t.ToChangeKm),
        ["change_on"] = Dates(t.ChangeOn),
        ["gauge_step_mm"] = t.GaugeStepMm > 0 ? Round(t.GaugeStepMm) : null,
        ["governing_groove"] = t.HasGoverningGroove ? t.GoverningGroove : null,
        ["edge_slope_mm_per_1000_km"] = Range(t.EdgeSlopeMmPer1000Km),
        ["survey_ids"] = List(t.SurveyIds, id => JsonValue.Create(id)),
    };

    private static JsonObject? Dates(DateRange? d) => d is null ? null : new() { ["likely"] = d.Likely, ["earliest"] = d.Earliest, ["latest"] = d.Latest };

    private static JsonObject Finding(Finding f) => new()
    {
        ["id"] = f.Id,
        ["kind"] = f.Kind,
        ["axle"] = f.HasAxle ? f.Axle : null,
        ["side"] = Side(f.Side),
        ["sentence"] = f.Sentence,
        ["evidence_for"] = List(f.EvidenceFor, Evidence),
        ["evidence_against"] = List(f.EvidenceAgainst, Evidence),
        ["confounders"] = List(f.Confounders, c => new JsonObject { ["what"] = c.What, ["would_tell"] = c.WouldTell }),
        ["causes"] = List(f.Causes, q => JsonValue.Create(EnumWords.Word(q))),
        ["first_check"] = f.FirstCheck,
        ["alignment_mends"] = f.AlignmentMends,
        ["caution"] = f.Caution.Length > 0 ? f.Caution : null,
        ["opened_at"] = f.OpenedAt?.ToDateTimeOffset().ToString("yyyy-MM-ddTHH:mm:ssZ"),
        ["opened_because"] = f.OpenedBecause,
    };

    private static JsonObject Change(Change c) => new()
    {
        ["quantity"] = c.Quantity,
        ["form"] = c.Form,
        ["axle"] = c.HasAxle ? c.Axle : null,
        ["from"] = Time(c.From),
        ["to"] = Time(c.To),
        ["likely"] = Time(c.Likely),
        ["size"] = Range(c.Size),
        ["before"] = Round(c.Before),
        ["after"] = Round(c.After),
        ["trips_before"] = c.TripsBefore,
        ["trips_after"] = c.TripsAfter,
        ["happened"] = List(c.Happened, e => new JsonObject { ["kind"] = e.Kind, ["at"] = Time(e.At), ["what"] = e.What, ["rests_on"] = e.RestsOn }),
        ["provisional"] = c.Provisional,
        ["published"] = c.Published,
        ["rests_on"] = List(c.RestsOn, id => JsonValue.Create(id)),
    };

    private static string? Time(Google.Protobuf.WellKnownTypes.Timestamp? at) => at?.ToDateTimeOffset().ToString("yyyy-MM-ddTHH:mm:ssZ");

    private static JsonObject Evidence(Evidence e) => new() { ["statement"] = e.Statement, ["rests_on"] = List(e.RestsOn, id => JsonValue.Create(id)) };

    private static JsonObject Unsafe(UnsafeTyre u) => new()
    {
        ["vehicle_id"] = u.VehicleId,
        ["depot"] = u.Depot,
        ["position"] = u.Position,
        ["depth_mm"] = u.HasDepthMm ? u.DepthMm : null,
        ["limit_mm"] = u.HasLimitMm ? u.LimitMm : null,
        ["limit_source"] = u.LimitSource,
        ["survey_id"] = u.SurveyId,
        ["measured_at"] = u.MeasuredAt?.ToDateTimeOffset().ToString("yyyy-MM-ddTHH:mm:ssZ"),
        ["held"] = u.Held,
        ["sentence"] = u.Sentence,
        ["shown_to"] = u.ShownTo.Length > 0 ? u.ShownTo : null,
    };

    public static JsonObject? Range(Contracts.V1.Range? r) => r is null ? null : new() { ["value"] = Round(r.Value), ["low"] = Round(r.Low), ["high"] = Round(r.High), ["unit"] = r.Unit };

    private static JsonObject? Money(Contracts.V1.Range? r) => r is null ? null : new() { ["value"] = Math.Round(r.Value, 2), ["low"] = Math.Round(r.Low, 2), ["high"] = Math.Round(r.High, 2), ["currency"] = r.Unit };

    private static string? Side(Side side) => side switch { Contracts.V1.Side.Left => "L", Contracts.V1.Side.Right => "R", _ => null };

    /// <summary>Four significant digits: no figure here is known better.</summary>
    private static double Round(double value)
    {
        if (value == 0 || !double.IsFinite(value)) return 0;
        var digits = 3 - (int)Math.Floor(Math.Log10(Math.Abs(value)));
        return digits >= 0 ? Math.Round(value, Math.Min(digits, 12)) : Math.Round(value);
    }

    private static JsonArray List<T>(IEnumerable<T> items, Func<T, JsonNode?> map) => [.. items.Select(map)];
}
