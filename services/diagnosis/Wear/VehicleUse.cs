using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Wear;

/// <summary>How far a vehicle runs in a week and how much that varies, to turn distances into dates.</summary>
/// <param name="KmPerWeek">Usual use, km per week.</param>
/// <param name="WeekSdKm">Standard deviation of one week's distance, km.</param>
/// <param name="Weeks">Weeks over which it was observed.</param>
/// <param name="Intervals">Intervals between counter readings that it rests on; 0 where only the record or the class tells it.</param>
public sealed record VehicleUse(double KmPerWeek, double WeekSdKm, double Weeks, int Intervals)
{
    /// <summary>Standard deviation of a week's distance against the usual, share, before the vehicle has shown its own (from memory).</summary>
    private const double WeekShareSd = 0.25;

    /// <summary>Weight of that prior, in intervals.</summary>
    private const double PriorIntervals = 4;

    /// <summary>Standard deviation of the usual use, share, where nobody read a counter, and of what routes and work ahead will change (from memory).</summary>
    private const double UnreadShareSd = 0.2, AheadShareSd = 0.08;

    /// <summary>Intervals shorter than this, weeks, tell of days and not of weeks.</summary>
    private const double LeastWeeks = 0.5;

    /// <param name="surveys">In order of time.</param>
    /// <param name="usualKmPerWeek">Use that the vehicle's axis of distance goes by, km per week.</param>
    public static VehicleUse Of(IReadOnlyList<TreadSurvey> surveys, double usualKmPerWeek)
    {
        List<(double Weeks, double Km)> intervals = [];
        TreadSurvey? last = null;
        foreach (var survey in surveys.Where(s => s.DistanceKm is { } km && double.IsFinite(km)))
        {
            var weeks = last is null ? 0 : (survey.At - last.At).TotalDays / 7;
            if (last is not null && weeks < LeastWeeks) continue;
            // What ran back, was replaced or comes from another counter says nothing of the use.
            if (last is not null && !survey.CounterReplaced && survey.DistanceSource == last.DistanceSource && survey.DistanceKm >= last.DistanceKm && survey.DistanceKm - last.DistanceKm <= 12_000 * weeks)
                intervals.Add((weeks, survey.DistanceKm!.Value - last.DistanceKm!.Value));
            last = survey;
        }
        var (total, km) = (intervals.Sum(i => i.Weeks), intervals.Sum(i => i.Km));
        if (intervals.Count == 0 || !(km > 0)) return new(usualKmPerWeek, WeekShareSd * usualKmPerWeek, 0, 0);
        var mean = km / total;
        // Weeks are taken as independent: an interval of w weeks varies by the week's variance over w.
        var squares = intervals.Sum(i => i.Weeks * Square(i.Km / i.Weeks - mean));
        var variance = (PriorIntervals * Square(WeekShareSd * mean) + squares) / (PriorIntervals + intervals.Count - 1);
        return new(mean, Math.Sqrt(variance), total, intervals.Count);
    }

    /// <summary>When a distance will have been run: dates with their 90 % interval; null for a date beyond a hundred years.</summary>
    /// <param name="from">Day of the last survey.</param>
    /// <param name="km">Distance from there, km, 90 %.</param>
    public DateInterval? Reaches(DateOnly from, Interval km)
    {
        if (!(KmPerWeek > 0)) return null;
        var weeks = km.Value / KmPerWeek;
        var observed = Intervals == 0 ? Square(UnreadShareSd) : Square(WeekSdKm / KmPerWeek) / Math.Max(Weeks, 1);
        var share = Estimate.Z90 * Math.Sqrt(observed + Square(WeekSdKm / KmPerWeek) / Math.Max(weeks, 1) + Square(AheadShareSd));
        // Distance and use are independent: their log errors add as squares, each side for itself.
        var sooner = km is { Low: > 0, Value: > 0 } ? weeks * Math.Exp(-Math.Sqrt(Square(Math.Log(km.Value / km.Low)) + Square(share))) : 0;
        var later = km.Value > 0 ? weeks * Math.Exp(Math.Sqrt(Square(Math.Log(km.High / km.Value)) + Square(share))) : km.High / KmPerWeek * Math.Exp(share);
        return later > MostWeeks ? null : new(Day(weeks), Day(sooner), Day(later));

        DateOnly Day(double ahead) => from.AddDays((int)Math.Round(7 * ahead));
    }

    private const double MostWeeks = 5200;

    private static double Square(double x) => x * x;
}

/// <summary>A date with its 90 % interval.</summary>
public readonly record struct DateInterval(DateOnly Likely, DateOnly Earliest, DateOnly Latest);
