using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;
using WearWatch.Storage.Facts;

namespace WearWatch.Ingest;

/// <summary>The instant answer to a survey: put before the diagnosis library with what is known of the vehicle.</summary>
internal static class SurveyJudge
{
    /// <summary>Walks before it that a survey is held against: tyres that the last one did not reach were read in one of these.</summary>
    private const int Earlier = 5;

    public static void Judge(TreadSurvey survey, FactContext context, Judgement judgement)
    {
        judgement.NeedsVehicle(context, survey.VehicleId, "survey.vehicle_id");
        if (context.Vehicle(survey.VehicleId, survey.At) is not { } vehicle) return;
        var others = context.Surveys(survey.VehicleId).Where(s => s.FactId != judgement.Replaces).ToList();
        List<TreadSurvey> earlier = [.. others.Where(s => s.At <= survey.At).TakeLast(Earlier).Select(s => s.Body)];
        var next = others.FirstOrDefault(s => s.At > survey.At)?.Body;
        var issues = Check(survey, vehicle, earlier, context, judgement.Depot);
        if (FitsHeld(survey, vehicle, others, issues, context, judgement) is { } fits) issues = fits;
        foreach (var issue in issues) Say(issue, judgement);
        if (next is null) return;
        // A late survey's distance must also lie below that of the one after it.
        foreach (var issue in Check(survey, vehicle, [next], context, judgement.Depot).Where(i => i.Field == "distance_km" && i.Weight == IssueWeight.Hold))
            Say(issue, judgement);
    }

    /// <summary>
    /// One walk that did not fit waits for its answer; the next one that fits it is not asked the same again, for two walks agree
    /// against one.
    /// </summary>
    /// <returns>What is left to say of it beside the walks that wait; null where it fits those no better.</returns>
    private static List<ReadingIssue>? FitsHeld(TreadSurvey survey, Vehicle vehicle, List<Dated<TreadSurvey>> others, IReadOnlyList<ReadingIssue> issues, FactContext context, Judgement judgement)
    {
        if (!issues.Any(Asks) || issues.Any(i => i.Weight == IssueWeight.Refuse)) return null;
        var held = context.HeldSurveys(survey.VehicleId).Select(h => h.Survey).Where(h => h.At < survey.At && !ReferenceEquals(h.Body, survey) && h.FactId != judgement.Replaces).ToList();
        if (held.Count == 0) return null;
        List<TreadSurvey> earlier = [.. others.Where(s => s.At <= survey.At).Concat(held).OrderBy(s => s.At).TakeLast(Earlier).Select(s => s.Body)];
        var beside = Check(survey, vehicle, earlier, context, judgement.Depot);
        if (beside.Any(Asks)) return null;
        return [.. beside, new ReadingIssue("fits_held", IssueWeight.Tell, "tyres", $"It fits the walk of {held[^1].At:yyyy-MM-dd}, which waits for an answer ({held[^1].FactId}).")];

        static bool Asks(ReadingIssue issue) => issue.Weight == IssueWeight.Hold;
    }

    private static IReadOnlyList<ReadingIssue> Check(TreadSurvey survey, Vehicle vehicle, IReadOnlyList<TreadSurvey> others, FactContext context, string depotId)
    {
        var fittings = context.Fittings(vehicle.VehicleId).Where(f => f.At <= survey.At).Select(f => f.Body).ToList();
        var depot = context.Depot(vehicle.Depot) ?? context.Depot(depotId);
        var limits = depot is null ? [] : context.Limits(depot.DepotId);
        var on = DateOnly.FromDateTime(survey.At.UtcDateTime);
        return SurveyCheck.Check(survey, vehicle, others, fittings,
            position => NewDepth(fittings, position, context),
            position => DepthLimits.For(depot?.Jurisdiction ?? "", vehicle, position, Last(fittings, position)?.Winter ?? false, on, limits));
    }

    private static FittingRecord? Last(IReadOnlyList<FittingRecord> fittings, Position position) =>
        fittings.LastOrDefault(f => f.Position == position && f.Event is not FittingEvent.TurnedOnRim);

    private static double? NewDepth(IReadOnlyList<FittingRecord> fittings, Position position, FactContext context) =>
        Last(fittings, position) is { Event: not FittingEvent.Removed } fitting
            ? fitting.NewDepthMm ?? (fitting.TyreId is { } id ? context.Tyre(id)?.NewDepthMm : null) : null;

    private static void Say(ReadingIssue issue, Judgement judgement)
    {
        var field = FieldOf(issue.Field);
        switch (issue.Weight)
        {
            case IssueWeight.Refuse: judgement.Refuse(issue.Code, field, issue.Message); break;
            case IssueWeight.Hold: judgement.Hold(issue.Code, field, issue.Message, Choices(issue)); break;
            default: judgement.Tell(issue.Code, field, issue.Message, issue.Code is "below_limit" or "unsafe_seen", Choices(issue)); break;
        }
    }

    private static List<RemarkChoice>? Choices(ReadingIssue issue) =>
        issue.Choices.Count == 0 ? null : [.. issue.Choices.Select(c => new RemarkChoice(ExplanationText.Write(c.Explanation), c.Explanation.Answer, Math.Round(c.Weight, 3)))];

    /// <summary>The library names fields of its record; a sender knows those of the contract.</summary>
    private static string FieldOf(string field) => "survey." + field
        .Replace(".depths", ".grooves", StringComparison.Ordinal).Replace(".depth_mm", ".depth", StringComparison.Ordinal)
        .Replace("outboard_edge_mm", "outboard_edge", StringComparison.Ordinal)
        .Replace("distance_km", "distance", StringComparison.Ordinal).Replace("resolution_mm", "resolution", StringComparison.Ordinal);
}
