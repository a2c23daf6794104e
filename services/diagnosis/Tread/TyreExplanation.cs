using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tread;

/// <summary>
/// Weighs what may lie behind the readings of one tyre beside its readings of an earlier walk: as written, one groove
/// mistyped or read on a wear bar, another tyre, the same one regrooved or turned on its rim, its grooves counted from the
/// wrong shoulder, another wheel's, or rightly read and wrong on the walk before. Every explanation is a normal law over the same grooves, whose errors have a part in
/// common (wear in between, the two hands) and a part of each groove's own.
/// </summary>
public static class TyreExplanation
{
    // Prior shares of tyres a walk, inside the 1-3 % of blunders usual in depots; from memory.
    private const double MistypedPrior = 0.003, OnWearBarPrior = 0.002, ChangedPrior = 0.02, RegroovedPrior = 0.002, TurnedPrior = 0.001, ReversedPrior = 0.001, MisreadPrior = 0.004;

    /// <summary>Height of a wear bar, mm (UN R30 and R54: 1.6 mm, +0.6/−0), and its spread.</summary>
    private const double WearBarMm = 1.6, WearBarSdMm = 0.2;

    /// <summary>Depth that regrooving adds, mm, and its spread; common practice, no source.</summary>
    private const double RegroovedMm = 3, RegroovedSdMm = 1;

    /// <summary>A mistyped depth can be anything within this width, mm.</summary>
    private const double AnyMm = 20;

    /// <summary>Spread of the depth of a tyre of which nothing is known, and of its profile, mm.</summary>
    private const double AnyDepthSdMm = 5, AnyProfileSdMm = 0.7;

    /// <summary>How much a groove's place in the profile changes between two walks, mm, and as a share of the wear between; from memory.</summary>
    private const double ProfileChangeSdMm = 0.1, ProfileChangeShare = 0.3;

    /// <summary>What a mean over other grooves may differ by, mm; from memory.</summary>
    private const double OtherGroovesSdMm = 0.3;

    /// <param name="now">The tyre's readings.</param>
    /// <param name="stepMm">Step of the gauge, mm.</param>
    /// <param name="before">Its readings of the walk compared with.</param>
    /// <param name="stepBeforeMm">Step of that gauge, mm.</param>
    /// <param name="lossMm">Wear to be expected between the two, mm.</param>
    /// <param name="newMm">Mean depth of a tyre put on new in between, mm.</param>
    /// <param name="canBeRegrooved">Tyres of trucks, buses and trailers are.</param>
    /// <returns>Weights that sum to 1, likeliest first; empty where the two have nothing to compare.</returns>
    public static IReadOnlyList<WeighedExplanation> Weigh(TyreReadings now, double stepMm, TyreReadings before, double stepBeforeMm, Estimate lossMm, Estimate newMm, bool canBeRegrooved)
    {
        var both = Grooves(now, stepMm, before, stepBeforeMm, lossMm);
        if (both.Length == 0) return [];
        var common = lossMm.StandardError * lossMm.StandardError + 2 * GaugeNoise.TechnicianSdMm * GaugeNoise.TechnicianSdMm;
        var p = now.Position;
        var others = MistypedPrior + OnWearBarPrior + ChangedPrior + RegroovedPrior + TurnedPrior + ReversedPrior + MisreadPrior;
        List<(Explanation Explanation, double Log)> list = [(Explanation.AsWritten with { Position = p }, Math.Log(1 - others) + Log([.. both.Select(g => g.Now - g.Expected)], both, common))];
        void Add(Explanation explanation, double prior, double log) => list.Add((explanation, Math.Log(prior) + log));

        for (var j = 0; j < both.Length; j++) OneGroove(both, j, common, stepMm, p, Add);
        var flat = Log([.. both.Select(g => g.Now - newMm.Value)], [.. both.Select(g => g with { Variance = g.Variance + Square(SurveyExplanation.NewShapeSd) })], Square(newMm.StandardError));
        var any = Any(both, common);
        Add(new(ExplanationKind.TyreChanged, Position: p), ChangedPrior, Mix(SurveyExplanation.ChangedForNew, flat, any));
        Add(new(ExplanationKind.TyreMisread, Position: p), MisreadPrior, any);
        if (canBeRegrooved) Add(new(ExplanationKind.Regrooved, Position: p), RegroovedPrior, Log([.. both.Select(g => g.Now - g.Expected - RegroovedMm)], [.. both.Select(g => g with { Variance = g.Variance + Square(OtherGroovesSdMm) })], common + Square(RegroovedSdMm)));
        if (both.Length >= 3)
        {
            var reversed = Log([.. both.Select((g, i) => g.Now - both[^(i + 1)].Expected)], both, common);
            Add(new(ExplanationKind.TurnedOnRim, Position: p), TurnedPrior, reversed);
            Add(new(ExplanationKind.GroovesReversed, Position: p), ReversedPrior, reversed);
        }
        var top = list.Max(l => l.Log);
        var total = list.Sum(l => Math.Exp(l.Log - top));
        // Where the walk before was the wrong one, this one stands as written.
        var stands = list.Where(l => l.Explanation.Kind is ExplanationKind.AsWritten or ExplanationKind.ComparedSurveyWrong).Sum(l => Math.Exp(l.Log - top) / total);
        return [.. list.Where(l => l.Explanation.Kind != ExplanationKind.ComparedSurveyWrong)
            .Select(l => new WeighedExplanation(l.Explanation, l.Explanation.Kind == ExplanationKind.AsWritten ? stands : Math.Exp(l.Log - top) / total)).OrderByDescending(w => Math.Round(w.Weight, 12)).ThenBy(w => w.Explanation.Kind)];
    }

