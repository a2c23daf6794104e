using System.Globalization;
using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Tread;

/// <summary>The limit that applies to one tyre on one day.</summary>
/// <param name="LimitMm">mm.</param>
/// <param name="Judged">How the depths of the tyre are held against it.</param>
/// <param name="Source">Rule and date, to be printed beside every use.</param>
public sealed record DepthLimit(double LimitMm, BandJudgement Judged, string Source);

/// <summary>One tyre held against its limit.</summary>
/// <param name="Legal">False when it may not run.</param>
/// <param name="GoverningMm">Depth that decides, mm.</param>
/// <param name="Groove">Groove that decides, counted from the outboard side; 0 when one depth stands for the tyre.</param>
public sealed record DepthJudgement(bool Legal, double GoverningMm, int Groove);

/// <summary>Which legal limit applies, and whether a tyre meets it. Information, not an inspection: current local law comes first.</summary>
public static class DepthLimits
{
    /// <summary>
    /// The limit for a position. The operator's latest fact that fits replaces the table; otherwise the strictest line that
    /// fits applies. Without a gross mass the stricter of the light and the heavy line is taken. Unknown jurisdictions get
    /// 1.6 mm, and the source says so.
    /// </summary>
    public static DepthLimit For(string jurisdiction, Vehicle vehicle, Position position, bool winterTyre, DateOnly on, IReadOnlyList<DepthLimitFact> entered)
    {
        var own = entered
            .Where(f => string.Equals(f.Jurisdiction, jurisdiction, StringComparison.OrdinalIgnoreCase) && f.From <= on
                && (f.Class is null || f.Class == vehicle.Class) && (f.Axle is null || f.Axle == position.Axle) && (!f.WinterOnly || winterTyre))
            .OrderByDescending(f => f.WinterOnly).ThenByDescending(f => f.Axle is not null).ThenByDescending(f => f.Class is not null)
            .ThenByDescending(f => f.From).ThenByDescending(f => f.LimitMm).FirstOrDefault();
        var built = BuiltIn(jurisdiction.ToUpperInvariant(), vehicle, position, winterTyre, on);
        return own is null ? built : new DepthLimit(own.LimitMm, built.Judged, $"{own.Source} (entered by the operator, in force from {Day(own.From)})");
    }

    private static DepthLimit BuiltIn(string jurisdiction, Vehicle vehicle, Position position, bool winterTyre, DateOnly on)
    {
        if (jurisdiction == "UK") jurisdiction = "GB";
        var rules = Fitting(jurisdiction, vehicle, position, winterTyre, on);
        if (rules.Count == 0 && DepthLimitTable.EuropeanUnion.Contains(jurisdiction)) rules = Fitting("EU", vehicle, position, winterTyre, on);
        if (rules.Count == 0)
            return new DepthLimit(1.6, BandJudgement.LeastOfCentralThreeQuarters, $"no rule on file for {jurisdiction} and this vehicle: 1.6 mm taken, as in most of Europe; enter your own");
        var rule = rules.OrderByDescending(r => r.LimitMm).First();
        var massUnknown = vehicle.GrossMassKg is null && rules.Any(r => r.AboveKg > 0 || double.IsFinite(r.UpToKg)) ? "; gross mass not recorded, so the stricter line" : "";
        return new DepthLimit(rule.LimitMm, rule.Judged, $"{rule.Source} (in force from {Day(rule.From)}, checked {Day(DepthLimitTable.CheckedOn)}{massUnknown})");
    }

    private static List<DepthRule> Fitting(string jurisdiction, Vehicle vehicle, Position position, bool winterTyre, DateOnly on) =>
    [
        .. DepthLimitTable.Rules.Where(r => r.Jurisdiction == jurisdiction && r.From <= on
            && (r.Classes is null || r.Classes.Contains(vehicle.Class))
            && (vehicle.GrossMassKg is not { } kg || (kg > r.AboveKg && kg <= r.UpToKg))
            && (!r.FrontOnly || position.Axle == 1) && (!r.WinterTyre || winterTyre) && InSeason(r, on)),
    ];

    private static bool InSeason(DepthRule rule, DateOnly on)
    {
        if (rule.Season is not { } s) return true;
        var day = on.Month * 100 + on.Day;
        return day >= s.FromMonth * 100 + s.FromDay || day <= s.ToMonth * 100 + s.ToDay;
    }

    /// <summary>
    /// Holds the depths of a tyre against its limit: the least depth over the grooves the rule asks for, never a mean.
    /// </summary>
    /// <remarks>
    /// Grooves are known by order, not by place. With equal ribs, groove g of G lies at g/(G+1) of the breadth, so up to
    /// seven grooves all lie within the central three quarters and all count; of eight or more the outermost two lie
    /// outside and do not. That errs to the strict side. Four points: per place round the tyre the least groove; where
    /// no place was noted, the four readings of a single groove; with fewer than four points the least decides.
    /// </remarks>
    public static DepthJudgement? Judge(DepthLimit limit, IReadOnlyList<GrooveDepth> depths)
    {
        var usable = depths.Where(d => double.IsFinite(d.DepthMm) && d.DepthMm >= 0).ToList();
        if (usable.Count == 0) return null;
        var grooves = usable.Max(d => d.Groove);
        if (limit.Judged is BandJudgement.LeastOfCentralThreeQuarters or BandJudgement.LeastOfThreeQuartersBand && grooves >= 8)
        {
            var inside = usable.Where(d => d.Groove != 1 && d.Groove != grooves).ToList();
            if (inside.Count > 0) usable = inside;
        }
        var ordered = usable.OrderBy(d => d.DepthMm).ThenBy(d => d.Groove).ToList();
        var governing = ordered[0];
        if (limit.Judged == BandJudgement.AtMostOneOfFourPoints && SecondOfFourPoints(usable) is { } second) governing = second;
        return new DepthJudgement(!BelowLimit(governing.DepthMm, limit.LimitMm), governing.DepthMm, governing.Groove);
    }

    /// <summary>Below, beyond the rounding of a conversion between inches and mm.</summary>
    internal static bool BelowLimit(double depthMm, double limitMm) => depthMm < limitMm - 1e-9;

    /// <summary>The second least of four or more points: the one that may not be below the limit.</summary>
    private static GrooveDepth? SecondOfFourPoints(List<GrooveDepth> depths)
    {
        var points = depths.All(d => d.ClockDeg is not null)
            ? [.. depths.GroupBy(d => d.ClockDeg).Select(g => g.OrderBy(d => d.DepthMm).ThenBy(d => d.Groove).First())]
            : depths.Select(d => d.Groove).Distinct().Count() == 1 ? depths : [];
        return points.Count >= 4 ? points.OrderBy(d => d.DepthMm).ThenBy(d => d.Groove).ElementAt(1) : null;
    }

    private static string Day(DateOnly date) => date.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture);
}
