using System.Globalization;
using Spectre.Console;
using WearWatch.Contracts.V1;
using WearWatch.Import;

namespace WearWatch.Output;

/// <summary>What people read in a terminal: plain words, figures with units and an interval.</summary>
internal static class Screen
{
    public static void Worklist(IAnsiConsole console, WorklistPages list, int rows)
    {
        if (list.BelowLimit.Count > 0)
        {
            console.Write(new Rule("Tyres below the limit or unsafe: first of all").LeftJustified());
            foreach (var tyre in list.BelowLimit) console.MarkupLineInterpolated($"  [bold]{tyre.VehicleId} {tyre.Position}[/]  {tyre.Sentence}{(tyre.Held ? " (survey held for review)" : "")}");
            console.WriteLine();
        }
        var pays = list.Vehicles.Count(v => v.ListedBecause != ListedBecause.NotYet);
        console.Write(new Rule($"Vehicles that need alignment, {list.AsOf}: {pays} of {list.Total}").LeftJustified());
        console.WriteLine();
        foreach (var row in list.Vehicles.Take(rows)) Row(console, row);
        if (list.Vehicles.Count > rows) console.MarkupLineInterpolated($"  ... and {list.Vehicles.Count - rows} more: [italic]wearwatch worklist --all[/]");
        Sections(console, list, rows);
        console.WriteLine();
        console.MarkupLineInterpolated($"[italic]{list.Notice}[/]");
    }

    private static void Row(IAnsiConsole console, WorklistRow row)
    {
        var listed = row.ListedBecause switch
        {
            ListedBecause.Pull => "steering pull: whatever the money says",
            ListedBecause.NotYet => "not worth it yet",
            _ => "pays",
        };
        console.MarkupLineInterpolated($"[bold]{row.Rank,3}. {row.VehicleId}[/] {row.VehicleClass}, {row.Depot}  p {row.MisalignedProbability:0.00}  waiting {Money(row.CostOfWaitingPerWeek)} a week  net {Money(row.NetBenefit)}  ({listed})");
        console.MarkupLineInterpolated($"     {row.Why}");
        if (row.FirstCheck.Length > 0) console.MarkupLineInterpolated($"     First: {row.FirstCheck}");
    }

    private static void Sections(IAnsiConsole console, WorklistPages list, int rows)
    {
        if (list.GaugeFirst.Count > 0)
        {
            console.WriteLine();
            console.Write(new Rule("Gauge these first: one more survey may change the decision").LeftJustified());
            foreach (var row in list.GaugeFirst.Take(rows)) console.MarkupLineInterpolated($"  [bold]{row.VehicleId}[/]  {row.Why}");
        }
        if (list.OtherMatters.Count > 0)
        {
            console.WriteLine();
            console.Write(new Rule("Other matters: an alignment alone does not mend these").LeftJustified());
            foreach (var matter in list.OtherMatters.Take(rows)) console.MarkupLineInterpolated($"  [bold]{matter.VehicleId}[/]  {matter.Sentence} First: {matter.FirstCheck}");
            if (list.OtherMatters.Count > rows) console.MarkupLineInterpolated($"  ... and {list.OtherMatters.Count - rows} more: [italic]wearwatch worklist --all[/]");
        }
    }

