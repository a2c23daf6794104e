using WearWatch.Proving.Run;
using WearWatch.Proving.Scoring;

namespace WearWatch.Proving.Figures;

/// <summary>Who is misaligned, by what and how much, and whether the list puts the money first.</summary>
internal static class VerdictFigures
{
    /// <summary>Width of the central 90 % of a fault before anything is measured, tolerances: sign unknown, 40 % at 1 to 1.5, 60 % at 1.5 to 4.</summary>
    private const double PriorWidth = 2 * (4 - 2.5 / 6);

    public static Report Of(IReadOnlyList<Case> cases) => new()
    {
        Part = "verdict",
        Main = Headline(cases),
        Baselines =
        [
            ("across_tread_difference", Beside(cases, c => c.Plain.AcrossTreadMm)),
            ("mean_straight_torque", Beside(cases, c => Size(c.Plain.TorqueNm?.Value))),
            ("mean_straight_angle", Beside(cases, c => Size(c.Plain.AngleDeg?.Value))),
            ("days_since_alignment", Beside(cases, c => c.Plain.DaysSinceAlignment)),
        ],
        Splits =
        [
            ("by_severity", [("large", Severity(cases, "large")), ("small", Severity(cases, "small"))]),
            ("by_witness", [.. s_witnesses.Select(w => (w.Name, Cases: cases.Where(w.Has).ToList())).Where(w => w.Cases.Count > 0).Select(w => (w.Name, Group(w.Cases)))]),
            ("by_class", Report.Split(cases, c => c.Truth.Class, Group)),
            ("by_traffic_side", Report.Split(cases, c => c.Truth.TrafficSide, Group)),
            ("by_lookalike", Report.Split(cases.Where(c => !c.Truth.Misaligned && c.Truth.Lookalikes.Count > 0), c => c.Truth.Lookalikes[0].Kind, l => [("lookalike_false_alarms", Judged(l, FalseAlarms))])),
            ("by_true_cause", Report.Split(cases.Where(c => c.Large), c => c.Truth.Quantities[0].Quantity, l =>
                [("found", Judged(l, Found, more: true)), ("first_cause", Judged(l, First, more: true)), ("angle_coverage", Judged(l, Coverage))])),
            ("losses", Losses(cases)),
        ],
    };

    /// <summary>One who says a probability and causes of a vehicle: the product, or the best possible.</summary>
    private sealed record Judge(Func<Case, double> Probability, Func<Case, IReadOnlyList<SaidCause>> Causes);

    private static readonly Judge s_product = new(c => c.Probability, c => c.Causes), s_best = new(c => c.Best!.Probability, c => c.Best!.Causes);

    private static readonly (string Name, Func<Case, bool> Has)[] s_witnesses =
    [
        ("gauge_only", c => c.Truth.Signals == "gauge_only"),
        ("steering_only", c => c.Truth.Surveys.Count == 0),
        ("no_torque", c => c.Truth.Signals == "angle" && c.Truth.Surveys.Count > 0),
        ("torque", c => c.Truth.Signals == "torque" && c.Truth.Surveys.Count > 0),
        ("no_position", c => c.Truth.Signals != "gauge_only" && !c.Truth.Position && c.Truth.Surveys.Count > 0),
    ];

    /// <summary>A figure of the product with the same of the best possible on the same vehicles beside it.</summary>
    private static Figure Judged(IReadOnlyList<Case> cases, Func<IReadOnlyList<Case>, Judge, Figure> figure, Bar? bar = null, bool more = false) =>
        figure(cases, s_product) with { Best = cases.All(c => c.Best is not null) ? figure(cases, s_best) : null, Bar = bar, MoreIsBetter = more };

