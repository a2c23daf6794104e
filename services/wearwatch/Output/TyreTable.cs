using System.Globalization;
using WearWatch.Contracts.V1;

namespace WearWatch.Output;

/// <summary>A vehicle's tyres in at most 80 columns: depth, wear, distance and date to the limit and to the operator's own depth, and where each limit comes from.</summary>
internal static class TyreTable
{
    public static IEnumerable<string> Lines(Contracts.V1.Diagnosis d)
    {
        if (d.Tyres.Count == 0) yield break;
        yield return "tyre  depth,gr  wear/1000 km  km to the limit (90 %)     about (90 %)";
        foreach (var t in d.Tyres)
        {
            yield return $"{t.Position,-4}  {Depth(t),-8}  {Wear(t),-12}  {Distance(t.RemainingKm),-25}  {Date(t.LimitOn)}".TrimEnd();
            if (t.HasChangeAtMm && t.ToChangeKm is not null)
                yield return $"      {$"to change at {Number(t.ChangeAtMm)} mm",-22}  {Distance(t.ToChangeKm),-25}  {Date(t.ChangeOn)}".TrimEnd();
        }
        if (d.Tyres.Any(t => t.RateBorrowed)) yield return "~ mostly the fleet's rate, for want of readings of its own";
        if (d.KmPerWeek is { } use) yield return string.Create(CultureInfo.InvariantCulture, $"Dates at {use.Value:#,0} km a week (a single week {Math.Max(0, use.Low):#,0} to {use.High:#,0}).");
        foreach (var limit in d.Tyres.Where(t => t.HasLimitMm).GroupBy(t => (t.LimitMm, t.LimitSource)))
            yield return $"Limit {Number(limit.Key.LimitMm)} mm{(limit.Count() == d.Tyres.Count ? "" : $" ({string.Join(", ", limit.Select(t => t.Position))})")}: {limit.Key.LimitSource}. Current local law comes first.";
    }

    /// <summary><c>7.3 g2</c>; a single depth has no groove.</summary>
    private static string Depth(TyreDiagnosis t) =>
        t.DepthMm is null ? "not read" : $"{Depths.Gauge(t.DepthMm.Value, t.GaugeStepMm)}{(t.GoverningGroove > 0 ? $" g{t.GoverningGroove}" : "")}";

    private static string Wear(TyreDiagnosis t) => t.RateMmPer1000Km is not { } r ? "not known"
        : string.Create(CultureInfo.InvariantCulture, $"{(t.RateBorrowed ? "~" : "")}{r.Value:0.000}±{(r.High - r.Low) / 2:0.000}");

    private static string Distance(Contracts.V1.Range? km) => km is null ? "not known"
        : km.High <= 0 ? "reached" : $"{Round(km.Value)} ({Round(km.Low)}-{Round(km.High)})";

    /// <summary>Two digits and no more: a distance to come is known no better.</summary>
    private static string Round(double km)
    {
        if (km < 1) return "0";
        var step = Math.Pow(10, Math.Max(0, Math.Floor(Math.Log10(km)) - 1));
        return (Math.Round(km / step) * step).ToString("#,0", CultureInfo.InvariantCulture);
    }

    private static string Date(DateRange? on)
    {
        if (on is null) return "";
        var year = on.Likely[..4];
        return $"{Month(on.Likely)} {year} ({Near(on.Earliest)}-{Near(on.Latest)})";

        string Near(string day) => day[..4] == year ? Month(day) : $"{Month(day)}{day[2..4]}";
        static string Month(string day) => DateOnly.ParseExact(day, "yyyy-MM-dd", CultureInfo.InvariantCulture).ToString("MMM", CultureInfo.InvariantCulture);
    }

    private static string Number(double mm) => mm.ToString("0.0#", CultureInfo.InvariantCulture);
}
