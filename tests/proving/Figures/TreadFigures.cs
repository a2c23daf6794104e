using System.Globalization;
using WearWatch.Contracts.V1;
using WearWatch.Proving.Run;
using WearWatch.Proving.Scoring;

namespace WearWatch.Proving.Figures;

/// <summary>What the gauge alone is asked: how far each tyre still goes, and what went wrong in the readings.</summary>
internal static class TreadFigures
{
    /// <summary>Surveys of a tyre on its position from which its distance is judged.</summary>
    private const int FromSurvey = 3;

    /// <summary>Nearer to the limit than this an error relative to the true distance says nothing, km.</summary>
    private const double LeastKm = 1000;

    private const double SwapErrors = 4;

    /// <summary>A tyre with its true distance left from the survey the answer counts from, and an answer.</summary>
    private readonly record struct Distance(double TrueKm, int Surveys, double? Value, double Low, double High)
    {
        public bool Holds => Value is not null && Low <= TrueKm && TrueKm <= High;
        public double Error => Value is { } v ? Math.Abs(v - TrueKm) / TrueKm : double.NaN;
    }

    public static Report Of(IReadOnlyList<Case> cases) => new()
    {
        Part = "tread",
        Main =
        [
            .. Distances(cases, Product),
            ("swap_found", Surveys(cases, s => s.Blunder == "swapped_sides" && s.Walk.LeftRightErrors >= SwapErrors, Swapped)),
            ("swap_false_alarms", Surveys(cases, s => s.Blunder is not "swapped_sides", Swapped)),
            ("unit_found", Surveys(cases, s => s.Blunder == "unit_mix_up", said => said.Contains("32nds of an inch", StringComparison.Ordinal))),
            ("tyre_change_found", Events(cases, e => e.Axle is not null)),
            ("tyre_move_found", Events(cases, e => e.Axle is null)),
            ("unrecorded_false_alarms", Bootstrap.Of([.. cases.Where(c => c.Truth.UnrecordedEvents.Count == 0)], l => Scores.Share(l, c => Inferred(c).Any()))),
            ("one_edge_on_sound", OneEdge(cases.Where(c => !c.Truth.Misaligned))),
            ("one_edge_on_sound_without_lookalike", OneEdge(cases.Where(c => !c.Truth.Misaligned && c.Truth.Lookalikes.Count == 0))),
        ],
        Baselines = [("straight_line_per_tyre", Distances(cases, Plain)), ("product_on_the_same_tyres", Distances(cases, c => Product(c).Where(t => Plain(c).Any(p => p.Position == t.Position))))],
        Splits =
        [
            ("by_surveys_of_the_tyre", [.. new[] { 1, 2, 3 }.Select(n => (n == FromSurvey ? "3 or more" : $"{n}", Distances(cases, c => Product(c), s => n == FromSurvey ? s >= n : s == n)))]),
            ("by_class", Report.Split(cases, c => c.Truth.Class, l => Distances(l, Product))),
            ("by_witness", Report.Split(cases, c => c.Truth.Signals, l => Distances(l, Product))),
            ("by_severity", Report.Split(cases, c => c.Truth.Stratum, l => Distances(l, Product))),
            ("by_traffic_side", Report.Split(cases, c => c.Truth.TrafficSide, l => Distances(l, Product))),
        ],
    };

    private static FigureList Distances(IReadOnlyList<Case> cases, Func<Case, IEnumerable<(string Position, Distance Distance)>> answers, Func<int, bool>? surveys = null)
    {
        List<Distance> Judged(Case c) => [.. answers(c).Select(a => a.Distance).Where(d => surveys is null ? d.Surveys >= FromSurvey : surveys(d.Surveys))];
        var units = cases.Select(Judged).Where(l => l.Count > 0).ToList();
        return
        [
            ("remaining_distance_coverage", Bootstrap.Of(units, l => Scores.Share(l.SelectMany(u => u).Where(d => d.Value is not null), d => d.Holds), u => u.Count(d => d.Value is not null))),
            ("remaining_distance_median_error", Bootstrap.Of(units, l => Scores.Median(l.SelectMany(u => u).Where(d => d.TrueKm >= LeastKm).Select(d => d.Error)), u => u.Count(d => d.Value is not null && d.TrueKm >= LeastKm))),
            ("remaining_distance_median_width", Bootstrap.Of(units, l => Scores.Median(l.SelectMany(u => u).Where(d => d.TrueKm >= LeastKm && d.Value is not null).Select(d => (d.High - d.Low) / d.TrueKm)), u => u.Count(d => d.Value is not null && d.TrueKm >= LeastKm))),
            ("remaining_distance_unanswered", Bootstrap.Of(units, l => Scores.Share(l.SelectMany(u => u), d => d.Value is null), u => u.Count)),
        ];
    }

    private static IEnumerable<(string Position, Distance Distance)> Product(Case c)
    {
        foreach (var tyre in c.Truth.Tyres)
        {
            var said = c.Diagnosis?.Tyres.FirstOrDefault(t => t.Position == tyre.Position);
            if (said is null || LastWalk(c, said.SurveyIds) is not { } last) continue;
            if (TrueAt(c, tyre, last) is not { } truth) continue;
            var km = said.RemainingKm;
            yield return (tyre.Position, new(truth.Km, truth.Surveys, km?.Value, km?.Low ?? 0, km?.High ?? 0));
        }
    }