    private static FigureList Headline(IReadOnlyList<Case> cases)
    {
        var large = cases.Where(c => c.Large).ToList();
        var fleets = cases.GroupBy(c => c.Seed).Select(g => (IReadOnlyList<Case>)[.. g.OrderBy(c => c.Rank)]).ToList();
        return
        [
            ("auc", Judged(cases, (l, j) => Auc(l, j.Probability), Bar.AtLeast(0.97), more: true)),
            ("precision_at_k", Judged(cases, (l, j) => PrecisionAtK(l, j.Probability), Bar.AtLeast(0.85), more: true)),
            ("calibration_error", Judged(cases, (l, j) => Bootstrap.Of(l, d => Scores.CalibrationError([.. d.Select(c => (j.Probability(c), c.Truth.Misaligned))])), Bar.AtMost(0.04))),
            ("first_cause", Judged(large, First, Bar.AtLeast(0.80), more: true)),
            ("first_two_causes", Judged(large, FirstTwo, Bar.AtLeast(0.92), more: true)),
            ("angle_coverage", Judged(large, Coverage, new Bar(0.85, 0.95))),
            ("angle_median_width_of_prior", Judged(large, (l, j) => Bootstrap.Of(l, d => Scores.Median(d.SelectMany(c => Widths(c, j))), c => Widths(c, j).Count()), Bar.AtMost(0.6))),
            ("lookalike_false_alarms", Judged([.. cases.Where(c => !c.Truth.Misaligned && c.Truth.Lookalikes.Count > 0)], FalseAlarms, Bar.AtMost(0.05))),
            ("ranking_regret", Bootstrap.Of(fleets, l => Scores.Regret([.. l.Select(f => (IReadOnlyList<double>)[.. f.Select(c => c.Truth.NetBenefit)])])) with { Bar = Bar.AtMost(0.10) }),
            ("truly_misaligned_in_first_ten", Bootstrap.Of(fleets, l => Scores.Median(l.Select(f => (double)f.Take(10).Count(c => c.Truth.Misaligned))))),
            ("large_found", Judged(large, Found, more: true)),
            ("sound_false_alarms", Judged([.. cases.Where(c => !c.Truth.Misaligned)], FalseAlarms)),
        ];
    }

    /// <summary>First stratum against not misaligned.</summary>
    private static Figure Auc(IReadOnlyList<Case> cases, Func<Case, double> score, string stratum = "large")
    {
        var judged = cases.Where(c => c.Truth.Stratum == stratum || !c.Truth.Misaligned).ToList();
        var figure = Bootstrap.Of(judged, l => Scores.Auc([.. l.Select(c => (score(c), c.Truth.Misaligned))]));
        return double.IsNaN(figure.Value) ? Figure.Unknown with { N = judged.Count } : figure;
    }

    /// <summary>Among the first k of each fleet, k being its vehicles of the first stratum; those of the second are left out.</summary>
    private static Figure PrecisionAtK(IReadOnlyList<Case> cases, Func<Case, double> score)
    {
        var judged = cases.Where(c => c.Large || !c.Truth.Misaligned).ToList();
        return Bootstrap.Of(judged, l =>
        {
            var fleets = l.GroupBy(c => c.Seed).Select(g => Scores.FirstK([.. g.Select(c => (score(c), c.Large))])).ToList();
            var k = fleets.Sum(f => f.K);
            return k == 0 ? double.NaN : fleets.Sum(f => f.Hits) / k;
        }, c => c.Large ? 1 : 0);
    }

    private static Figure First(IReadOnlyList<Case> misaligned, Judge judge) => Named(misaligned, judge, 1);

    private static Figure FirstTwo(IReadOnlyList<Case> misaligned, Judge judge) => Named(misaligned, judge, 2);

    private static Figure Named(IEnumerable<Case> misaligned, Judge judge, int first) =>
        Bootstrap.Of([.. misaligned.Where(c => c.Truth.Misaligned && judge.Probability(c) >= 0.5)], l => Scores.Share(l, c => CauseMatch.Among(c, judge.Causes(c), first)));

    private static Figure Found(IReadOnlyList<Case> misaligned, Judge judge) => Bootstrap.Of(misaligned, l => Scores.Share(l, c => judge.Probability(c) >= 0.5));

    /// <summary>Quantities beyond tolerance whose 90 % interval holds the truth; one that is not spoken of is not held.</summary>
    private static Figure Coverage(IReadOnlyList<Case> cases, Judge judge) => Bootstrap.Of(cases,
        l => Scores.Share(l.SelectMany(c => c.Truth.Quantities.Select(q => (q, Said: CauseMatch.Of(judge.Causes(c), q)))), x => x.Said is { } s && s.Low <= x.q.Value && x.q.Value <= s.High),
        c => c.Truth.Quantities.Count);

