using System.Text.Json;
using WearWatch.Benchmarks;

var names = new Dictionary<string, Func<IReadOnlyDictionary<string, object>>>(StringComparer.Ordinal)
{
    ["changes"] = ChangesBenchmark.Run,
    ["door"] = DoorBenchmark.Run,
    ["reduction"] = ReductionBenchmark.Run,
    ["roads"] = RoadsBenchmark.Run,
    ["wear"] = WearBenchmark.Run,
};
var json = args.Contains("--json");
var unknown = args.FirstOrDefault(a => a.StartsWith('-') && a != "--json");
if (args.FirstOrDefault(a => !a.StartsWith('-')) is not { } name || unknown is not null || !names.TryGetValue(name, out var run))
{
    Console.Error.WriteLine($"usage: benchmarks NAME [--json]; NAME is one of {string.Join(", ", names.Keys)}");
    return 2;
}
IReadOnlyDictionary<string, object> figures;
try
{
    figures = run();
}
catch (OperationCanceledException stopped)
{
    Console.Error.WriteLine($"{name}: {stopped.Message}");
    return 1;
}
if (json) Console.WriteLine(JsonSerializer.Serialize(figures, new JsonSerializerOptions { WriteIndented = true }));
else foreach (var (what, value) in figures) Console.WriteLine($"{what,-44} {(value is IEnumerable<double> several ? string.Join(", ", several) : value)}");
return 0;