    public static void Vehicle(IAnsiConsole console, GetVehicleReportResponse report)
    {
        var d = report.Diagnosis;
        console.Write(new Rule($"{d.VehicleId}, {d.VehicleClass}, {d.Depot}, as of {d.AsOf}").LeftJustified());
        foreach (var tyre in report.BelowLimit) console.MarkupLineInterpolated($"[bold]{tyre.Position}  {tyre.Sentence}[/]");
        console.MarkupLineInterpolated($"Out of alignment with probability [bold]{d.MisalignedProbability:0.00}[/]. Waiting costs {Money(d.CostOfWaitingPerWeek)} a week; aligning nets {Money(d.NetBenefit)} (job {d.JobPrice:0} {d.NetBenefit?.Unit}, {d.JobPriceSource} price).");
        console.MarkupLineInterpolated($"Steering pull: {Figure(d.SteeringPull)}   Off-centre angle: {Figure(d.OffCentreAngle)}   ({d.StraightRuns} straight runs, {d.StraightSeconds / 3600:0.0} h)");
        console.WriteLine();
        Causes(console, d);
        Tyres(console, d);
        foreach (var finding in d.Findings) Finding(console, finding);
        Changes(console, d);
        foreach (var note in d.SurveyNotes) console.MarkupLineInterpolated($"{(note.SurveyId.Length > 0 ? $"Survey {note.SurveyId}: " : "")}{note.Note}");
        foreach (var gap in d.CannotTell) console.MarkupLineInterpolated($"Cannot tell {gap.What}: {gap.Because}. Would help: {gap.WouldHelp}.");
        console.WriteLine();
        Drawings(console, d);
        console.MarkupLineInterpolated($"[italic]{report.Notice}[/]");
    }

    private static void Causes(IAnsiConsole console, Contracts.V1.Diagnosis d)
    {
        var causes = d.Causes.Where(c => c.Probability >= 0.01).Take(8).ToList();
        if (causes.Count == 0) return;
        console.WriteLine("probability  cause                           if so (90 %); out: beyond tolerance");
        foreach (var c in causes)
        {
            var place = Place(c);
            var beyond = c.OutsideTolerance ? "out: " : "";
            console.WriteLine(string.Create(CultureInfo.InvariantCulture, $"{c.Probability,11:0.00}  {place,-30}  {beyond}{Plain(c.Value)}{(c.Unit == "1" ? "" : $" {c.Unit}")} ({Plain(c.Low)} to {Plain(c.High)})"));
        }
        foreach (var c in causes.Where(c => c.Probability >= WorthDating && c.Since is not null))
            console.MarkupLineInterpolated($"If {Place(c)}: {(c.Since.Earliest.Length == 0 ? $"began by {c.Since.Latest} at the latest" : $"began between {c.Since.Earliest} and {c.Since.Latest}")} (90 %).");
        foreach (var odds in d.Odds) console.MarkupLineInterpolated($"{Sentence(odds)}.");
        if (d.HasMisalignedByTread) console.MarkupLineInterpolated($"Out of alignment by the tread alone {d.MisalignedByTread:0.00}, by the steering alone {d.MisalignedBySteering:0.00}.");
        console.WriteLine();
    }

    /// <summary>Causes less probable than this are not dated on the screen; JSON dates all.</summary>
    private const double WorthDating = 0.2;

    private static string Place(Cause c) => $"{Words(EnumWords.Word(c.Quantity))}{(c.HasAxle ? $", axle {c.Axle}" : "")}{c.Side switch { Side.Left => " left", Side.Right => " right", _ => "" }}";

    /// <summary>Two decimals at most, never '-0'.</summary>
    private static string Plain(double value) => (Math.Round(value, 2) + 0.0).ToString("0.##", CultureInfo.InvariantCulture);

    private static string Sentence(string text) => char.ToUpperInvariant(text[0]) + text[1..];

    private static void Tyres(IAnsiConsole console, Contracts.V1.Diagnosis d)
    {
        foreach (var line in TyreTable.Lines(d)) console.WriteLine(line);
        console.WriteLine();
    }

    private static void Drawings(IAnsiConsole console, Contracts.V1.Diagnosis d)
    {
        foreach (var line in d.Tyres.SelectMany(t => TreadDrawing.Lines(t, TreadDrawing.DeepestMm(d.Tyres)))) console.WriteLine(line);
    }

