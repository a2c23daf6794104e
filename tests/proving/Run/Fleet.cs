using System.Diagnostics;
using System.Globalization;
using System.Text.Json;
using Google.Protobuf;
using WearWatch.Proving.Plain;

namespace WearWatch.Proving.Run;

/// <summary>
/// One fleet in a folder of its own. The simulator writes an import folder and, outside it, the truth; the product imports
/// the folder through its door and analyses it; the truth is read only afterwards, to score.
/// </summary>
internal sealed class Fleet(ulong seed, string folder, bool flat, Options options, Action<string> progress)
{
    /// <summary>Exit code of an import that refused some rows; the simulator plants such rows.</summary>
    private const int SomethingRefused = 1;

    private string On => flat ? " on flat roads" : "";
    private string Import => Path.Combine(folder, "import");
    private string TruthFile => Path.Combine(folder, "truth.json");
    private string BestFile => Path.Combine(folder, "best.json");
    private string PlainFile => Path.Combine(folder, "plain.json");
    private string AskedFile => Path.Combine(folder, "asked.json");
    private string Data => Path.Combine(folder, "product");

    /// <summary>Makes the fleet, imports it and reads what the product says.</summary>
    public async Task<IReadOnlyList<Case>> Prove(CancellationToken cancel)
    {
        if (Directory.Exists(folder)) throw new InvalidOperationException($"{folder} is there already; --again {Path.GetDirectoryName(folder)} scores what was kept");
        Directory.CreateDirectory(Data);
        var watch = Stopwatch.StartNew();
        await Simulate(cancel);
        var simulated = Lap(watch);
        await using (var product = await Product.Start(options.Product, Data, forget: false, cancel))
        {
            await using (var import = Child.Start(options.Product, Data, "import", Import, "--json"))
                File.WriteAllText(AskedFile, JsonSerializer.Serialize(Reasons(await import.Done(code => code is 0 or SomethingRefused, cancel))));
            await product.Analysed(cancel);
            var analysed = Lap(watch);
            Directory.Delete(Import, recursive: true);
            var cases = await Read(product, cancel);
            progress($"seed {seed}{On}: simulated in {simulated:0} s, imported and analysed in {analysed:0} s, read in {Lap(watch):0} s");
            return cases;
        }
    }

    /// <summary>Analyses what was kept anew and reads it.</summary>
    public async Task<IReadOnlyList<Case>> Again(CancellationToken cancel)
    {
        var watch = Stopwatch.StartNew();
        await using var product = await Product.Start(options.Product, Data, forget: !options.Stored, cancel);
        await product.Analysed(cancel);
        var cases = await Read(product, cancel);
        progress($"seed {seed}{On}: {(options.Stored ? "read" : "analysed again and read")} in {Lap(watch):0} s");
        return cases;
    }

    /// <summary>Where the server's own folder lies elsewhere, because its user may not enter ours.</summary>
    public static string? ServerElsewhere(string fleetFolder)
    {
        var note = Path.Combine(fleetFolder, "product", "fleet", "postgresql.location");
        return File.Exists(note) ? File.ReadAllText(note).Trim() : null;
    }

    private async Task Simulate(CancellationToken cancel)
    {
        string[] best = options is { Part: "verdict", Best: true } ? ["--best", BestFile] : [];
        await using (var simulator = Child.Start(options.Simulator, null, ["--out", Import, "--truth", TruthFile, "--seed", $"{seed}", "--vehicles", $"{options.Vehicles}",
            "--max-samples", $"{options.MaxSamples}", "--trips", flat ? "flat" : "banked", "--surveys", options.SteeringOnly ? "none" : "taken", .. best]))
            await simulator.Done(code => code == 0, cancel);
        var truth = Truth.Read(TruthFile);
        File.WriteAllText(PlainFile, JsonSerializer.Serialize(PlainFolder.Read(Import, truth.From, truth.End)));
    }

    private async Task<IReadOnlyList<Case>> Read(Product product, CancellationToken cancel)
    {
        var worklist = await product.Worklist(cancel);
        var rank = worklist.Select((id, i) => (id, i)).ToDictionary(p => p.id, p => p.i + 1);
        var truth = Truth.Read(TruthFile);
        var plain = JsonSerializer.Deserialize<Dictionary<string, PlainVehicle>>(File.ReadAllText(PlainFile))!;
        var asked = JsonSerializer.Deserialize<Dictionary<string, string>>(File.ReadAllText(AskedFile))!;
        var best = File.Exists(BestFile) ? BestVerdict.Read(BestFile) : new Dictionary<string, BestVerdict>();
        var blunders = truth.Surveys.GroupBy(b => b.SurveyId).ToDictionary(g => g.Key, g => g.First().Kind);
        var cases = new List<Case>();
        foreach (var vehicle in truth.Vehicles.Where(v => !options.SteeringOnly || v.Signals != "gauge_only"))
        {
            cases.Add(new Case
            {
                Seed = seed,
                From = truth.From,
                End = truth.End,
                Truth = vehicle,
                Blunders = blunders,
                Diagnosis = await product.DiagnosisOf(vehicle.VehicleId, cancel),
                Rank = rank.GetValueOrDefault(vehicle.VehicleId, worklist.Count + 1),
                Best = best.GetValueOrDefault(vehicle.VehicleId),
                Plain = plain[vehicle.VehicleId],
                Asked = asked,
            });
        }
        // For whoever wants to see what lies behind a figure.
        File.WriteAllText(Path.Combine(folder, "diagnoses.json"), $"[{string.Join(",\n", cases.Where(c => c.Diagnosis is not null).Select(c => JsonFormatter.Default.Format(c.Diagnosis)))}]\n");
        return cases;
    }

    /// <summary>What the door asked or refused, by survey: lines such as 's-V001-05: Groove 3 of 2R reads ...'.</summary>
    private static Dictionary<string, string> Reasons(string importJson) =>
        JsonDocument.Parse(importJson).RootElement.GetProperty("files").EnumerateArray()
            .Where(f => f.GetProperty("file").GetString() == "surveys.csv")
            .SelectMany(f => f.GetProperty("reasons").EnumerateArray().Select(r => r.GetString()!))
            .Where(r => r.Contains(": ", StringComparison.Ordinal))
            .GroupBy(r => r[..r.IndexOf(": ", StringComparison.Ordinal)])
            .ToDictionary(g => g.Key, g => string.Join(' ', g.Select(r => r[(r.IndexOf(": ", StringComparison.Ordinal) + 2)..])));

    private static double Lap(Stopwatch watch)
    {
        var seconds = watch.Elapsed.TotalSeconds;
        watch.Restart();
        return seconds;
    }

    public static ulong? SeedOf(string folder) =>
        Path.GetFileName(folder) is ['s', 'e', 'e', 'd', '-', .. var digits] && ulong.TryParse(digits, NumberStyles.None, CultureInfo.InvariantCulture, out var seed) ? seed : null;
}
