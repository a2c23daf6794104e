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

    /// <summary>Distance no vehicle runs in a day, km (two drivers, 24 h at 100 km/h).</summary>
    private const double MostKmPerDay = 2400;

    /// <param name="survey">The survey as sent, in mm.</param>
    /// <param name="vehicle">The vehicle it names.</param>
    /// <param name="previous">The latest earlier survey that was stored, if any.</param>
    /// <param name="fittingsSincePrevious">What was done to tyres between the two.</param>
    /// <param name="newDepthMm">Depth when new of the tyre on a position, mm; null where not known.</param>
    /// <param name="limitFor">Legal limit of a position on the day.</param>
    /// <returns>Issues, refusals first, then holds, in the order of the survey.</returns>
    public static IReadOnlyList<ReadingIssue> Check(
        TreadSurvey survey, Vehicle vehicle, TreadSurvey? previous, IReadOnlyList<FittingRecord> fittingsSincePrevious,
        Func<Position, double?> newDepthMm, Func<Position, DepthLimit> limitFor)
    {
        var issues = new List<ReadingIssue>();
        Whole(survey, vehicle, issues);
        for (var i = 0; i < survey.Tyres.Count; i++) Tyre(survey, vehicle, i, newDepthMm, limitFor, issues);
        if (previous is not null && !issues.Any(x => x.Weight == IssueWeight.Refuse)) Against(survey, vehicle, previous, fittingsSincePrevious, newDepthMm, issues);
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
        for (var j = 0; j < tyre.Depths.Count; j++) Depth(tyre, index, j, newDepthMm(p), issues);
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

    private static void Depth(TyreReadings tyre, int index, int j, double? newDepth, List<ReadingIssue> issues)
    {
        var depth = tyre.Depths[j];
        var field = $"tyres[{index}].depths[{j}]";
        var place = depth.Groove == 0 ? $"{tyre.Position}" : $"Groove {depth.Groove} of {tyre.Position}";
        void Add(string code, IssueWeight weight, string name, string message) => issues.Add(new(code, weight, $"{field}.{name}", message, tyre.Position, depth.Groove));

        if (depth.Groove is < 0 or > MaxGroove) Add("groove_out_of_range", IssueWeight.Refuse, "groove", $"Grooves count from 1 at the outboard side to {MaxGroove}; 0 stands for the whole tyre.");
        if (!double.IsFinite(depth.DepthMm)) Add("depth_not_a_number", IssueWeight.Refuse, "depth_mm", $"{place}: the depth is not a number.");
        else if (depth.DepthMm < 0) Add("depth_negative", IssueWeight.Refuse, "depth_mm", $"{place}: a depth cannot be below zero.");
        else if (depth.DepthMm > DeepestMm) Add("depth_out_of_range", IssueWeight.Refuse, "depth_mm", $"{place} reads {Mm(depth.DepthMm)}: no road tyre is that deep.");
        else if (newDepth is { } n && depth.DepthMm > n + 3 * Math.Sqrt(GaugeNoise.RepeatSdMm * GaugeNoise.RepeatSdMm + TreadShape.NewDepthSdMm * TreadShape.NewDepthSdMm))
            Add("depth_above_new", IssueWeight.Hold, "depth_mm", $"{place} reads {Mm(depth.DepthMm)}, but the tyre had {Mm(n)} when new: typed wrong, or another tyre?");
        if (depth.ClockDeg is { } clock && !(double.IsFinite(clock) && clock is >= 0 and <= 360)) Add("clock_out_of_range", IssueWeight.Refuse, "clock_deg", $"{place}: the place round the tyre is given in degrees from 0 to 360.");
        if (depth.OutboardEdgeMm is { } edge && !(double.IsFinite(edge) && Math.Abs(edge) <= 10)) Add("edge_out_of_range", IssueWeight.Refuse, "outboard_edge_mm", $"{place}: the step of the rib edges must lie between -10 and 10 mm.");
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

    private static void Against(TreadSurvey survey, Vehicle vehicle, TreadSurvey previous, IReadOnlyList<FittingRecord> fittings, Func<Position, double?> newDepthMm, List<ReadingIssue> issues)
    {
        Distance(survey, previous, issues);
        if (survey.At < previous.At) return; // A late survey is sorted in, not held against one taken after it.
        var touched = fittings.SelectMany(f => f.FromPosition is { } from ? new[] { f.Position, from } : [f.Position]).ToHashSet();
        var earlier = previous.Tyres.ToDictionary(t => t.Position);
        var mixUp = MixUp(survey, vehicle, previous, touched, newDepthMm);
        if (mixUp is not null)
        {
            issues.Add(new(Code(mixUp.Explanation.Kind), IssueWeight.Hold, "tyres", $"{mixUp.Explanation.Sentence} Compared with {When(previous)} that fits better than the survey as written: please look again.", null));
            return; // One question is enough; the grooves that grew follow from it.
        }
        var noise = GaugeNoise.ReadingVariance(GaugeNoise.RepeatSdMm, survey.ResolutionMm) + GaugeNoise.ReadingVariance(GaugeNoise.RepeatSdMm, previous.ResolutionMm) + 2 * GaugeNoise.TechnicianSdMm * GaugeNoise.TechnicianSdMm;
        for (var i = 0; i < survey.Tyres.Count; i++)
        {
            var tyre = survey.Tyres[i];
            if (touched.Contains(tyre.Position) || !earlier.TryGetValue(tyre.Position, out var before)) continue;
            for (var j = 0; j < tyre.Depths.Count; j++)
            {
                var depth = tyre.Depths[j];
                var then = before.Depths.Where(d => d.Groove == depth.Groove).Select(d => d.DepthMm).ToList();
                if (then.Count == 0 || tyre.Depths.Take(j).Any(d => d.Groove == depth.Groove)) continue;
                var growth = tyre.Depths.Where(d => d.Groove == depth.Groove).Average(d => d.DepthMm) - then.Average();
                if (growth > 3 * Math.Sqrt(noise))
                    issues.Add(new("depth_grew", IssueWeight.Hold, $"tyres[{i}].depths[{j}].depth_mm", $"{(depth.Groove == 0 ? $"{tyre.Position}" : $"Groove {depth.Groove} of {tyre.Position}")} reads {Mm(growth)} deeper than on {When(previous)}: typed wrong, or a new tyre?", tyre.Position, depth.Groove));
            }
        }
    }

    private static void Distance(TreadSurvey survey, TreadSurvey previous, List<ReadingIssue> issues)
    {
        if (survey.DistanceKm is not { } now || previous.DistanceKm is not { } then || survey.CounterReplaced || survey.DistanceSource != previous.DistanceSource) return;
        var run = survey.At >= previous.At ? now - then : then - now;
        if (run < -1)
            issues.Add(new("distance_ran_back", IssueWeight.Hold, "distance_km", $"The counter reads {Km(Math.Abs(run))} less than on {When(previous)}: typed wrong, or was the counter replaced?"));
        else if (run > MostKmPerDay * (Math.Abs((survey.At - previous.At).TotalDays) + 1))
            issues.Add(new("distance_jumped", IssueWeight.Hold, "distance_km", $"The counter reads {Km(run)} more than on {When(previous)}: no vehicle runs that far in the time. One digit too many?"));
    }

    /// <summary>The explanation that clearly fits better than the survey as written, from the previous survey alone.</summary>
    private static WeighedExplanation? MixUp(TreadSurvey survey, Vehicle vehicle, TreadSurvey previous, HashSet<Position> touched, Func<Position, double?> newDepthMm)
    {
        var weeks = Math.Max(0, (survey.At - previous.At).TotalDays / 7);
        var km = survey.DistanceKm - previous.DistanceKm is { } d and >= 0 && !survey.CounterReplaced ? d : weeks * (vehicle.KmPerWeek ?? UsualUse.KmPerWeek(vehicle.Class));
        var before = previous.Tyres.Where(t => !touched.Contains(t.Position)).Select(t => TreadShape.Of(t, previous.ResolutionMm)).OfType<TreadShape>().ToDictionary(s => s.Position);
        var expected = new Dictionary<Position, TyreExpectation>();
        foreach (var p in vehicle.Positions())
        {
            var prior = WearPrior.For(vehicle.Class, WearPrior.RoleOf(vehicle, p.Axle));
            var loss = new Estimate(prior.RateMmPer1000Km, prior.RateMmPer1000Km) * (km / 1000);
            expected[p] = before.TryGetValue(p, out var shape)
                ? new(shape.MeanDepthMm - loss, (shape.EdgeMm ?? new(0, 1)) + loss * 0.2, (shape.ShoulderMm ?? new(0, 1)) + loss * 0.2, 1)
                : new(new(newDepthMm(p) ?? prior.NewDepthMm, 6), new(0, 1), new(0, 1), 0);
        }
        var shapes = survey.Tyres.Select(t => TreadShape.Of(t, survey.ResolutionMm)).OfType<TreadShape>().ToList();
        if (shapes.Count == 0 || before.Count == 0) return null;
        var weighed = SurveyExplanation.Weigh(vehicle, shapes, expected, GaugeNoise.TechnicianSdMm, survey.ResolutionMm);
        var asWritten = weighed.First(w => w.Explanation.Kind == ExplanationKind.AsWritten).Weight;
        // The earlier survey was looked at and kept; the new one is the one that can still be looked at again.
        var best = weighed.Where(w => w.Explanation.Kind is not (ExplanationKind.AsWritten or ExplanationKind.ComparedSurveyWrong)).MaxBy(w => w.Weight)!;
        return asWritten <= 1 - SurveyExplanation.Clear && best.Weight > asWritten ? best : null;
    }

    private static string Code(ExplanationKind kind) => kind switch
    {
        ExplanationKind.SidesSwapped or ExplanationKind.AxleSidesSwapped => "sides_swapped",
        ExplanationKind.AxlesSwapped => "axles_swapped",
        ExplanationKind.ThirtySecondsTakenForMm or ExplanationKind.MmTakenForThirtySeconds => "unit_mix_up",
        ExplanationKind.PositionsExchanged => "positions_exchanged",
        ExplanationKind.GroovesReversed => "grooves_reversed",
        _ => "other_vehicle",
    };

    private static string Mm(double mm) => string.Create(CultureInfo.InvariantCulture, $"{mm:0.0#} mm");

    private static string Km(double km) => string.Create(CultureInfo.InvariantCulture, $"{km:0} km");

    private static string When(TreadSurvey survey) => survey.At.ToString("d MMMM yyyy", CultureInfo.InvariantCulture);
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
