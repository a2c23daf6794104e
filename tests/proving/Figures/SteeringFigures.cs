using WearWatch.Contracts.V1;
using WearWatch.Proving.Plain;
using WearWatch.Proving.Run;
using WearWatch.Proving.Scoring;
using Range = WearWatch.Contracts.V1.Range;

namespace WearWatch.Proving.Figures;

/// <summary>What the signals alone are asked: steering pull and off-centre angle on a flat road, and when they changed.</summary>
internal static class SteeringFigures
{
    /// <summary>A change found within this many days of its date is that change.</summary>
    private const int NearDays = 14;

    private const double StepNm = 0.3, StepDeg = 2;

    /// <summary>Days that must be logged on either side of a step that the channels can show.</summary>
    private const int LoggedDays = 21;

    private const double RunsAWeek = 20;

    private readonly record struct Answer(double Truth, double Value, double Low, double High)
    {
        public bool Holds => Low <= Truth && Truth <= High;
    }

    /// <summary>A true step in one signal that the vehicle has, and the published change that tells it.</summary>
    private readonly record struct Shown(string Quantity, DateOnly Date, Change? Found, double DaysOff);

    public static Report Of(IReadOnlyList<Case> cases)
    {
        var steered = cases.Where(c => c.Truth.Signals != "gauge_only").ToList();
        return new()
        {
            Part = "steering",
            Main =
            [
                .. Intervals(steered),
                .. Crown(steered),
                .. Changes(steered),
                ("changes_found_20_runs_a_week", Found([.. steered.Where(c => WeeklyRuns(c) >= RunsAWeek)])),
                ("median_runs_a_week", Bootstrap.Of(steered, l => Scores.Median(l.Select(WeeklyRuns)))),
            ],
            Baselines = [("mean_of_straight_driving", Plain(steered))],
            Splits =
            [
                ("by_traffic_side", Report.Split(steered, c => c.Truth.TrafficSide, All)),
                ("by_class", Report.Split(steered, c => c.Truth.Class, All)),
                ("by_witness", Report.Split(steered, c => c.Truth.Signals == "torque" ? c.Truth.AssistMeasured ? "torque_and_assist" : "torsion_bar_alone" : c.Truth.Signals, All)),
                ("by_severity", Report.Split(steered, c => c.Truth.Stratum, All)),
            ],
        };
    }

    private static FigureList All(IReadOnlyList<Case> cases) => [.. Intervals(cases), .. Changes(cases)];

    private static FigureList Intervals(IReadOnlyList<Case> cases) =>
    [
        .. Answers(cases, "steering_pull", "nm", c => Of(TruePull(c), c.Diagnosis?.SteeringPull)),
        .. Answers(cases, "off_centre", "deg", c => Of(c.Truth.OffCentreDeg, c.Diagnosis?.OffCentreAngle)),
    ];

    private static FigureList Plain(IReadOnlyList<Case> cases) =>
    [
        .. Answers(cases, "steering_pull", "nm", c => Of(TruePull(c), c.Truth.AssistMeasured ? c.Plain.TorqueWithAssistNm : c.Plain.TorqueNm)),
        .. Answers(cases, "off_centre", "deg", c => Of(c.Truth.OffCentreDeg, c.Plain.AngleDeg)),
    ];

    private static FigureList Answers(IReadOnlyList<Case> cases, string name, string unit, Func<Case, Answer?> answer)
    {
        var answers = cases.Select(answer).OfType<Answer>().ToList();
        return
        [
            ($"{name}_coverage", Bootstrap.Of(answers, l => Scores.Share(l, a => a.Holds))),
            ($"{name}_median_width_{unit}", Bootstrap.Of(answers, l => Scores.Median(l.Select(a => a.High - a.Low)))),
            ($"{name}_median_error_{unit}", Bootstrap.Of(answers, l => Scores.Median(l.Select(a => Math.Abs(a.Value - a.Truth))))),
        ];
    }

    /// <summary>
    /// 1 − RMS of what taking the bank off the roads does to the product's figure ÷ the same of the raw mean, over vehicles
    /// that log lateral acceleration or position; pull and off-centre angle together as the root mean square of both ratios.
    /// </summary>
    private static FigureList Crown(IReadOnlyList<Case> cases)
    {
        var seen = cases.Where(c => c.Plain.RoadLogged && c.OnFlatRoads is not null).ToList();
        static bool HasPull(Case c) => Moved(c, PullOf) is not null && Moved(c, RawPull) is not null;
        static bool HasAngle(Case c) => Moved(c, AngleOf) is not null && Moved(c, RawAngle) is not null;
        static double Left(IEnumerable<Case> l, Func<Case, double?> said, Func<Case, double?> raw) => Rms(l.Select(c => Moved(c, said)!.Value)) / Rms(l.Select(c => Moved(c, raw)!.Value));
        static double PullLeft(IEnumerable<Case> l) => Left(l.Where(HasPull), PullOf, RawPull);
        static double AngleLeft(IEnumerable<Case> l) => Left(l.Where(HasAngle), AngleOf, RawAngle);
        return
        [
            ("crown_removed", Bootstrap.Of([.. seen.Where(c => HasPull(c) || HasAngle(c))], l => 1 - Rms(new[] { PullLeft(l), AngleLeft(l) }.Where(r => !double.IsNaN(r))))),
            ("crown_removed_steering_pull", Bootstrap.Of([.. seen.Where(HasPull)], l => 1 - PullLeft(l))),
            ("crown_removed_off_centre", Bootstrap.Of([.. seen.Where(HasAngle)], l => 1 - AngleLeft(l))),
        ];
    }