    private static IEnumerable<(string Position, Distance Distance)> Plain(Case c)
    {
        foreach (var tyre in c.Truth.Tyres)
        {
            var line = c.Plain.Tyres.FirstOrDefault(t => t.Position == tyre.Position);
            if (line is null || LastWalk(c, [line.LastSurveyId]) is not { } last || TrueAt(c, tyre, last) is not { } truth) continue;
            var nearest = line.Grooves.Select(g => g.Remaining(tyre.LimitMm)).OfType<(double Value, double Low, double High)>().OrderBy(r => r.Value).Cast<(double Value, double Low, double High)?>().FirstOrDefault();
            yield return (tyre.Position, new(truth.Km, truth.Surveys, nearest?.Value, nearest?.Low ?? 0, nearest?.High ?? 0));
        }
    }

    private static TrueSurvey? LastWalk(Case c, IEnumerable<string> surveyIds) => surveyIds.Select(id => c.Truth.Surveys.FirstOrDefault(s => s.SurveyId == id)).OfType<TrueSurvey>().MaxBy(s => s.Date);

    /// <summary>
    /// True distance left from a survey: that at the end of the window plus what was run since. Null where the tyre came to
    /// its position only after that survey, so that nobody can know of it.
    /// </summary>
    private static (double Km, int Surveys)? TrueAt(Case c, TrueTyre tyre, TrueSurvey last)
    {
        if (last.OdometerKm <= tyre.SinceKm) return null;
        var axle = tyre.Position[0] - '0';
        var surveys = c.Truth.Surveys.Count(s => s.OdometerKm > tyre.SinceKm && s.Axles >= axle && s.Date <= last.Date);
        return (tyre.RemainingKm + tyre.OdometerKm - last.OdometerKm, surveys);
    }

    private static bool Swapped(string said) => said.Contains("Left and right look exchanged", StringComparison.Ordinal);

    /// <summary>Share of surveys of a kind, a vehicle's first left out, of which something is said.</summary>
    private static Figure Surveys(IReadOnlyList<Case> cases, Func<(TrueSurvey Walk, string? Blunder), bool> kind, Func<string, bool> said)
    {
        List<TrueSurvey> Of(Case c) => [.. c.Truth.Surveys.Skip(1).Where(s => kind((s, c.Blunders.GetValueOrDefault(s.SurveyId))))];
        return Bootstrap.Of([.. cases.Select(c => (Case: c, Surveys: Of(c))).Where(u => u.Surveys.Count > 0)],
            l => Scores.Share(l.SelectMany(u => u.Surveys.Select(s => (u.Case, s))), x => said(x.Case.SaidOf(x.s.SurveyId))), u => u.Surveys.Count);
    }

    /// <summary>Sentences on changes that nobody recorded: 'The tyre at 1L seems to have been changed without a record.'</summary>
    private static IEnumerable<string> Inferred(Case c) => (c.Diagnosis?.SurveyNotes ?? []).Where(n => n.SurveyId.Length == 0 && n.Note.StartsWith("The tyre at ", StringComparison.Ordinal)).Select(n => n.Note["The tyre at ".Length..]);

    /// <summary>Unrecorded events followed by a survey of the axle; found where the product infers one at a wheel concerned.</summary>
    private static Figure Events(IReadOnlyList<Case> cases, Func<(DateOnly Date, int? Axle), bool> kind)
    {
        List<bool> Found(Case c) => [.. c.Truth.UnrecordedEvents.Select(Event).Where(kind)
            .Where(e => c.Truth.Surveys.Any(s => s.Date > e.Date && s.Axles >= (e.Axle ?? 1)) && c.Truth.Surveys.Any(s => s.Date <= e.Date && s.Axles >= (e.Axle ?? 1)))
            .Select(e => Inferred(c).Any(i => e.Axle is null || i[0] - '0' == e.Axle))];
        return Bootstrap.Of([.. cases.Select(Found).Where(f => f.Count > 0)], l => Scores.Share(l.SelectMany(f => f), f => f), f => f.Count);
    }

    /// <summary>'2026-10-27 tyres changed on axle 1'; moves and turns name no axle.</summary>
    private static (DateOnly Date, int? Axle) Event(string line)
    {
        const string words = "tyres changed on axle ";
        var at = line.IndexOf(words, StringComparison.Ordinal);
        return (DateOnly.ParseExact(line[..10], "yyyy-MM-dd", CultureInfo.InvariantCulture), at < 0 ? null : int.Parse(line[(at + words.Length)..], CultureInfo.InvariantCulture));
    }

    private static Figure OneEdge(IEnumerable<Case> sound) => Bootstrap.Of([.. sound], l => Scores.Share(l, c => (c.Diagnosis?.Findings ?? []).Any((Finding f) => f.Kind == "one_edge_wear")));
}
