using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Finds single grooves typed wrong: the tyre's profile changes at one groove in one survey and nowhere else.</summary>
internal static class GrooveOutliers
{
    /// <summary>Height of a wear bar, mm: a groove read on one is that much too shallow (UN R30 and R54: 1.6 mm, +0.6/−0).</summary>
    private const double WearBarMm = 1.6, WearBarSdMm = 0.2;

    /// <summary>A mistyped depth can be anything within this width, mm.</summary>
    private const double AnyMm = 20;

    /// <summary>How much a groove's place in the profile may change between surveys as the tyre wears, mm (from memory).</summary>
    private const double ProfileChangeSdMm = 0.25;

    /// <summary>Deviation below which no groove is called mistyped, mm.</summary>
    private const double LeastMm = 1;

    /// <summary>Mistyped groove per survey, with its probability; at most one a survey, and only where at least three grooves were read.</summary>
    /// <param name="readings">The tyre's readings, one a survey of its fitting.</param>
    /// <param name="resolutionMm">Step of each survey's gauge, mm.</param>
    /// <param name="repeatSdMm">Standard deviation of a repeated reading, mm.</param>
    /// <param name="rates">How often grooves are typed wrong or read on a wear bar.</param>
    /// <returns>By index into <paramref name="readings"/>; null when nothing was found.</returns>
    public static Dictionary<int, (int Groove, double Probability, ExplanationKind Kind)>? Find(IReadOnlyList<TyreReadings> readings, IReadOnlyList<double> resolutionMm, double repeatSdMm, ErrorRates rates)
    {
        var highest = 0;
        for (var i = 0; readings.Count > 1 && i < readings.Count; i++)
            for (var j = 0; j < readings[i].Depths.Count; j++) highest = Math.Max(highest, readings[i].Depths[j].Groove);
        if (highest < 3) return null;
        var profiles = new Profiles(readings, highest);
        Dictionary<int, (int, double, ExplanationKind)>? found = null;
        var wrong = rates.GrooveMistyped + rates.ReadOnWearBar;
        var onBarShare = rates.ReadOnWearBar / wrong;
        for (var i = 0; i < readings.Count; i++)
        {
            if (profiles.Worst(i) is not { } worst) continue;
            var variance = GaugeNoise.ReadingVariance(repeatSdMm, resolutionMm[i]) * (1.5 + 1.0 / worst.Others) + ProfileChangeSdMm * ProfileChangeSdMm;
            if (worst.Next > 3 * Math.Sqrt(variance) || Math.Abs(worst.Off) < LeastMm) continue;
            var typed = (1 - onBarShare) / AnyMm;
            var onBar = onBarShare * Math.Exp(LineBelief.LogDensity(worst.Off + WearBarMm, variance + WearBarSdMm * WearBarSdMm));
            var odds = Math.Exp(Math.Log(wrong / (1 - wrong) * (typed + onBar)) - LineBelief.LogDensity(worst.Off, variance));
            if (odds / (1 + odds) >= SurveyExplanation.Clear)
                (found ??= [])[i] = (worst.Groove, odds / (1 + odds), onBar > 3 * typed ? ExplanationKind.ReadOnWearBar : ExplanationKind.GrooveMistyped);
        }
        return found;
    }

    /// <summary>Depths of one tyre by survey and groove, less the survey's middle; NaN where a groove was not read.</summary>
    private sealed class Profiles
    {
        private readonly double[,] _place;
        private readonly bool[] _told;
        private readonly int _surveys, _grooves;

        public Profiles(IReadOnlyList<TyreReadings> readings, int highest)
        {
            (_surveys, _grooves) = (readings.Count, Math.Min(highest, SurveyCheck.MaxGroove));
            (_place, _told) = (new double[_surveys, _grooves], new bool[_surveys]);
            Span<double> sum = stackalloc double[_grooves];
            Span<double> kept = stackalloc double[_grooves];
            Span<int> places = stackalloc int[_grooves];
            for (var s = 0; s < _surveys; s++)
            {
                sum.Clear();
                places.Clear();
                var depths = readings[s].Depths;
                for (var j = 0; j < depths.Count; j++)
                {
                    if (depths[j].Groove < 1 || depths[j].Groove > _grooves || !double.IsFinite(depths[j].DepthMm)) continue;
                    sum[depths[j].Groove - 1] += depths[j].DepthMm;
                    places[depths[j].Groove - 1]++;
                }
                var count = 0;
                for (var g = 0; g < _grooves; g++)
                    if (places[g] > 0) kept[count++] = sum[g] / places[g];
                _told[s] = count >= 3;
                var middle = count > 0 ? Selection.Median(kept[..count]) : 0;
                for (var g = 0; g < _grooves; g++) _place[s, g] = places[g] > 0 ? sum[g] / places[g] - middle : double.NaN;
            }
        }

        /// <summary>The groove farthest from its place in the other surveys, how far, how far the next one is, and the surveys compared with.</summary>
        public (int Groove, double Off, double Next, int Others)? Worst(int survey)
        {
            if (!_told[survey]) return null;
            Span<double> deviation = stackalloc double[_grooves];
            Span<double> sorted = stackalloc double[_grooves];
            Span<double> others = _surveys <= 128 ? stackalloc double[_surveys] : new double[_surveys];
            Span<int> behind = stackalloc int[_grooves];
            var count = 0;
            for (var g = 0; g < _grooves; g++)
            {
                behind[g] = 0;
                if (double.IsNaN(_place[survey, g])) continue;
                for (var k = 0; k < _surveys; k++)
                    if (k != survey && _told[k] && !double.IsNaN(_place[k, g])) others[behind[g]++] = _place[k, g];
                if (behind[g] == 0) continue;
                deviation[g] = _place[survey, g] - Selection.Median(others[..behind[g]]);
                sorted[count++] = deviation[g];
            }
            if (count < 3) return null;
            var centre = Selection.Median(sorted[..count]);
            int worst = -1;
            double rest = 0;
            for (var g = 0; g < _grooves; g++)
            {
                if (behind[g] == 0) continue;
                if (worst < 0 || Math.Abs(deviation[g] - centre) > Math.Abs(deviation[worst] - centre))
                {
                    if (worst >= 0) rest = Math.Max(rest, Math.Abs(deviation[worst] - centre));
                    worst = g;
                }
                else rest = Math.Max(rest, Math.Abs(deviation[g] - centre));
            }
            return (worst + 1, deviation[worst] - centre, rest, behind[worst]);
        }
    }
}
