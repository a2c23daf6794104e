using System.Globalization;
using WearWatch.Simulator;
using WearWatch.Simulator.Best;

const string usage = "simulator --out FOLDER --truth FILE [--seed N=1] [--vehicles N=64] [--weeks N=26] [--max-samples N=6000000] [--end 2026-11-30] [--trips banked|flat] [--best FILE] [--surveys taken|none]";
var given = new Dictionary<string, string>();
for (var i = 0; i < args.Length; i += 2)
{
    if (args[i] is "--help" or "-h")
    {
        Console.WriteLine(usage);
        return 0;
    }
    if (args[i] is not ("--out" or "--truth" or "--seed" or "--vehicles" or "--weeks" or "--max-samples" or "--end" or "--trips" or "--best" or "--surveys") || i + 1 >= args.Length)
        return Refuse($"'{args[i]}' is not an option or lacks its value");
    given[args[i]] = args[i + 1];
}
if (!given.TryGetValue("--out", out var folder) || !given.TryGetValue("--truth", out var truth)) return Refuse("--out and --truth are needed");
if (!ulong.TryParse(given.GetValueOrDefault("--seed", "1"), out var seed)) return Refuse("--seed: a whole number, 0 or more");
if (!int.TryParse(given.GetValueOrDefault("--vehicles", "64"), out var vehicles) || vehicles is < 1 or > 100_000) return Refuse("--vehicles: 1 to 100000");
if (!int.TryParse(given.GetValueOrDefault("--weeks", "26"), out var weeks) || weeks is < 4 or > 104) return Refuse("--weeks: 4 to 104");
if (!long.TryParse(given.GetValueOrDefault("--max-samples", "6000000"), out var maxSamples) || maxSamples < 0) return Refuse("--max-samples: 0 or more");
if (!DateOnly.TryParseExact(given.GetValueOrDefault("--end", "2026-11-30"), "yyyy-MM-dd", CultureInfo.InvariantCulture, DateTimeStyles.None, out var end))
    return Refuse("--end: a date such as 2026-11-30");
var trips = given.GetValueOrDefault("--trips", "banked");
if (trips is not ("banked" or "flat")) return Refuse("--trips: banked or flat");
var surveys = given.GetValueOrDefault("--surveys", "taken");
if (surveys is not ("taken" or "none")) return Refuse("--surveys: taken or none");
var inside = Path.GetFullPath(folder).TrimEnd(Path.DirectorySeparatorChar) + Path.DirectorySeparatorChar;
if (Path.GetFullPath(truth).StartsWith(inside, StringComparison.Ordinal)) return Refuse("--truth must lie outside the import folder");
var best = given.GetValueOrDefault("--best");
if (best is not null && Path.GetFullPath(best).StartsWith(inside, StringComparison.Ordinal)) return Refuse("--best must lie outside the import folder");
if (Directory.Exists(folder) && Directory.EnumerateFileSystemEntries(folder).Any()) return Refuse($"{folder} is not empty");

var scenario = new Scenario(seed, vehicles, weeks, maxSamples, end) { FlatTrips = trips == "flat", Best = best is not null, NoSurveys = surveys == "none" };
var (rows, histories) = new FolderWriter(scenario).Write(folder, truth);
if (best is not null) BestPossible.Write(best, scenario, histories);
var misaligned = histories.Count(h => h.Vehicle.GeometryAt(scenario.Days).Angles(h.Vehicle.Type).Any(a => a.Ratio > 1));
Console.WriteLine($"fleet of {vehicles} vehicles, {weeks} weeks to {end:yyyy-MM-dd}, seed {seed}");
Console.WriteLine($"misaligned at the end: {misaligned} ({100.0 * misaligned / vehicles:0.0} %)");
Console.WriteLine($"surveys: {rows.Count("surveys")} with {rows.Count("readings")} readings");
Console.WriteLine($"steering: {rows.Count("steering_streams")} trips with {histories.Sum(h => h.Samples)} samples");
Console.WriteLine($"folder: {folder}, truth: {truth}");
return 0;

static int Refuse(string why)
{
    Console.Error.WriteLine(why);
    Console.Error.WriteLine(usage);
    return 2;
}
