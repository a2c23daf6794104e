using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// One running distance for a vehicle through missing readings, replaced counters and two kinds of counter. Where nothing
/// was read it goes on at the vehicle's own use, with the error that brings.
/// </summary>
public sealed class DistanceAxis
{
    /// <summary>Standard deviation of a week's distance against the usual, share (from memory).</summary>
    private const double WeekShareSd = 0.25;

    /// <summary>Error of the usual use itself, share, where only the vehicle record or the class default tells it (from memory).</summary>
    private const double UseShareSd = 0.15;

    /// <summary>Distance no vehicle runs in a week, km.</summary>
    private const double MostKmPerWeek = 12000;

    private readonly (DateTimeOffset At, double Km, double Sd)[] _known;

    /// <summary>Use, km per week, from the counter where it was read twice.</summary>
    public double KmPerWeek { get; }

    private DistanceAxis((DateTimeOffset, double, double)[] known, double kmPerWeek) => (_known, KmPerWeek) = (known, kmPerWeek);

    /// <param name="vehicle">Gives the usual distance where none was read.</param>
    /// <param name="surveys">In order of time.</param>
    public static DistanceAxis Of(Vehicle vehicle, IReadOnlyList<TreadSurvey> surveys)
    {
        var usual = vehicle.KmPerWeek is { } k && k > 0 ? k : UsualUse.KmPerWeek(vehicle.Class);
        var read = surveys.Where(s => s.DistanceKm is { } d && double.IsFinite(d) && d >= 0).ToList();
        // The counter read most often carries the axis; a second kind of counter has another zero.
        var source = read.GroupBy(s => s.DistanceSource).OrderByDescending(g => g.Count()).ThenBy(g => g.Key).FirstOrDefault()?.Key;
        var known = new List<(DateTimeOffset At, double Km, double Sd)>();
        foreach (var stretch in Stretches(surveys, source))
        {
            var kept = Rising(stretch);
            if (kept.Count == 0) continue;
            if (known.Count == 0)
            {
                known.AddRange(kept.Select(s => (s.At, s.DistanceKm!.Value, 0.0)));
                continue;
            }
            var (lastAt, lastKm, lastSd) = known[^1];
            var weeks = (kept[0].At - lastAt).TotalDays / 7;
            var offset = lastKm + weeks * usual - kept[0].DistanceKm!.Value;
            var sd = Math.Sqrt(lastSd * lastSd + Spread(weeks, usual) * Spread(weeks, usual));
            known.AddRange(kept.Select(s => (s.At, s.DistanceKm!.Value + offset, sd)));
        }
        var span = known.Count > 1 ? (known[^1].At - known[0].At).TotalDays / 7 : 0;
        var use = span > 1 && known[^1].Km > known[0].Km ? (known[^1].Km - known[0].Km) / span : usual;
        if (known.Count == 0 && surveys.Count > 0) known.Add((surveys[0].At, 0, 0));
        return new DistanceAxis([.. known], use);
    }

    /// <summary>Runs of one counter: a replaced counter starts anew.</summary>
    private static List<List<TreadSurvey>> Stretches(IReadOnlyList<TreadSurvey> surveys, DistanceSource? source)
    {
        var stretches = new List<List<TreadSurvey>> { new() };
        foreach (var survey in surveys)
        {
            if (survey.CounterReplaced) stretches.Add([]);
            if (survey.DistanceKm is { } d && double.IsFinite(d) && d >= 0 && survey.DistanceSource == source) stretches[^1].Add(survey);
        }
        return stretches;
    }

    /// <summary>The longest run of readings that never falls nor outruns any vehicle: what is left out was mistyped.</summary>
    private static List<TreadSurvey> Rising(List<TreadSurvey> stretch)
    {
        if (stretch.Count == 0 || Enumerable.Range(1, stretch.Count - 1).All(i => Follows(stretch[i - 1], stretch[i]))) return stretch;
        var best = new int[stretch.Count];
        var from = new int[stretch.Count];
        for (var i = 0; i < stretch.Count; i++)
        {
            (best[i], from[i]) = (1, -1);
            for (var j = 0; j < i; j++)
            {
                if (best[j] + 1 > best[i] && Follows(stretch[j], stretch[i])) (best[i], from[i]) = (best[j] + 1, j);
            }
        }
        var at = Array.IndexOf(best, best.Max());
        var kept = new List<TreadSurvey>();
        for (; at >= 0; at = from[at]) kept.Add(stretch[at]);
        kept.Reverse();
        return kept;
    }

    private static bool Follows(TreadSurvey earlier, TreadSurvey later)
    {
        var km = later.DistanceKm!.Value - earlier.DistanceKm!.Value;
        return km >= -1 && km <= MostKmPerWeek * ((later.At - earlier.At).TotalDays / 7 + 0.5);
    }

    private static double Spread(double weeks, double use) => use * Math.Sqrt(WeekShareSd * WeekShareSd * weeks + UseShareSd * UseShareSd * weeks * weeks);

    /// <summary>Running distance at a time, km, with its error; zero error where the counter was read.</summary>
    public Estimate At(DateTimeOffset time)
    {
        if (_known.Length == 0) return new(0, 0);
        var after = Array.FindIndex(_known, k => k.At >= time);
        if (after >= 0 && _known[after].At == time) return new(_known[after].Km, _known[after].Sd);
        if (after > 0)
        {
            var (a, b) = (_known[after - 1], _known[after]);
            var total = (b.At - a.At).TotalDays / 7;
            var weeks = (time - a.At).TotalDays / 7;
            var share = weeks / total;
            // A bridge between two readings: no error of the mean use, and least at the ends.
            var sd = WeekShareSd * (b.Km - a.Km) / total * Math.Sqrt(weeks * (total - weeks) / total);
            return new(a.Km + share * (b.Km - a.Km), Math.Sqrt(sd * sd + Math.Max(a.Sd, b.Sd) * Math.Max(a.Sd, b.Sd)));
        }
        var end = after == 0 ? _known[0] : _known[^1];
        var away = (time - end.At).TotalDays / 7;
        var spread = Spread(Math.Abs(away), KmPerWeek);
        return new(end.Km + away * KmPerWeek, Math.Sqrt(spread * spread + end.Sd * end.Sd));
    }
}
