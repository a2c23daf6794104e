using System.Globalization;
using System.Text;
using System.Text.Encodings.Web;
using System.Text.Json;
using System.Text.Json.Nodes;
using WearWatch.Proving.Run;
using WearWatch.Proving.Scoring;

namespace WearWatch.Proving.Figures;

/// <summary>Named figures in the order they are told.</summary>
internal sealed class FigureList : List<(string Name, Figure Figure)>
{
    public void Add(string name, Figure figure) => Add((name, figure));
}

/// <summary>The figures of one part, those of plain methods beside them, and the same split by what may matter.</summary>
internal sealed record Report
{
    public required string Part { get; init; }
    public required FigureList Main { get; init; }
    /// <summary>By plain method.</summary>
    public required IReadOnlyList<(string Method, FigureList Figures)> Baselines { get; init; }
    /// <summary>By split (<c>by_class</c>) and group (<c>van</c>).</summary>
    public required IReadOnlyList<(string Split, IReadOnlyList<(string Group, FigureList Figures)> Groups)> Splits { get; init; }
    public int Fleets { get; init; }
    public int Vehicles { get; init; }
    public int NotDiagnosed { get; init; }
    public TimeSpan Elapsed { get; init; }

    public static Report Of(string part, IReadOnlyList<Case> cases, TimeSpan elapsed)
    {
        var report = part switch
        {
            "verdict" => VerdictFigures.Of(cases),
            "tread" => TreadFigures.Of(cases),
            _ => SteeringFigures.Of(cases),
        };
        return report with
        {
            Fleets = cases.Select(c => c.Seed).Distinct().Count(),
            Vehicles = cases.Count,
            NotDiagnosed = cases.Count(c => c.Diagnosis is null),
            Elapsed = elapsed,
        };
    }

    public static IReadOnlyList<(string Group, FigureList Figures)> Split(IEnumerable<Case> cases, Func<Case, string> group, Func<IReadOnlyList<Case>, FigureList> figures) =>
        [.. cases.GroupBy(group).OrderBy(g => g.Key, StringComparer.Ordinal).Select(g => (g.Key, figures([.. g])))];

    public string Json()
    {
        var json = new JsonObject { ["part"] = Part, ["fleets"] = Fleets, ["vehicles"] = Vehicles, ["not_diagnosed"] = NotDiagnosed, ["seconds"] = Math.Round(Elapsed.TotalSeconds, 1) };
        foreach (var (name, figure) in Main) json[name] = Of(figure);
        json["baselines"] = Groups(Baselines);
        foreach (var (split, groups) in Splits) json[split] = Groups(groups);
        return json.ToJsonString(new JsonSerializerOptions { WriteIndented = true, Encoder = JavaScriptEncoder.UnsafeRelaxedJsonEscaping }) + "\n";
    }

    public string Table()
    {
        var text = new StringBuilder();
        text.Append(CultureInfo.InvariantCulture, $"{Part}: {Fleets} fleets, {Vehicles} vehicles, {Elapsed.TotalSeconds:0} s{(NotDiagnosed > 0 ? $", {NotDiagnosed} without a diagnosis" : "")}\n");
        var (best, bars) = (All().Any(f => f.Best is not null), All().Any(f => f.Bar is not null));
        text.Append(CultureInfo.InvariantCulture, $"{"",-44}{"figure",9}   {"90 % interval",-19}{"counted",8}{(best ? $"{"best",9}{"our share",11}" : "")}{(bars ? "   asked" : "")}\n");
        Lines(text, Main, best);
        foreach (var (method, figures) in Baselines) Titled(text, $"plain: {method}", figures, best);
        foreach (var (split, groups) in Splits)
            foreach (var (group, figures) in groups) Titled(text, $"{split.Replace('_', ' ')}: {group.Replace('_', ' ')}", figures, best);
        return text.ToString();
    }

    private IEnumerable<Figure> All() => Main.Concat(Splits.SelectMany(s => s.Groups).SelectMany(g => g.Figures)).Select(f => f.Figure);

    private static void Titled(StringBuilder text, string title, FigureList figures, bool best)
    {
        text.Append('\n').Append(title).Append('\n');
        Lines(text, figures, best);
    }

    private static void Lines(StringBuilder text, FigureList figures, bool best)
    {
        foreach (var (name, f) in figures)
        {
            var line = string.Create(CultureInfo.InvariantCulture, $"  {name,-42}{Word(f.Value),9}   {(double.IsNaN(f.Low) ? "" : $"{Word(f.Low)} to {Word(f.High)}"),-19}{f.N,8}");
            if (best) line += string.Create(CultureInfo.InvariantCulture, $"{(f.Best is { } b ? Word(b.Value) : ""),9}{(double.IsNaN(f.ShareOfBest) ? "" : f.ShareOfBest.ToString("0.000", CultureInfo.InvariantCulture)),11}");
            if (f.Bar is not null) line += $"   {f.Bar}{(f.Reached switch { true => ", reached", false => ", not reached", _ => "" })}";
            text.Append(line.TrimEnd()).Append('\n');
        }
    }

    private static string Word(double value) => double.IsNaN(value) ? "unknown" : value.ToString(Math.Abs(value) >= 100 ? "0" : "0.000", CultureInfo.InvariantCulture);

    private static JsonObject Groups(IEnumerable<(string Name, FigureList Figures)> groups)
    {
        var json = new JsonObject();
        foreach (var (name, figures) in groups)
        {
            var group = new JsonObject();
            foreach (var (figure, value) in figures) group[figure] = Of(value);
            json[name] = group;
        }
        return json;
    }

    private static JsonObject Of(Figure f)
    {
        var json = new JsonObject { ["value"] = Number(f.Value), ["low"] = Number(f.Low), ["high"] = Number(f.High), ["n"] = f.N };
        if (f.Best is not null) json["best"] = Of(f.Best);
        if (f.MoreIsBetter && f.Best is not null) json["share_of_best"] = Number(f.ShareOfBest);
        if (f.Bar is null) return json;
        json["asked"] = new JsonObject { ["at_least"] = Number(f.Bar.Least), ["at_most"] = Number(f.Bar.Most) };
        json["reached"] = f.Reached;
        return json;
    }

    private static JsonNode? Number(double value) => double.IsNaN(value) || double.IsInfinity(value) ? null : JsonValue.Create(Math.Round(value, 4));
}
