using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tread;

/// <summary>A survey held against those before it: what cannot both be, and the questions that follow, each with its weighed answers.</summary>
internal static class SurveyComparison
{
    /// <summary>Distance no vehicle runs in a day, km (two drivers, 24 h at 100 km/h).</summary>
    private const double MostKmPerDay = 2400;

    /// <summary>Two surveys this close were taken at one time.</summary>
    private static readonly TimeSpan s_oneTime = TimeSpan.FromMinutes(5);

    /// <summary>Share of exchanges that were made to the tyres and not on paper, recorded by nobody; from memory.</summary>
    private const double MovedShare = 0.2;

    /// <summary>Answers offered at most, and the weight below which an answer is not offered.</summary>
    private const int MostOffered = 5;
    private const double LeastOffered = 0.01;

    /// <summary>A tyre's latest readings before the survey, of the tyre that still stands there as far as recorded.</summary>
    private readonly record struct LastRead(TyreReadings Tyre, TreadSurvey Survey);

    public static void Add(TreadSurvey survey, Vehicle vehicle, IReadOnlyList<TreadSurvey> earlier, IReadOnlyList<FittingRecord> fittings, Func<Position, double?> newDepthMm, List<ReadingIssue> issues)
    {
        var previous = earlier[^1];
        Distance(survey, previous, issues);
        if (survey.At < previous.At) return; // A late survey is sorted in, not held against one taken after it.
        var last = LastReadings(survey, earlier, fittings);
        if (MixUp(survey, vehicle, last, newDepthMm) is { } mixUp)
        {
            var best = mixUp.First(w => w.Explanation.Kind != ExplanationKind.AsWritten);
            issues.Add(new(Code(best.Explanation.Kind), IssueWeight.Hold, "tyres", $"{best.Explanation.Sentence} Compared with {SurveyCheck.When(previous)} that fits better than the survey as written: {ExplanationWords.Ask(mixUp.Where(w => w.Weight >= 0.02))}") { Choices = Offered(mixUp) });
            return; // One question is enough; the grooves that grew follow from it.
        }
        for (var i = 0; i < survey.Tyres.Count; i++)
            if (last.TryGetValue(survey.Tyres[i].Position, out var before)) Tyre(survey, vehicle, i, before, newDepthMm, issues);
    }

    /// <summary>The likeliest answers, as written always among them.</summary>
    public static IReadOnlyList<WeighedExplanation> Offered(IReadOnlyList<WeighedExplanation> weighed)
    {
        List<WeighedExplanation> offered = [.. weighed.Where(w => w.Explanation.Kind == ExplanationKind.AsWritten || w.Weight >= LeastOffered).Take(MostOffered)];
        if (offered.All(w => w.Explanation.Kind != ExplanationKind.AsWritten)) offered.AddRange(weighed.Where(w => w.Explanation.Kind == ExplanationKind.AsWritten));
        return offered;
    }

    private static Dictionary<Position, LastRead> LastReadings(TreadSurvey survey, IReadOnlyList<TreadSurvey> earlier, IReadOnlyList<FittingRecord> fittings)
    {
        var last = new Dictionary<Position, LastRead>();
        foreach (var walk in earlier.Where(e => e.At <= survey.At))
            foreach (var tyre in walk.Tyres.Where(t => t.Depths.Count > 0)) last[tyre.Position] = new(tyre, walk);
        foreach (var fitting in fittings)
        {
            foreach (var position in fitting.FromPosition is { } from ? new[] { fitting.Position, from } : [fitting.Position])
                if (last.TryGetValue(position, out var read) && fitting.At > read.Survey.At && fitting.At <= survey.At) last.Remove(position);
        }
        return last;
    }

