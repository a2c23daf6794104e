using System.Globalization;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tread;

/// <summary>The instant answer to one survey: what is impossible, what is implausible, and what must be known at once.</summary>
public static class SurveyCheck
{
    public const int MaxGroove = 24;

    /// <summary>Deepest tread of any road tyre, mm; nothing on the road has 30 mm (common practice, no source).</summary>
    public const double DeepestMm = 30;

    /// <param name="survey">The survey as sent, in mm.</param>
    /// <param name="vehicle">The vehicle it names.</param>
    /// <param name="earlier">Surveys to compare with, oldest first: a few before it or, of a late survey, the one after it.</param>
    /// <param name="fittings">What was done to the vehicle's tyres, by time.</param>
    /// <param name="newDepthMm">Depth when new of the tyre on a position, mm; null where not known.</param>
    /// <param name="limitFor">Legal limit of a position on the day.</param>
    /// <returns>Issues, refusals first, then holds, in the order of the survey.</returns>
    public static IReadOnlyList<ReadingIssue> Check(
        TreadSurvey survey, Vehicle vehicle, IReadOnlyList<TreadSurvey> earlier, IReadOnlyList<FittingRecord> fittings,
        Func<Position, double?> newDepthMm, Func<Position, DepthLimit> limitFor)
    {
        var issues = new List<ReadingIssue>();
        Whole(survey, vehicle, issues);
        for (var i = 0; i < survey.Tyres.Count; i++) Tyre(survey, vehicle, i, newDepthMm, limitFor, issues);
        if (earlier.Count > 0 && !issues.Any(x => x.Weight == IssueWeight.Refuse)) SurveyComparison.Add(survey, vehicle, earlier, fittings, newDepthMm, issues);
        return [.. issues.OrderBy(x => x.Weight)];
    }

    private static void Whole(TreadSurvey survey, Vehicle vehicle, List<ReadingIssue> issues)
    {
        if (survey.At == default) issues.Add(new("time_absent", IssueWeight.Refuse, "at", "When was this measured? The time is missing."));
        if (survey.Tyres.Count == 0) issues.Add(new("empty_survey", IssueWeight.Refuse, "tyres", "The survey has no tyre in it."));
        if (!(survey.ResolutionMm > 0) || survey.ResolutionMm > 2) issues.Add(new("gauge_resolution", IssueWeight.Refuse, "resolution_mm", "The gauge's smallest step must be above 0 and at most 2 mm."));
        if (survey.DistanceKm is { } km && !(double.IsFinite(km) && km >= 0)) issues.Add(new("distance_not_a_number", IssueWeight.Refuse, "distance_km", "The distance is not a number of kilometres."));
        var there = vehicle.Positions().ToHashSet();
        var seen = new HashSet<Position>();
        for (var i = 0; i < survey.Tyres.Count; i++)
        {
            var p = survey.Tyres[i].Position;
            if (!there.Contains(p))
                issues.Add(new("unknown_position", IssueWeight.Refuse, $"tyres[{i}].position", $"{vehicle.FleetNumber ?? vehicle.VehicleId} has no tyre at {p}; it has {string.Join(", ", vehicle.Positions())}.", p));
            else if (!seen.Add(p))
                issues.Add(new("position_twice", IssueWeight.Refuse, $"tyres[{i}].position", $"{p} is in the survey twice.", p));
        }
    }

    private static void Tyre(TreadSurvey survey, Vehicle vehicle, int index, Func<Position, double?> newDepthMm, Func<Position, DepthLimit> limitFor, List<ReadingIssue> issues)
    {
        var tyre = survey.Tyres[index];
        var p = tyre.Position;
        for (var j = 0; j < tyre.Depths.Count; j++) Depth(survey, tyre, index, j, newDepthMm(p), issues);
        if (tyre.PressureKpa is { } kpa && !(double.IsFinite(kpa) && kpa is >= 0 and <= 1500))
            issues.Add(new("pressure_out_of_range", IssueWeight.Refuse, $"tyres[{index}].pressure_kpa", $"The pressure at {p} must lie between 0 and 1500 kPa.", p));
        if (tyre.NotReached is { } why)
            issues.Add(new("not_reached", IssueWeight.Tell, $"tyres[{index}].not_reached", $"{p} was not reached ({why}). It stays as last measured.", p));
        else if (tyre.Depths.Count == 0)
            issues.Add(new("no_depth", IssueWeight.Tell, $"tyres[{index}].depths", $"{p} has no depth. Say why if it could not be reached.", p));
        else if (tyre.Depths.Select(d => d.Groove).Distinct().Count() == 1)
            issues.Add(new("one_groove_only", IssueWeight.Tell, $"tyres[{index}].depths", $"{p} has one groove only: its wear shows, its one-edge wear cannot.", p));
        Safety(tyre, index, vehicle, limitFor, issues);
    }

