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
            ("by_witness", Report.Split(cases, c => c.Truth.Signals, Group)),
            ("by_class", Report.Split(cases, c => c.Truth.Class, Group)),
            ("by_traffic_side", Report.Split(cases, c => c.Truth.TrafficSide, Group)),
            ("by_lookalike", Report.Split(cases.Where(c => !c.Truth.Misaligned && c.Truth.Lookalikes.Count > 0), c => c.Truth.Lookalikes[0].Kind, l => [("lookalike_false_alarms", FalseAlarms(l))])),
            ("by_true_cause", Report.Split(cases.Where(c => c.Large), c => c.Truth.Quantities[0].Quantity, l =>
                [("found", Bootstrap.Of(l, d => Scores.Share(d, c => c.Probability >= 0.5))), ("first_cause", Named(l, 1)), ("angle_coverage", Coverage(l))])),
        ],
    };

    private static FigureList Headline(IReadOnlyList<Case> cases)
    {
        var large = cases.Where(c => c.Large).ToList();
        var fleets = cases.GroupBy(c => c.Seed).Select(g => (IReadOnlyList<Case>)[.. g.OrderBy(c => c.Rank)]).ToList();
        return
        [
            ("auc", Auc(cases, c => c.Probability)),
            ("precision_at_k", PrecisionAtK(cases, c => c.Probability)),
            ("calibration_error", Bootstrap.Of(cases, l => Scores.CalibrationError([.. l.Select(c => (c.Probability, c.Truth.Misaligned))]))),
            ("first_cause", Named(large, 1)),
            ("first_two_causes", Named(large, 2)),
            ("angle_coverage", Coverage(large)),
            ("angle_median_width_of_prior", Bootstrap.Of(large, l => Scores.Median(l.SelectMany(Widths)), c => Widths(c).Count())),
            ("lookalike_false_alarms", FalseAlarms([.. cases.Where(c => !c.Truth.Misaligned && c.Truth.Lookalikes.Count > 0)])),
            ("ranking_regret", Bootstrap.Of(fleets, l => Scores.Regret([.. l.Select(f => (IReadOnlyList<double>)[.. f.Select(c => c.Truth.NetBenefit)])]))),
            ("truly_misaligned_in_first_ten", Bootstrap.Of(fleets, l => Scores.Median(l.Select(f => (double)f.Take(10).Count(c => c.Truth.Misaligned))))),
            ("large_found", Bootstrap.Of(large, l => Scores.Share(l, c => c.Probability >= 0.5))),
            ("sound_false_alarms", FalseAlarms([.. cases.Where(c => !c.Truth.Misaligned)])),
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

    private static Figure Named(IEnumerable<Case> misaligned, int first) =>
        Bootstrap.Of([.. misaligned.Where(c => c.Truth.Misaligned && c.Probability >= 0.5)], l => Scores.Share(l, c => CauseMatch.Among(c, first)));

    /// <summary>Quantities beyond tolerance whose 90 % interval holds the truth; one the product does not speak of is not held.</summary>
    private static Figure Coverage(IReadOnlyList<Case> cases) => Bootstrap.Of(cases,
        l => Scores.Share(l.SelectMany(c => c.Truth.Quantities.Select(q => (q, Said: CauseMatch.Of(c, q)))), x => x.Said is { } s && s.Low <= x.q.Value && x.q.Value <= s.High),
        c => c.Truth.Quantities.Count);

    private static IEnumerable<double> Widths(Case c) =>
        c.Truth.Quantities.Select(q => (q, Said: CauseMatch.Of(c, q))).Where(x => x.Said is not null).Select(x => (x.Said!.High - x.Said.Low) / x.q.Tolerance / PriorWidth);

    private static Figure FalseAlarms(IReadOnlyList<Case> sound) => Bootstrap.Of(sound, l => Scores.Share(l, c => c.Probability >= 0.5));

    private static FigureList Severity(IReadOnlyList<Case> cases, string stratum)
    {
        var own = cases.Where(c => c.Truth.Stratum == stratum).ToList();
        return
        [
            ("auc", Auc(cases, c => c.Probability, stratum)),
            ("found", Bootstrap.Of(own, l => Scores.Share(l, c => c.Probability >= 0.5))),
            ("first_cause", Named(own, 1)),
            ("first_two_causes", Named(own, 2)),
            ("angle_coverage", Coverage(own)),
        ];
    }

    private static FigureList Group(IReadOnlyList<Case> cases) =>
    [
        ("auc", Auc(cases, c => c.Probability)),
        ("found", Bootstrap.Of([.. cases.Where(c => c.Large)], l => Scores.Share(l, c => c.Probability >= 0.5))),
        ("first_cause", Named(cases.Where(c => c.Large), 1)),
        ("angle_coverage", Coverage([.. cases.Where(c => c.Large)])),
        ("sound_false_alarms", FalseAlarms([.. cases.Where(c => !c.Truth.Misaligned)])),
    ];

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
