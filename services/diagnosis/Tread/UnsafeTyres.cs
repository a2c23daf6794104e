using System.Globalization;
using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Tread;

/// <summary>A survey as it stands in the records: with its id, and whether it is still held for review.</summary>
public sealed record RecordedSurvey(string SurveyId, TreadSurvey Survey, bool Held);

/// <summary>A tyre that may not run: its last reading lies below the legal limit, or it was seen to be unsafe.</summary>
/// <param name="Position">Where.</param>
/// <param name="DepthMm">Depth that decides, mm; null where the tyre was marked without one.</param>
/// <param name="Limit">The limit that applies; null where it was marked without a depth.</param>
/// <param name="SurveyId">Survey it was found in.</param>
/// <param name="At">When, UTC.</param>
/// <param name="Held">The survey is held for review; the tyre is shown all the same.</param>
/// <param name="Sentence">One plain sentence.</param>
public sealed record UnsafeTyre(Position Position, double? DepthMm, DepthLimit? Limit, string SurveyId, DateTimeOffset At, bool Held, string Sentence);

/// <summary>
/// Safety is never parked: the last survey of each tyre decides, held for review or not, until the tyre is measured
/// again or another one is fitted.
/// </summary>
public static class UnsafeTyres
{
    private static readonly Seen[] s_unsafe = [Seen.Unsafe, Seen.Cord, Seen.Bulge, Seen.Cut];

    /// <param name="vehicle">The vehicle as it is now.</param>
    /// <param name="depot">Its depot, for the law that applies.</param>
    /// <param name="surveys">All surveys, in any order.</param>
    /// <param name="fittings">All fitting records, in any order.</param>
    /// <param name="limits">Limits the operator entered.</param>
    public static IReadOnlyList<UnsafeTyre> Of(Vehicle vehicle, Depot depot, IReadOnlyList<RecordedSurvey> surveys, IReadOnlyList<FittingRecord> fittings, IReadOnlyList<DepthLimitFact> limits)
    {
        var found = new List<UnsafeTyre>();
        foreach (var position in vehicle.Positions())
        {
            var last = surveys
                .Select(s => (s.SurveyId, s.Survey.At, s.Held, Tyre: s.Survey.Tyres.FirstOrDefault(t => t.Position == position)))
                .Where(s => s.Tyre is { } t && (t.Depths.Count > 0 || t.Seen.Count > 0))
                .OrderBy(s => s.At).ThenBy(s => s.SurveyId, StringComparer.Ordinal)
                .LastOrDefault();
            if (last.Tyre is not { } tyre) continue;
            var fitted = fittings.Where(f => f.Position == position || f.FromPosition == position).OrderBy(f => f.At).LastOrDefault();
            if (fitted is { Event: not FittingEvent.TurnedOnRim } && fitted.At > last.At) continue;
            if (Judge(vehicle, depot, tyre, fitted?.Winter ?? false, last.At, limits) is { } unsafeTyre)
                found.Add(unsafeTyre with { SurveyId = last.SurveyId, At = last.At, Held = last.Held });
        }
        return found;
    }

    private static UnsafeTyre? Judge(Vehicle vehicle, Depot depot, TyreReadings tyre, bool winter, DateTimeOffset at, IReadOnlyList<DepthLimitFact> limits)
    {
        var day = DateOnly.FromDateTime(at.UtcDateTime);
        var limit = DepthLimits.For(depot.Jurisdiction, vehicle, tyre.Position, winter, day, limits);
        var judged = DepthLimits.Judge(limit, tyre.Depths);
        var marks = tyre.Seen.Where(s_unsafe.Contains).ToList();
        if (marks.Count > 0)
            return new(tyre.Position, judged?.GoverningMm, limit, "", default, false, string.Create(CultureInfo.InvariantCulture, $"{Capital(string.Join(", ", marks.Select(Words)))} on {day:yyyy-MM-dd}: do not drive on it; have it judged and changed."));
        if (judged is not { Legal: false } below) return null;
        return new(tyre.Position, below.GoverningMm, limit, "", default, false, string.Create(CultureInfo.InvariantCulture,
            $"{below.GoverningMm:0.0} mm{(below.Groove > 0 ? $" in groove {below.Groove}" : "")} on {day:yyyy-MM-dd}, below the limit of {limit.LimitMm:0.0##} mm: do not drive on it ({limit.Source})."));
    }

    private static string Words(Seen seen) => seen switch
    {
        Seen.Cord => "cord showing",
        Seen.Bulge => "a bulge",
        Seen.Cut => "a cut",
        _ => "marked unsafe",
    };

    private static string Capital(string text) => char.ToUpperInvariant(text[0]) + text[1..];
}