    private static void Depth(TreadSurvey survey, TyreReadings tyre, int index, int j, double? newDepth, List<ReadingIssue> issues)
    {
        var depth = tyre.Depths[j];
        var field = $"tyres[{index}].depths[{j}]";
        var place = depth.Groove == 0 ? $"{tyre.Position}" : $"Groove {depth.Groove} of {tyre.Position}";
        void Add(string code, IssueWeight weight, string name, string message, IReadOnlyList<WeighedExplanation>? choices = null) =>
            issues.Add(new(code, weight, $"{field}.{name}", message, tyre.Position, depth.Groove) { Choices = choices ?? [] });

        if (depth.Groove is < 0 or > MaxGroove) Add("groove_out_of_range", IssueWeight.Refuse, "groove", $"Grooves count from 1 at the outboard side to {MaxGroove}; 0 stands for the whole tyre.");
        if (!double.IsFinite(depth.DepthMm)) Add("depth_not_a_number", IssueWeight.Refuse, "depth_mm", $"{place}: the depth is not a number.");
        else if (depth.DepthMm < 0) Add("depth_negative", IssueWeight.Refuse, "depth_mm", $"{place}: a depth cannot be below zero.");
        else if (depth.DepthMm > DeepestMm) Add("depth_out_of_range", IssueWeight.Refuse, "depth_mm", $"{place} reads {Mm(depth.DepthMm)}: no road tyre is that deep{(depth.DepthMm / 10 <= DeepestMm ? $"; was {Mm(depth.DepthMm / 10)} meant" : "")}.");
        else if (newDepth is { } n && depth.DepthMm > n + 3 * Math.Sqrt(GaugeNoise.RepeatSdMm * GaugeNoise.RepeatSdMm + TreadShape.NewDepthSdMm * TreadShape.NewDepthSdMm))
            AboveNew(survey, tyre, depth, n, Add, place);
        if (depth.ClockDeg is { } clock && !(double.IsFinite(clock) && clock is >= 0 and <= 360)) Add("clock_out_of_range", IssueWeight.Refuse, "clock_deg", $"{place}: the place round the tyre is given in degrees from 0 to 360.");
        if (depth.OutboardEdgeMm is { } edge && !(double.IsFinite(edge) && Math.Abs(edge) <= 10)) Add("edge_out_of_range", IssueWeight.Refuse, "outboard_edge_mm", $"{place}: the step of the rib edges must lie between -10 and 10 mm.");
    }

    /// <summary>Weighed against the tyre when new, whose wear by now may be anything.</summary>
    private static void AboveNew(TreadSurvey survey, TyreReadings tyre, GrooveDepth depth, double newMm, Action<string, IssueWeight, string, string, IReadOnlyList<WeighedExplanation>?> add, string place)
    {
        var fresh = tyre with { Depths = [.. tyre.Depths.Where(d => double.IsFinite(d.DepthMm)).Select(d => d with { DepthMm = newMm })] };
        var choices = TyreExplanation.Weigh(tyre, survey.ResolutionMm, fresh, 0.1, new Estimate(newMm / 2, newMm / 4), new Estimate(newMm, 3), false);
        add("depth_above_new", IssueWeight.Hold, "depth_mm", $"{place} reads {Mm(depth.DepthMm)}, but the tyre had {Mm(newMm)} when new: {ExplanationWords.Ask(choices.Where(c => c.Explanation.Kind is ExplanationKind.GrooveMistyped or ExplanationKind.TyreChanged))}", SurveyComparison.Offered(choices));
    }

    private static void Safety(TyreReadings tyre, int index, Vehicle vehicle, Func<Position, DepthLimit> limitFor, List<ReadingIssue> issues)
    {
        var unsafeSeen = tyre.Seen.Where(s => s is Seen.Cord or Seen.Bulge or Seen.Unsafe or Seen.Cut).ToList();
        if (unsafeSeen.Count > 0)
            issues.Add(new("unsafe_seen", IssueWeight.Tell, $"tyres[{index}].seen", $"{tyre.Position}: {string.Join(", ", unsafeSeen).ToLowerInvariant()} seen. Do not run this tyre until someone competent has looked at it.", tyre.Position));
        if (!vehicle.Positions().Contains(tyre.Position)) return;
        var limit = limitFor(tyre.Position);
        if (DepthLimits.Judge(limit, tyre.Depths) is { Legal: false } judged)
            issues.Add(new("below_limit", IssueWeight.Tell, $"tyres[{index}].depths", $"{(judged.Groove == 0 ? $"{tyre.Position}" : $"Groove {judged.Groove} of {tyre.Position}")} reads {Mm(judged.GoverningMm)}, below the limit of {Mm(limit.LimitMm)}: {limit.Source}.", tyre.Position, judged.Groove));
    }

    internal static string Mm(double mm) => string.Create(CultureInfo.InvariantCulture, $"{mm:0.0#} mm");

    /// <summary>A difference of two readings is known no better than a tenth.</summary>
    internal static string Tenths(double mm) => string.Create(CultureInfo.InvariantCulture, $"{mm:0.0} mm");

    internal static string Km(double km) => string.Create(CultureInfo.InvariantCulture, $"{km:0} km");

    internal static string When(TreadSurvey survey) => survey.At.ToString("d MMMM yyyy", CultureInfo.InvariantCulture);
}

/// <summary>Distance vehicles usually run where nobody has said, km per week (from memory).</summary>
public static class UsualUse
{
    public static double KmPerWeek(VehicleClass vehicleClass) => vehicleClass switch
    {
        VehicleClass.Car => 350,
        VehicleClass.Van => 600,
        VehicleClass.Bus => 1100,
        _ => 1900,
    };
}