    /// <summary>One question a tyre, at the groove that is farthest off.</summary>
    private static void Tyre(TreadSurvey survey, Vehicle vehicle, int index, LastRead before, Func<Position, double?> newDepthMm, List<ReadingIssue> issues)
    {
        var tyre = survey.Tyres[index];
        var loss = Loss(survey, vehicle, before.Survey, tyre.Position);
        var weighed = TyreExplanation.Weigh(tyre, survey.ResolutionMm, before.Tyre, before.Survey.ResolutionMm, loss, New(vehicle, tyre.Position, newDepthMm), vehicle.Class is VehicleClass.Truck or VehicleClass.Bus or VehicleClass.Trailer);
        if (weighed.Count == 0) return;
        var noise = GaugeNoise.ReadingVariance(GaugeNoise.RepeatSdMm, survey.ResolutionMm) + GaugeNoise.ReadingVariance(GaugeNoise.RepeatSdMm, before.Survey.ResolutionMm) + 2 * GaugeNoise.TechnicianSdMm * GaugeNoise.TechnicianSdMm;
        var growth = Growth(tyre, before.Tyre);
        if (growth.Count == 0) return;
        var most = growth.MaxBy(g => g.Mm);
        var grew = most.Mm > 3 * Math.Sqrt(noise);
        var asWritten = weighed.First(w => w.Explanation.Kind == ExplanationKind.AsWritten).Weight;
        // From even odds on it is worth a question; the survey waits only where it is clearly not as written.
        if (!grew && asWritten > 0.5) return;
        // The question names the groove that its likeliest answer is about.
        var told = weighed.First(w => w.Explanation.Kind != ExplanationKind.AsWritten).Explanation.Groove;
        var worst = growth.FirstOrDefault(g => g.Groove == told, grew ? most : growth.MaxBy(g => Math.Abs(g.Mm + loss.Value)));
        var weight = grew || asWritten <= 1 - SurveyExplanation.Clear ? IssueWeight.Hold : IssueWeight.Tell;
        var sameTime = survey.At - before.Survey.At < s_oneTime;
        var code = sameTime ? "same_time_differs" : grew ? "depth_grew" : "depth_unlikely";
        var place = worst.Groove == 0 ? $"{tyre.Position}" : $"Groove {worst.Groove} of {tyre.Position}";
        var than = sameTime ? "in the other survey of the same time" : $"on {SurveyCheck.When(before.Survey)}";
        var reads = Math.Abs(worst.Mm) < 0.05 ? $"as deep as {than}" : $"{SurveyCheck.Tenths(Math.Abs(worst.Mm))} {(worst.Mm > 0 ? "deeper" : "less")} than {than}";
        issues.RemoveAll(i => i.Code == "depth_above_new" && i.Position == tyre.Position); // This question includes that one.
        issues.Add(new(code, weight, $"tyres[{index}].depths[{worst.Index}].depth_mm", $"{place} reads {reads}: {ExplanationWords.Ask(Asked(weighed))}", tyre.Position, worst.Groove) { Choices = Offered(weighed) });
    }

    /// <summary>The explanations worth asking for: those that weigh something, but always one beside the likeliest.</summary>
    private static IEnumerable<WeighedExplanation> Asked(IReadOnlyList<WeighedExplanation> weighed)
    {
        var other = weighed.Where(w => w.Explanation.Kind != ExplanationKind.AsWritten).ToList();
        var named = other.Where((w, i) => i == 0 || w.Weight >= 0.05).ToList();
        if (named.All(w => w.Explanation.Kind == named[0].Explanation.Kind)) named.AddRange(other.Where(w => w.Explanation.Kind != named[0].Explanation.Kind && w.Explanation.Kind is ExplanationKind.TyreChanged or ExplanationKind.GrooveMistyped).Take(1));
        return named;
    }

    /// <summary>By groove read both times, how much deeper it reads, mm, and where its first reading stands in the survey.</summary>
    private static List<(int Groove, int Index, double Mm)> Growth(TyreReadings now, TyreReadings before)
    {
        var then = before.Depths.GroupBy(d => d.Groove).ToDictionary(g => g.Key, g => g.Average(d => d.DepthMm));
        List<(int, int, double)> list = [];
        for (var j = 0; j < now.Depths.Count; j++)
        {
            var groove = now.Depths[j].Groove;
            if (then.TryGetValue(groove, out var was) && now.Depths.Take(j).All(d => d.Groove != groove))
                list.Add((groove, j, now.Depths.Where(d => d.Groove == groove).Average(d => d.DepthMm) - was));
        }
        if (list.Count == 0 && now.Depths.Count > 0 && then.Count > 0) list.Add((0, 0, now.Depths.Average(d => d.DepthMm) - then.Values.Average()));
        return list;
    }

    private static void Distance(TreadSurvey survey, TreadSurvey previous, List<ReadingIssue> issues)
    {
        if (survey.DistanceKm is not { } now || previous.DistanceKm is not { } then || survey.CounterReplaced || survey.DistanceSource != previous.DistanceSource) return;
        var run = survey.At >= previous.At ? now - then : then - now;
        if (run < -1)
            Ask("distance_ran_back", $"The counter reads {SurveyCheck.Km(Math.Abs(run))} less than on {SurveyCheck.When(previous)}: typed wrong, or was the counter replaced?", replaced: 0.4);
        else if (run > MostKmPerDay * (Math.Abs((survey.At - previous.At).TotalDays) + 1))
            Ask("distance_jumped", $"The counter reads {SurveyCheck.Km(run)} more than on {SurveyCheck.When(previous)}: no vehicle runs that far in the time. One digit too many?", replaced: 0.1);

        // A counter that ran back was replaced or reset about as often as mistyped; one that jumped was mostly mistyped (from memory).
        void Ask(string code, string message, double replaced) => issues.Add(new(code, IssueWeight.Hold, "distance_km", message)
        {
            Choices = Offered([.. new[] { new WeighedExplanation(new(ExplanationKind.DistanceMistyped), 0.98 - replaced), new WeighedExplanation(new(ExplanationKind.CounterReplaced), replaced), new WeighedExplanation(Explanation.AsWritten, 0.02) }]),
        });
    }