    /// <param name="Groove">Its number.</param>
    /// <param name="Now">Depth read, mm.</param>
    /// <param name="Expected">Depth expected, mm.</param>
    /// <param name="Variance">Of the two readings and of its place in the profile, mm²; what the grooves have in common left aside.</param>
    private readonly record struct Pair(int Groove, double Now, double Expected, double Variance);

    /// <summary>Grooves read both times; the means of the tyre where there are none.</summary>
    private static Pair[] Grooves(TyreReadings now, double stepMm, TyreReadings before, double stepBeforeMm, Estimate lossMm)
    {
        var (a, b) = (Means(now), Means(before));
        if (a.Count == 0 || b.Count == 0) return [];
        var (va, vb) = (GaugeNoise.ReadingVariance(GaugeNoise.RepeatSdMm, stepMm), GaugeNoise.ReadingVariance(GaugeNoise.RepeatSdMm, stepBeforeMm));
        var profile = Square(ProfileChangeSdMm) + Square(ProfileChangeShare * lossMm.Value);
        Pair[] same = [.. a.Where(g => b.ContainsKey(g.Key)).OrderBy(g => g.Key).Select(g => new Pair(g.Key, g.Value.Mean, b[g.Key].Mean - lossMm.Value, va / g.Value.Places + vb / b[g.Key].Places + profile))];
        return same.Length > 0 ? same : [new Pair(0, a.Values.Average(g => g.Mean), b.Values.Average(g => g.Mean) - lossMm.Value, va / a.Count + vb / b.Count + Square(OtherGroovesSdMm))];
    }

    private static Dictionary<int, (double Mean, int Places)> Means(TyreReadings tyre) =>
        tyre.Depths.Where(d => double.IsFinite(d.DepthMm)).GroupBy(d => d.Groove).ToDictionary(g => g.Key, g => (g.Average(d => d.DepthMm), g.Count()));

    /// <summary>The rest of the tyre is as written, this groove is not, now or on the walk before.</summary>
    private static void OneGroove(Pair[] both, int j, double common, double stepMm, Position position, Action<Explanation, double, double> add)
    {
        Pair[] rest = [.. both.Where((_, i) => i != j)];
        var precision = 1 / common + rest.Sum(g => 1 / g.Variance);
        var shift = rest.Sum(g => (g.Now - g.Expected) / g.Variance) / precision;
        var groove = both[j];
        var (expected, variance) = (groove.Expected + shift, groove.Variance + 1 / precision);
        var others = Log([.. rest.Select(g => g.Now - g.Expected)], rest, common);
        var slips = TypingSlips.Of(groove.Now, stepMm).Select(s => (s.MeantMm, Weight: s.Share * Math.Exp(LineBelief.LogDensity(s.MeantMm - expected, variance)))).ToList();
        var typed = TypingSlips.Anything / AnyMm + slips.Sum(s => s.Weight);
        var best = slips.OrderByDescending(s => s.Weight).FirstOrDefault();
        add(new(ExplanationKind.GrooveMistyped, Position: position, Groove: groove.Groove) { MeantMm = best.Weight > typed / 2 ? Math.Round(best.MeantMm, 3) : null }, MistypedPrior, others + Math.Log(typed));
        add(new(ExplanationKind.ReadOnWearBar, Position: position, Groove: groove.Groove), OnWearBarPrior, others + LineBelief.LogDensity(groove.Now + WearBarMm - expected, variance + Square(WearBarSdMm)));
        // The walk before was wrong there: then this reading must suit the grooves beside it, and that one need not have.
        var (here, then) = (Beside(groove.Now, rest, g => g.Now), Beside(groove.Expected, rest, g => g.Expected));
        var wrong = MistypedPrior / AnyMm + OnWearBarPrior * Math.Exp(LineBelief.LogDensity(groove.Now - WearBarMm - expected, variance + Square(WearBarSdMm)));
        add(new(ExplanationKind.ComparedSurveyWrong, Position: position, Groove: groove.Groove), 1, others + Math.Log(wrong) + here - then);
    }

    /// <summary>Log density of a depth among those of the tyre's other grooves.</summary>
    private static double Beside(double depth, Pair[] rest, Func<Pair, double> of) =>
        rest.Length == 0 ? 0 : LineBelief.LogDensity(depth - rest.Average(of), Square(AnyProfileSdMm) * (1 + 1.0 / rest.Length));

    private static double Any(Pair[] both, double common)
    {
        var centre = both.Average(g => g.Expected);
        return Log([.. both.Select(g => g.Now - centre)], [.. both.Select(g => g with { Variance = g.Variance + Square(AnyProfileSdMm) })], common + Square(AnyDepthSdMm));
    }

    /// <summary>Log density of deviations with a common part of variance <paramref name="common"/> and own parts: the matrix determinant lemma and Sherman and Morrison's inverse.</summary>
    private static double Log(double[] deviation, Pair[] grooves, double common)
    {
        double precision = 0, weighted = 0, log = 0;
        for (var i = 0; i < deviation.Length; i++)
        {
            var v = grooves[i].Variance;
            precision += 1 / v;
            weighted += deviation[i] / v;
            log -= 0.5 * (deviation[i] * deviation[i] / v + Math.Log(2 * Math.PI * v));
        }
        return log + 0.5 * (common * weighted * weighted / (1 + common * precision) - Math.Log(1 + common * precision));
    }

    private static double Mix(double share, double first, double second)
    {
        var top = Math.Max(first, second);
        return top + Math.Log(share * Math.Exp(first - top) + (1 - share) * Math.Exp(second - top));
    }

    private static double Square(double x) => x * x;
}