    private static double? PullOf(Case c) => c.Diagnosis?.SteeringPull?.Value;
    private static double? AngleOf(Case c) => c.Diagnosis?.OffCentreAngle?.Value;
    private static double? RawPull(Case c) => (c.Truth.AssistMeasured ? c.Plain.TorqueWithAssistNm : c.Plain.TorqueNm)?.Value;
    private static double? RawAngle(Case c) => c.Plain.AngleDeg?.Value;

    private static double? Moved(Case c, Func<Case, double?> figure) => figure(c) - figure(c.OnFlatRoads!);

    private static double Rms(IEnumerable<double> values)
    {
        var known = values.ToArray();
        return known.Length == 0 ? double.NaN : Math.Sqrt(known.Average(v => v * v));
    }

    /// <summary>At the column where assist torque was logged with the driver's, else the driver's part alone.</summary>
    private static double? TruePull(Case c) => c.Truth.AssistMeasured ? c.Truth.SteeringPullNm : c.Truth.SteeringPullTorsionBarNm;

    private static Answer? Of(double? truth, Range? said) => truth is { } t && said is { } s ? new(t, s.Value, s.Low, s.High) : null;

    private static Answer? Of(double? truth, PlainMean? mean)
    {
        if (truth is not { } t || mean is not { } m) return null;
        var half = MathNet.Numerics.Distributions.StudentT.InvCDF(0, 1, m.Trips - 1, 0.95) * m.StandardError;
        return new(t, m.Value, m.Value - half, m.Value + half);
    }

    private static double WeeklyRuns(Case c) => (c.Diagnosis?.StraightRuns ?? 0) / (c.Years * 365.25 / 7);

    private static FigureList Changes(IReadOnlyList<Case> cases)
    {
        var shown = cases.Select(Steps).Where(s => s.Count > 0).ToList();
        return
        [
            ("change_date_error_days", Bootstrap.Of(shown, l => Scores.Median(l.SelectMany(s => s).Where(s => s.Found is not null).Select(s => s.DaysOff)), s => s.Count(x => x.Found is not null))),
            ("changes_found", Found(cases)),
            ("false_changes_per_vehicle_year", Bootstrap.Of(cases, l => l.Sum(c => FalseChanges(c).Count()) / l.Sum(c => c.Years))),
        ];
    }

    private static Figure Found(IReadOnlyList<Case> cases) =>
        Bootstrap.Of([.. cases.Select(Steps).Where(s => s.Count > 0)], l => Scores.Share(l.SelectMany(s => s), s => s.Found is not null), s => s.Count);

    /// <summary>Steps in signals that the vehicle has, with enough of the window on either side.</summary>
    private static List<Shown> Steps(Case c)
    {
        var shown = new List<Shown>();
        foreach (var step in c.Truth.Steps.Where(s => s.Date >= c.From.AddDays(LoggedDays) && s.Date <= c.End.AddDays(-LoggedDays)))
        {
            if (Math.Abs(step.SteeringPullNm) >= StepNm && c.Truth.Signals == "torque") shown.Add(Match(c, "steering_pull", step.Date));
            if (Math.Abs(step.OffCentreDeg) >= StepDeg) shown.Add(Match(c, "off_centre_angle", step.Date));
        }
        return shown;
    }

    private static Shown Match(Case c, string quantity, DateOnly date)
    {
        var nearest = Published(c).Where(p => p.Quantity == quantity).Select(p => (Change: p, Off: DaysOff(p, date))).OrderBy(p => p.Off).FirstOrDefault();
        return nearest.Change is not null && nearest.Off <= NearDays ? new(quantity, date, nearest.Change, nearest.Off) : new(quantity, date, null, double.NaN);
    }

    /// <summary>Noon of the day stands for a date.</summary>
    private static double DaysOff(Change change, DateOnly date) => Math.Abs((change.Likely.ToDateTime() - date.ToDateTime(new TimeOnly(12, 0), DateTimeKind.Utc)).TotalDays);

    private static IEnumerable<Change> Published(Case c) => (c.Diagnosis?.Changes ?? []).Where(p => p.Published && p.Quantity != "wear_rate");

    /// <summary>Published changes of the steering with no true one near: no step, no repair, no fault that drifts meanwhile.</summary>
    private static IEnumerable<Change> FalseChanges(Case c) => Published(c).Where(p =>
        !c.Truth.Steps.Any(s => DaysOff(p, s.Date) <= NearDays)
        && !(c.Truth.RepairedOn is { } repaired && DaysOff(p, repaired) <= NearDays)
        && !c.Truth.Quantities.Any(q => q.Mode == "drifting"));
}