    /// <summary>Explanations of the survey as a whole, the likeliest first, where one clearly fits better than as written.</summary>
    private static List<WeighedExplanation>? MixUp(TreadSurvey survey, Vehicle vehicle, Dictionary<Position, LastRead> last, Func<Position, double?> newDepthMm)
    {
        var expected = new Dictionary<Position, TyreExpectation>();
        var compared = 0;
        foreach (var p in vehicle.Positions())
        {
            expected[p] = new(New(vehicle, p, newDepthMm) with { StandardError = 6 }, new(0, 1), new(0, 1), 0);
            if (!last.TryGetValue(p, out var before) || TreadShape.Of(before.Tyre, before.Survey.ResolutionMm) is not { } shape) continue;
            var loss = Loss(survey, vehicle, before.Survey, p);
            expected[p] = new(shape.MeanDepthMm - loss, (shape.EdgeMm ?? new(0, 1)) + loss * 0.2, (shape.ShoulderMm ?? new(0, 1)) + loss * 0.2, 1);
            compared++;
        }
        var shapes = survey.Tyres.Select(t => TreadShape.Of(t, survey.ResolutionMm)).OfType<TreadShape>().ToList();
        if (shapes.Count == 0 || compared == 0) return null;
        var weighed = SurveyExplanation.Weigh(vehicle, shapes, expected, GaugeNoise.TechnicianSdMm, survey.ResolutionMm);
        var asWritten = weighed.First(w => w.Explanation.Kind == ExplanationKind.AsWritten).Weight;
        // The earlier survey was looked at and kept; the new one is the one that can still be looked at again.
        var best = weighed.Where(w => w.Explanation.Kind is not (ExplanationKind.AsWritten or ExplanationKind.ComparedSurveyWrong)).MaxBy(w => w.Weight)!;
        return asWritten <= 1 - SurveyExplanation.Clear && best.Weight > asWritten ? Answers(weighed) : null;
    }

    /// <summary>What can be answered: a survey that stands while the other was wrong stands as written; what can be done to the tyres may have been.</summary>
    private static List<WeighedExplanation> Answers(IReadOnlyList<WeighedExplanation> weighed)
    {
        var stands = weighed.Where(w => w.Explanation.Kind is ExplanationKind.AsWritten or ExplanationKind.ComparedSurveyWrong).Sum(w => w.Weight);
        List<WeighedExplanation> answers = [new(Explanation.AsWritten, stands)];
        foreach (var w in weighed.Where(w => w.Explanation.Kind is not (ExplanationKind.AsWritten or ExplanationKind.ComparedSurveyWrong)))
        {
            answers.Add(w.Explanation.CanBeDoneToTyres ? w with { Weight = w.Weight * (1 - MovedShare) } : w);
            if (w.Explanation.CanBeDoneToTyres) answers.Add(new(w.Explanation with { Moved = true }, w.Weight * MovedShare));
        }
        return [.. answers.OrderByDescending(a => Math.Round(a.Weight, 12)).ThenBy(a => a.Explanation.Kind)];
    }

    /// <summary>Wear to be expected between two walks, mm, as uncertain as the usual rate itself.</summary>
    private static Estimate Loss(TreadSurvey survey, Vehicle vehicle, TreadSurvey before, Position position)
    {
        var weeks = Math.Max(0, (survey.At - before.At).TotalDays / 7);
        var km = survey.DistanceKm - before.DistanceKm is { } run and >= 0 && !survey.CounterReplaced && run <= MostKmPerDay * (7 * weeks + 1) ? run : weeks * (vehicle.KmPerWeek ?? UsualUse.KmPerWeek(vehicle.Class));
        var rate = WearPrior.For(vehicle.Class, WearPrior.RoleOf(vehicle, position.Axle)).RateMmPer1000Km;
        return new Estimate(rate, rate) * (km / 1000);
    }

    private static Estimate New(Vehicle vehicle, Position position, Func<Position, double?> newDepthMm) =>
        newDepthMm(position) is { } known ? new(known, 0.5) : new(WearPrior.For(vehicle.Class, WearPrior.RoleOf(vehicle, position.Axle)).NewDepthMm, 2);

    private static string Code(ExplanationKind kind) => kind switch
    {
        ExplanationKind.SidesSwapped or ExplanationKind.AxleSidesSwapped => "sides_swapped",
        ExplanationKind.AxlesSwapped => "axles_swapped",
        ExplanationKind.ThirtySecondsTakenForMm or ExplanationKind.MmTakenForThirtySeconds => "unit_mix_up",
        ExplanationKind.PositionsExchanged => "positions_exchanged",
        ExplanationKind.GroovesReversed => "grooves_reversed",
        _ => "other_vehicle",
    };
}
