using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Tread;

/// <summary>What a survey says once someone has answered the questions that it raised. The survey on record stays as it was sent.</summary>
public static class SurveyAnswers
{
    /// <summary>How long before the walk a change that nobody recorded is taken to have been made: all that is known is that it lay before.</summary>
    private static readonly TimeSpan s_before = TimeSpan.FromMinutes(1);

    /// <summary>Whether an answer settles a question.</summary>
    /// <param name="choices">What was offered.</param>
    /// <param name="answer">What was answered; it need not be among the choices, only about the same tyre or the same thing.</param>
    public static bool Settles(IReadOnlyList<Explanation> choices, Explanation answer)
    {
        if (choices.Contains(answer) || answer is { Kind: ExplanationKind.OtherVehicle } or { Kind: ExplanationKind.AsWritten, Position: null }) return true;
        var (asked, given) = (Subject(choices), Subject([answer]));
        return asked == given || (given is null && asked != Distance && !IsDistance(answer));
    }

    private const string Distance = "distance";

    private static bool IsDistance(Explanation e) => e.Kind is ExplanationKind.CounterReplaced or ExplanationKind.DistanceMistyped;

    /// <summary>The tyre that a question is about, the distance, or null for the survey as a whole.</summary>
    private static string? Subject(IReadOnlyList<Explanation> choices) =>
        choices.Any(IsDistance) ? Distance
        : choices.Any(c => c.Kind is ExplanationKind.SidesSwapped or ExplanationKind.AxleSidesSwapped or ExplanationKind.AxlesSwapped or ExplanationKind.PositionsExchanged
            or ExplanationKind.ThirtySecondsTakenForMm or ExplanationKind.MmTakenForThirtySeconds or ExplanationKind.OtherVehicle) ? null
        : choices.Select(c => c.Position?.ToString()).FirstOrDefault(p => p is not null);

    /// <summary>The answers that count of several decisions, the oldest first: a later answer about the same thing replaces an earlier one, a plain 'as written' all of them.</summary>
    public static IReadOnlyList<Explanation> Merge(IEnumerable<IReadOnlyList<Explanation>> decisions)
    {
        var kept = new List<Explanation>();
        foreach (var decision in decisions)
        {
            if (decision.Any(e => e is { Kind: ExplanationKind.AsWritten, Position: null } or { Kind: ExplanationKind.OtherVehicle })) kept.Clear();
            var subjects = decision.Select(e => Subject([e])).ToHashSet();
            kept.RemoveAll(e => subjects.Contains(Subject([e])));
            kept.AddRange(decision);
        }
        return kept;
    }

    /// <summary>The survey as it is to be read; null where it is none of this vehicle's.</summary>
    public static TreadSurvey? Read(TreadSurvey survey, IReadOnlyList<Explanation> answers)
    {
        if (answers.Count == 0) return survey;
        if (answers.Any(a => a.Kind == ExplanationKind.OtherVehicle)) return null;
        return answers.Aggregate(survey, Read) with { Confirmed = true };
    }

    private static TreadSurvey Read(TreadSurvey survey, Explanation answer) => answer.Kind switch
    {
        _ when answer.Moved => survey,
        ExplanationKind.CounterReplaced => survey with { CounterReplaced = true },
        ExplanationKind.DistanceMistyped => survey with { DistanceKm = null, DistanceSource = DistanceSource.None },
        ExplanationKind.ThirtySecondsTakenForMm or ExplanationKind.MmTakenForThirtySeconds =>
            survey with { ResolutionMm = survey.ResolutionMm * answer.Factor, Tyres = [.. survey.Tyres.Select(t => Depths(t, d => d with { DepthMm = d.DepthMm * answer.Factor, OutboardEdgeMm = d.OutboardEdgeMm * answer.Factor }))] },
        ExplanationKind.GrooveMistyped => At(survey, answer.Position, t => t with
        {
            Depths = answer.MeantMm is { } mm ? [.. t.Depths.Select(d => d.Groove == answer.Groove ? d with { DepthMm = mm } : d)] : [.. t.Depths.Where(d => d.Groove != answer.Groove)],
        }),
        ExplanationKind.ReadOnWearBar => At(survey, answer.Position, t => t with { Depths = [.. t.Depths.Where(d => d.Groove != answer.Groove)] }),
        ExplanationKind.TyreMisread => At(survey, answer.Position, t => t with { Depths = [] }),
        _ => survey with { Tyres = [.. survey.Tyres.Select(t => (answer.Reverses(t.Position) ? Reversed(t) : t) with { Position = answer.Belongs(t.Position) })] },
    };

    private static TreadSurvey At(TreadSurvey survey, Position? position, Func<TyreReadings, TyreReadings> change) =>
        survey with { Tyres = [.. survey.Tyres.Select(t => t.Position == position ? change(t) : t)] };

    private static TyreReadings Depths(TyreReadings tyre, Func<GrooveDepth, GrooveDepth> change) => tyre with { Depths = [.. tyre.Depths.Select(change)] };

    private static TyreReadings Reversed(TyreReadings tyre)
    {
        var grooves = tyre.Depths.Count == 0 ? 0 : tyre.Depths.Max(d => d.Groove);
        return Depths(tyre, d => d.Groove == 0 ? d : d with { Groove = grooves + 1 - d.Groove, OutboardEdgeMm = -d.OutboardEdgeMm });
    }

    /// <summary>What the answers say was done to the tyres before the walk, without those that were recorded after all: a late record replaces an answer.</summary>
    /// <param name="survey">The survey as sent.</param>
    /// <param name="answers">What was answered.</param>
    /// <param name="previous">The walk before it.</param>
    /// <param name="recorded">What was recorded of the vehicle's tyres.</param>
    public static IEnumerable<FittingRecord> Fittings(TreadSurvey survey, IReadOnlyList<Explanation> answers, DateTimeOffset? previous, IReadOnlyList<FittingRecord> recorded)
    {
        foreach (var done in answers.SelectMany(a => Done(survey, a)))
        {
            var since = previous ?? DateTimeOffset.MinValue;
            if (!recorded.Any(r => r.At > since && r.At <= survey.At && (r.Position == done.Position || r.FromPosition == done.Position))) yield return done;
        }
    }

    private static IEnumerable<FittingRecord> Done(TreadSurvey survey, Explanation answer)
    {
        FittingRecord At(Position position, FittingEvent what, Position? from = null) => new() { VehicleId = survey.VehicleId, At = survey.At - s_before, Event = what, Position = position, FromPosition = from };
        FittingEvent? what = answer.Kind switch
        {
            ExplanationKind.TyreChanged => FittingEvent.Fitted,
            ExplanationKind.Regrooved => FittingEvent.Regrooved,
            ExplanationKind.TurnedOnRim => FittingEvent.TurnedOnRim,
            _ => null,
        };
        if (what is { } event_ && answer.Position is { } position) yield return At(position, event_);
        if (!answer.Moved) yield break;
        foreach (var tyre in survey.Tyres.Where(t => answer.Belongs(t.Position) != t.Position)) yield return At(tyre.Position, FittingEvent.Moved, answer.Belongs(tyre.Position));
    }
}