    private static void Changes(IAnsiConsole console, Contracts.V1.Diagnosis d)
    {
        var small = d.Changes.Count(c => !c.Published);
        if (d.Changes.Count == 0) return;
        var table = new Table().Border(TableBorder.Simple).AddColumns("changed", "how", "when (90 %)", "by (90 %)", "recorded then");
        foreach (var c in d.Changes.Where(c => c.Published).TakeLast(8))
        {
            table.AddRow(Markup.Escape(c.HasAxle ? $"{Words(c.Quantity)}, axle {c.Axle}" : Words(c.Quantity)), c.Provisional ? $"{c.Form}, provisional" : c.Form,
                $"{c.From.ToDateTimeOffset():yyyy-MM-dd HH:mm} to {c.To.ToDateTimeOffset():yyyy-MM-dd HH:mm}",
                string.Create(CultureInfo.InvariantCulture, $"{c.Size.Value:+0.00;-0.00} ({c.Size.Low:0.00} to {c.Size.High:0.00}) {(c.Size.Unit == "1" ? "of normal" : c.Size.Unit)}"),
                Markup.Escape(c.Happened.Count > 0 ? string.Join("; ", c.Happened.Take(2).Select(e => e.What)) : "nothing"));
        }
        if (table.Rows.Count > 0) console.Write(table);
        if (small > 0) console.MarkupLineInterpolated($"{small} smaller {(small == 1 ? "change" : "changes")} too small to act on: [italic]--json[/] lists them.");
    }

    private static void Finding(IAnsiConsole console, Finding f)
    {
        console.MarkupLineInterpolated($"[bold]{Words(f.Kind)}[/]: {f.Sentence}");
        foreach (var e in f.EvidenceFor) console.MarkupLineInterpolated($"    for: {e.Statement}{Rests(e)}");
        foreach (var e in f.EvidenceAgainst) console.MarkupLineInterpolated($"    against: {e.Statement}{Rests(e)}");
        foreach (var c in f.Confounders) console.MarkupLineInterpolated($"    could also be {c.What}: {c.WouldTell}");
        console.MarkupLineInterpolated($"    first: {f.FirstCheck} {(f.AlignmentMends ? "An alignment can mend it." : "An alignment does not mend it.")}");
        if (f.Caution.Length > 0) console.MarkupLineInterpolated($"    [italic]{f.Caution}[/]");
    }

    private static string Rests(Evidence e) => e.RestsOn.Count == 0 ? "" : $" [{string.Join(", ", e.RestsOn.Take(4))}{(e.RestsOn.Count > 4 ? $" and {e.RestsOn.Count - 4} more" : "")}]";

    public static void Import(IAnsiConsole console, List<FileOutcome> outcomes, int reasonsPerFile)
    {
        var table = new Table().Border(TableBorder.Simple).AddColumns("file", "stored", "known before", "held", "refused");
        foreach (var o in outcomes)
            table.AddRow(Markup.Escape(o.File), o.Samples > 0 ? string.Create(CultureInfo.InvariantCulture, $"{o.Stored} chunks, {o.Samples:#,0} samples") : $"{o.Stored}", $"{o.Known}", $"{o.Held}", $"{o.Refused}");
        console.Write(table);
        foreach (var o in outcomes.Where(o => o.Reasons.Count > 0))
        {
            foreach (var reason in o.Reasons.Take(reasonsPerFile)) console.MarkupLineInterpolated($"  {o.File}: {reason}");
            if (o.Reasons.Count > reasonsPerFile) console.MarkupLineInterpolated($"  {o.File}: ... and {o.Reasons.Count - reasonsPerFile} more");
        }
        if (outcomes.Any(o => o.Held > 0)) console.WriteLine("What was held waits for an answer: wearwatch held");
        if (outcomes.Any(o => o.Refused > 0)) console.WriteLine("What was refused is kept with its reason: wearwatch held --refused");
    }

    private static string Words(string name) => name.Replace('_', ' ');

    private static string Figure(Contracts.V1.Range? r) => r is null ? "cannot tell" : string.Create(CultureInfo.InvariantCulture, $"{r.Value:0.00} {r.Unit} ({r.Low:0.00} to {r.High:0.00})");

    private static string Money(Contracts.V1.Range? r) => r is null ? "not known" : string.Create(CultureInfo.InvariantCulture, $"{r.Value:0.##;-0.##;0} {r.Unit} ({r.Low:0;-0;0} to {r.High:0;-0;0})");
}