    private static IEnumerable<double> Widths(Case c, Judge judge) =>
        c.Truth.Quantities.Select(q => (q, Said: CauseMatch.Of(judge.Causes(c), q))).Where(x => x.Said is not null).Select(x => (x.Said!.High - x.Said.Low) / x.q.Tolerance / PriorWidth);

    private static Figure FalseAlarms(IReadOnlyList<Case> sound, Judge judge) => Bootstrap.Of(sound, l => Scores.Share(l, c => judge.Probability(c) >= 0.5));

    private static FigureList Severity(IReadOnlyList<Case> cases, string stratum)
    {
        var own = cases.Where(c => c.Truth.Stratum == stratum).ToList();
        return
        [
            ("auc", Judged(cases, (l, j) => Auc(l, j.Probability, stratum), more: true)),
            ("found", Judged(own, Found, more: true)),
            ("first_cause", Judged(own, First, more: true)),
            ("first_two_causes", Judged(own, FirstTwo, more: true)),
            ("angle_coverage", Judged(own, Coverage)),
        ];
    }

    private static FigureList Group(IReadOnlyList<Case> cases)
    {
        var large = cases.Where(c => c.Large).ToList();
        return
        [
            ("auc", Judged(cases, (l, j) => Auc(l, j.Probability), more: true)),
            ("precision_at_k", Judged(cases, (l, j) => PrecisionAtK(l, j.Probability), more: true)),
            ("calibration_error", Judged(cases, (l, j) => Bootstrap.Of(l, d => Scores.CalibrationError([.. d.Select(c => (j.Probability(c), c.Truth.Misaligned))])))),
            ("found", Judged(large, Found, more: true)),
            ("first_cause", Judged(large, First, more: true)),
            ("first_two_causes", Judged(large, FirstTwo, more: true)),
            ("angle_coverage", Judged(large, Coverage)),
            ("sound_false_alarms", Judged([.. cases.Where(c => !c.Truth.Misaligned)], FalseAlarms)),
        ];
    }

    /// <summary>
    /// Where the product says less than the data: mean log score (nats a vehicle) of the best possible less that of the product, by
    /// class, witness and true quantity, largest total first. 'Sound' counts what false suspicion costs.
    /// </summary>
    private static List<(string, FigureList)> Losses(IReadOnlyList<Case> cases)
    {
        static double Score(double p, bool misaligned) => Math.Log(Math.Clamp(misaligned ? p : 1 - p, 1e-3, 1));
        double Loss(Case c) => Score(c.Best!.Probability, c.Truth.Misaligned) - Score(c.Probability, c.Truth.Misaligned);
        if (cases.Any(c => c.Best is null)) return [];
        return [.. cases.GroupBy(c => $"{c.Truth.Class}, {c.Truth.Signals}, {(c.Truth.Misaligned ? c.Truth.Quantities[0].Quantity : "sound")}")
            .OrderByDescending(g => g.Sum(Loss))
            .Select(g => (g.Key, new FigureList
            {
                ("log_score_behind", Bootstrap.Of([.. g], l => l.Average(Loss))),
                ("mean_probability", Judged([.. g], (l, j) => Bootstrap.Of(l, d => d.Average(j.Probability)))),
            }))];
    }

    /// <summary>A plain score over the vehicles that have it, with the product's figures over the same vehicles.</summary>
    private static FigureList Beside(IReadOnlyList<Case> cases, Func<Case, double?> score)
    {
        var those = cases.Where(c => score(c) is not null).ToList();
        return
        [
            ("auc", Auc(those, c => score(c)!.Value)),
            ("product_auc_on_these", Auc(those, c => c.Probability)),
            ("precision_at_k", PrecisionAtK(those, c => score(c)!.Value)),
            ("product_precision_at_k_on_these", PrecisionAtK(those, c => c.Probability)),
        ];
    }

    private static double? Size(double? value) => value is { } v ? Math.Abs(v) : null;
}
