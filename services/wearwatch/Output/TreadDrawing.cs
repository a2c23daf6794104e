using System.Globalization;
using WearWatch.Contracts.V1;

namespace WearWatch.Output;

/// <summary>
/// A tyre in plain characters, at most 80 columns: the tread across, every groove a bar on one scale for the whole vehicle with
/// the limit drawn through them, and the depth at the governing groove against distance with the fan of what is to come.
/// </summary>
internal static class TreadDrawing
{
    private const int Left = 10, Width = 64, Height = 8;

    /// <summary>Deepest groove or reading of a vehicle's tyres, mm: the scale that all its drawings share.</summary>
    public static double DeepestMm(IEnumerable<TyreDiagnosis> tyres) =>
        tyres.SelectMany(t => t.Grooves.Select(g => g.DepthMm).Concat(t.Points.Select(p => p.DepthMm))).Where(double.IsFinite).DefaultIfEmpty(0).Max();

    /// <summary>Nothing for a tyre without readings.</summary>
    public static IReadOnlyList<string> Lines(TyreDiagnosis tyre, double deepestMm)
    {
        if (tyre.Points.Count == 0 || !(deepestMm > 0)) return [];
        List<string> lines = [.. Across(tyre, deepestMm), .. Wear(tyre)];
        return lines;
    }

    /// <summary>Width from the outboard to the inboard side; <c>|</c> is the legal limit.</summary>
    private static IEnumerable<string> Across(TyreDiagnosis tyre, double deepestMm)
    {
        if (tyre.Grooves.Count == 0) yield break;
        var perMm = Width / Math.Max(deepestMm, tyre.HasLimitMm ? tyre.LimitMm : 0);
        yield return $"{tyre.Position} across, from the outboard side{(Depths.IsInches(tyre.GaugeStepMm) ? "; gauge reads 1/32 in" : ", mm")}{(tyre.HasLimitMm ? $"; | the limit of {Number(tyre.LimitMm)} mm" : "")}";
        foreach (var groove in tyre.Grooves)
        {
            var bar = new string('=', Math.Clamp((int)Math.Round(groove.DepthMm * perMm), 0, Width)).PadRight(Width).ToCharArray();
            if (tyre.HasLimitMm) bar[Math.Clamp((int)Math.Round(tyre.LimitMm * perMm) - 1, 0, Width - 1)] = '|';
            var side = groove == tyre.Grooves[0] ? "out" : groove == tyre.Grooves[^1] ? "in" : "";
            yield return $"{side,4}{groove.Groove,3} {new string(bar).TrimEnd()} {Depths.Gauge(groove.DepthMm, tyre.GaugeStepMm)}";
        }
    }

    /// <summary><c>o</c> measured, <c>*</c> the middle of what is to come, <c>:</c> its 90 % fan, <c>-</c> the limit.</summary>
    private static IEnumerable<string> Wear(TyreDiagnosis tyre)
    {
        if (tyre.RemainingKm is not { } left || !tyre.HasLimitMm || tyre.DepthMm is not { } depth) yield break;
        var (first, last) = (tyre.Points[0].DistanceKm, tyre.Points[^1].DistanceKm);
        // A fan that opens beyond three times its middle is cut off rather than squeezing the past into a corner.
        var end = last + Math.Max(1, Math.Min(left.High, Math.Max(3 * left.Value, last - first)));
        var top = Math.Max(tyre.Points.Max(p => p.DepthMm), tyre.LimitMm + 0.5);
        var bottom = Math.Min(tyre.LimitMm, tyre.Points.Min(p => p.DepthMm));
        var canvas = new char[Height, Width];
        for (var r = 0; r < Height; r++)
            for (var c = 0; c < Width; c++) canvas[r, c] = r == Row(tyre.LimitMm) ? '-' : ' ';
        for (var c = Column(last); c < Width && left.Value > 0; c++)
        {
            var ahead = first + (c + 0.5) / Width * (end - first) - last;
            if (ahead < 0) continue;
            for (var r = Row(At(ahead, left.High)); r <= Row(At(ahead, left.Low)); r++) canvas[r, c] = ':';
            canvas[Row(At(ahead, left.Value)), c] = '*';
        }
        foreach (var point in tyre.Points) canvas[Row(point.DepthMm), Column(point.DistanceKm)] = 'o';
        yield return $"{tyre.Position} wear{(tyre.GoverningGroove > 0 ? $" at groove {tyre.GoverningGroove}" : "")}: o measured, * to come, : 90 % fan, - limit";
        for (var r = 0; r < Height; r++)
        {
            var label = r == Row(tyre.LimitMm) ? Number(tyre.LimitMm) : r == 0 ? top.ToString("0.0", CultureInfo.InvariantCulture) : "";
            yield return $"{label,Left - 2} {new string([.. Enumerable.Range(0, Width).Select(c => canvas[r, c])])}".TrimEnd();
        }
        var (from, to) = (Km(first), Km(end));
        yield return $"{"km",Left - 2} {from}{to.PadLeft(Width - from.Length)}";
        yield return "";

        double At(double ahead, double limitKm) => limitKm <= 0 ? tyre.LimitMm : Math.Max(tyre.LimitMm, depth.Value + (tyre.LimitMm - depth.Value) * ahead / limitKm);
        int Row(double mm) => Math.Clamp((int)Math.Round((top - mm) / (top - bottom) * (Height - 1)), 0, Height - 1);
        int Column(double km) => Math.Clamp((int)((km - first) / (end - first) * Width), 0, Width - 1);
    }

    private static string Number(double mm) => mm.ToString("0.0#", CultureInfo.InvariantCulture);

    private static string Km(double km) => km.ToString("#,0", CultureInfo.InvariantCulture);
}
