using System.Globalization;
using System.Text.Json.Nodes;
using Spectre.Console;
using WearWatch.Contracts.V1;

namespace WearWatch.Output;

/// <summary>The study of hands and gauges in words: it judges gauges and hands, not people.</summary>
internal static class ReaderStudyOutput
{
    public static void Screen(IAnsiConsole console, GetReaderStudyResponse study)
    {
        console.Write(new Rule($"Hands and gauges, as of {study.AsOf}").LeftJustified());
        if (study.Technicians.Count + study.Gauges.Count == 0)
        {
            console.WriteLine("No survey names a technician or a gauge: nothing can be told of either.");
            return;
        }
        console.WriteLine("Plus reads too deep, minus too shallow, against the fleet's others; 90 % intervals.");
        console.WriteLine("What is found is taken off the readings. It tells of gauges and of how a hand");
        console.WriteLine("sets them, not of the people: have the gauge checked on a step block first.");
        console.WriteLine();
        foreach (var line in Lines("technician", study.Technicians).Concat(Lines("gauge", study.Gauges))) console.WriteLine(line);
        if (study.TechnicianSpread is { } hands) console.WriteLine($"Spread between technicians: {Figure(hands)}");
        if (study.GaugeSpread is { } gauges) console.WriteLine($"Spread between gauges: {Figure(gauges)}");
        if (study.Repeatability is { } repeat) console.WriteLine($"One reading repeated: {Figure(repeat)}");
        if (study.Technicians.Concat(study.Gauges).Any(r => r.Few)) console.WriteLine("* too few surveys to act on; the figure leans on the fleet's.");
    }

    private static IEnumerable<string> Lines(string kind, IReadOnlyCollection<ReaderFigures> readers)
    {
        if (readers.Count == 0)
        {
            yield return $"No survey names a {kind}.";
            yield break;
        }
        var width = Math.Clamp(readers.Max(r => r.Reader.Length), kind.Length, 16);
        yield return $"{kind.PadRight(width)}  surveys  readings  bias mm                 repeatability mm";
        foreach (var r in readers)
        {
            var name = r.Reader.Length > width ? r.Reader[..width] : r.Reader;
            var bias = string.Create(CultureInfo.InvariantCulture, $"{r.Bias.Value:+0.00;-0.00;0.00} ({r.Bias.Low:+0.00;-0.00;0.00} to {r.Bias.High:+0.00;-0.00;0.00})");
            var repeat = string.Create(CultureInfo.InvariantCulture, $"{r.Repeatability.Value:0.00} ({r.Repeatability.Low:0.00} to {r.Repeatability.High:0.00})");
            yield return $"{name.PadRight(width)}  {r.Surveys,6}{(r.Few ? "*" : " ")}  {r.Readings,8}  {bias,-22}  {repeat}";
        }
        yield return "";
    }

    private static string Figure(Contracts.V1.Range r) => string.Create(CultureInfo.InvariantCulture, $"{r.Value:0.00} mm ({r.Low:0.00} to {r.High:0.00})");

    public static JsonObject Json(GetReaderStudyResponse study) => new()
    {
        ["as_of"] = study.AsOf,
        ["fleet_fit"] = study.FleetFit,
        ["technicians"] = new JsonArray([.. study.Technicians.Select(Reader)]),
        ["gauges"] = new JsonArray([.. study.Gauges.Select(Reader)]),
        ["technician_spread"] = Output.Json.Range(study.TechnicianSpread),
        ["gauge_spread"] = Output.Json.Range(study.GaugeSpread),
        ["repeatability"] = Output.Json.Range(study.Repeatability),
    };

    private static JsonObject Reader(ReaderFigures r) => new()
    {
        ["reader"] = r.Reader,
        ["surveys"] = r.Surveys,
        ["readings"] = r.Readings,
        ["bias"] = Output.Json.Range(r.Bias),
        ["repeatability"] = Output.Json.Range(r.Repeatability),
        ["few"] = r.Few,
    };
}
