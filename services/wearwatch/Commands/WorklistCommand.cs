using System.ComponentModel;
using Spectre.Console;
using Spectre.Console.Cli;
using WearWatch.Contracts.V1;
using WearWatch.Output;

namespace WearWatch.Commands;

/// <summary>Monday's list.</summary>
internal sealed class WorklistCommand : AsyncCommand<WorklistCommand.Settings>
{
    internal sealed class Settings : OutputSettings
    {
        [CommandOption("--csv")]
        [Description("Print the vehicles as CSV.")]
        public bool Csv { get; init; }

        [CommandOption("--depot <DEPOT>")]
        [Description("Only this depot.")]
        public string Depot { get; init; } = "";

        [CommandOption("--sort <BY>")]
        [Description("worth (default), net_benefit, probability, cost_of_waiting or vehicle.")]
        public string Sort { get; init; } = "worth";

        [CommandOption("--all")]
        [Description("Show every vehicle, not only the first twenty.")]
        public bool All { get; init; }

        public WorklistSort? Order => Sort switch
        {
            "worth" => WorklistSort.Unspecified,
            "net_benefit" => WorklistSort.NetBenefit,
            "probability" => WorklistSort.Probability,
            "cost_of_waiting" => WorklistSort.CostOfWaiting,
            "vehicle" => WorklistSort.Vehicle,
            _ => null,
        };

        public override ValidationResult Validate() =>
            Order is null ? ValidationResult.Error($"--sort: '{Sort}' is not one of worth, net_benefit, probability, cost_of_waiting, vehicle")
            : Csv && Json ? ValidationResult.Error("--csv and --json exclude each other") : ValidationResult.Success();
    }

    public override async Task<int> ExecuteAsync(CommandContext context, Settings settings, CancellationToken cancel)
    {
        await using var installation = await Installation.Reach(cancel);
        var list = await WorklistPages.Read(installation.Report, settings.Depot, settings.Order!.Value, cancel);
        if (settings.Json) Console.WriteLine(Json.Text(Json.Worklist(list)));
        else if (settings.Csv) Csv.Worklist(Console.Out, list);
        else Screen.Worklist(AnsiConsole.Console, list, settings.All ? int.MaxValue : 20);
        return ExitCode.Done;
    }
}
