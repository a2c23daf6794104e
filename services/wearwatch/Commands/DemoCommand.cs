using System.ComponentModel;
using System.Text.Json.Nodes;
using Spectre.Console;
using Spectre.Console.Cli;
using WearWatch.Contracts.V1;
using WearWatch.Import;
using WearWatch.Output;

namespace WearWatch.Commands;

/// <summary>
/// Imports an invented fleet into a database of its own, analyses it, prints the list and stays up. The fleet is made by
/// the simulator beforehand (deploy/wearwatch does that); its truth is read here only after the list is made.
/// </summary>
internal sealed class DemoCommand : AsyncCommand<DemoCommand.Settings>
{
    internal sealed class Settings : OutputSettings
    {
        [CommandOption("--once")]
        [Description("Stop after the list instead of staying up for queries.")]
        public bool Once { get; init; }

        [CommandOption("--seed <N>")]
        [Description("Which invented fleet (default 3).")]
        [DefaultValue(3)]
        public int Seed { get; init; }

        [CommandOption("--folder <FOLDER>", IsHidden = true)]
        public string Folder { get; init; } = "";

        [CommandOption("--truth <FILE>", IsHidden = true)]
        public string Truth { get; init; } = "";

        public override ValidationResult Validate() =>
            Directory.Exists(Folder) ? ValidationResult.Success() : ValidationResult.Error("start the demo with deploy/wearwatch demo: it makes the fleet first");
    }

    public override async Task<int> ExecuteAsync(CommandContext context, Settings settings, CancellationToken cancel)
    {
        var data = Path.Combine(Installation.DataFolder, $"demo-{Environment.ProcessId}");
        try
        {
            await using var installation = await Installation.Start(data, new HostOptions { Port = settings.Once ? 0 : 7420 }, cancel);
            using var announced = settings.Once ? null : installation.Announce();
            var outcomes = await Waiting.Show("Importing", progress => ImportFolder.Run(settings.Folder, installation.Ingest, progress, cancel));
            await Waiting.Show("Analysing", async progress =>
            {
                await installation.Analysed(progress, cancel);
                return true;
            });
            var list = await WorklistPages.Read(installation.Report, "", WorklistSort.Unspecified, cancel);
            if (settings.Json) Console.WriteLine(Json.Text(WithTruth(Json.Worklist(list), list, settings)));
            else
            {
                Screen.Import(AnsiConsole.Console, outcomes, 3);
                Screen.Worklist(AnsiConsole.Console, list, 20);
            }
            if (settings.Once) return ExitCode.Done;
            var first = list.Vehicles.Count > 0 ? list.Vehicles[0].VehicleId : "ID";
            Console.Error.WriteLine($"\nThe services stay up on {installation.Address} (gRPC, reflection). In another terminal: deploy/wearwatch vehicle {first}. Ctrl-C stops the demo.");
            await Waiting.UntilStopped(cancel);
            return ExitCode.Done;
        }
        finally
        {
            if (Directory.Exists(data)) Directory.Delete(data, recursive: true);
        }
    }

    private static JsonObject WithTruth(JsonObject json, WorklistPages list, Settings settings)
    {
        json["seed"] = settings.Seed;
        if (settings.Truth.Length == 0) return json;
        var misaligned = JsonNode.Parse(File.ReadAllText(settings.Truth))!["vehicles"]!.AsArray()
            .Where(v => (bool)v!["misaligned"]!)
            .Select(v => (string)v!["vehicle_id"]!)
            .ToHashSet();
        json["truly_misaligned"] = misaligned.Count;
        json["truly_misaligned_in_first_ten"] = list.Vehicles.Take(10).Count(v => misaligned.Contains(v.VehicleId));
        return json;
    }
}
