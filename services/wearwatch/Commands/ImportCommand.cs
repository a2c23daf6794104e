using System.ComponentModel;
using System.Text.Json.Nodes;
using Spectre.Console;
using Spectre.Console.Cli;
using WearWatch.Import;
using WearWatch.Output;

namespace WearWatch.Commands;

/// <summary>Sends a folder of plain files through the gRPC door and waits until it is analysed.</summary>
internal sealed class ImportCommand : AsyncCommand<ImportCommand.Settings>
{
    internal sealed class Settings : OutputSettings
    {
        [CommandArgument(0, "<FOLDER>")]
        [Description("Folder of CSV files; demo-data/README.md describes every column.")]
        public string Folder { get; init; } = "";

        [CommandOption("--no-wait")]
        [Description("Do not wait for the analysis.")]
        public bool NoWait { get; init; }

        public override ValidationResult Validate() =>
            Directory.Exists(Folder) ? ValidationResult.Success() : ValidationResult.Error($"the folder '{Folder}' is not there");
    }

    public override async Task<int> ExecuteAsync(CommandContext context, Settings settings, CancellationToken cancel)
    {
        await using var installation = await Installation.Reach(cancel);
        var outcomes = await Waiting.Show("Importing", progress => ImportFolder.Run(settings.Folder, installation.Ingest, progress, cancel));
        if (outcomes.Count == 0)
        {
            Console.Error.WriteLine($"'{settings.Folder}' holds none of the files of the import folder (see demo-data/README.md).");
            return ExitCode.SomethingRefused;
        }
        if (!settings.NoWait || installation.Hosting)
        {
            await Waiting.Show("Analysing", async progress =>
            {
                await installation.Analysed(progress, cancel);
                return true;
            });
        }
        if (settings.Json) Console.WriteLine(Json.Text(new JsonObject { ["files"] = new JsonArray([.. outcomes.Select(Outcome)]) }));
        else Screen.Import(AnsiConsole.Console, outcomes, 10);
        return outcomes.Any(o => o.Refused > 0) ? ExitCode.SomethingRefused : ExitCode.Done;
    }

    private static JsonObject Outcome(FileOutcome o) => new()
    {
        ["file"] = o.File,
        ["stored"] = o.Stored,
        ["known"] = o.Known,
        ["held"] = o.Held,
        ["refused"] = o.Refused,
        ["samples"] = o.Samples,
        ["reasons"] = new JsonArray([.. o.Reasons.Select(r => (JsonNode)r)]),
    };
}
