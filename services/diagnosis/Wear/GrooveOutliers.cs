using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Finds single grooves typed wrong: the tyre's profile changes at one groove in one survey and nowhere else.</summary>
internal static class GrooveOutliers
{
    /// <summary>Share of grooves typed wrong or read on a wear bar, inside the 1-3 % of blunders usual in depots (from memory).</summary>
    private const double Prior = 0.005;

    /// <summary>A mistyped depth can be anything within this width, mm.</summary>
    private const double AnyMm = 20;

    /// <summary>How much a groove's place in the profile may change between surveys as the tyre wears, mm (from memory).</summary>
    private const double ProfileChangeSdMm = 0.25;

    /// <summary>Mistyped groove per survey, with its probability; at most one a survey, and only where at least three grooves were read.</summary>
    public static Dictionary<int, (int Groove, double Probability)> Find(IReadOnlyList<(int Survey, TyreReadings Readings, double ResolutionMm)> surveys, double repeatSdMm)
    {
        var found = new Dictionary<int, (int, double)>();
        if (surveys.Count < 2) return found;
        var profiles = surveys.Select(s => Profile(s.Readings)).ToList();
        for (var i = 0; i < surveys.Count; i++)
        {
            if (profiles[i].Count < 3) continue;
            var deviations = new List<(int Groove, double Mm, int Others)>();
            foreach (var (groove, depth) in profiles[i])
            {
                var others = profiles.Where((p, k) => k != i && p.Count >= 3 && p.ContainsKey(groove)).Select(p => p[groove] - Middle(p)).ToList();
                if (others.Count > 0) deviations.Add((groove, depth - Middle(profiles[i]) - Medians.Median(others), others.Count));
            }
            if (deviations.Count < 3) continue;
            var centre = Medians.Median([.. deviations.Select(d => d.Mm)]);
            var worst = deviations.MaxBy(d => (Math.Abs(d.Mm - centre), -d.Groove));
            var rest = deviations.Where(d => d.Groove != worst.Groove).Max(d => Math.Abs(d.Mm - centre));
            var variance = GaugeNoise.ReadingVariance(repeatSdMm, surveys[i].ResolutionMm) * (1.5 + 1.0 / worst.Others) + ProfileChangeSdMm * ProfileChangeSdMm;
            var off = worst.Mm - centre;
            if (rest > 3 * Math.Sqrt(variance) || Math.Abs(off) < 1) continue;
            var odds = Math.Exp(Math.Log(Prior / (1 - Prior) / AnyMm) - LineBelief.LogDensity(off, variance));
            if (odds / (1 + odds) >= SurveyExplanation.Clear) found[surveys[i].Survey] = (worst.Groove, odds / (1 + odds));
        }
        return found;
    }

    private static Dictionary<int, double> Profile(TyreReadings readings) =>
        readings.Depths.Where(d => d.Groove > 0 && double.IsFinite(d.DepthMm)).GroupBy(d => d.Groove).ToDictionary(g => g.Key, g => g.Average(d => d.DepthMm));

    private static double Middle(Dictionary<int, double> profile) => Medians.Median(profile.Values);
}
