using System.ComponentModel;
using Grpc.Core;
using Spectre.Console;
using Spectre.Console.Cli;
using WearWatch.Contracts.V1;
using WearWatch.Output;

namespace WearWatch.Commands;

/// <summary>Everything on one vehicle.</summary>
internal sealed class VehicleCommand : AsyncCommand<VehicleCommand.Settings>
{
    internal sealed class Settings : OutputSettings
    {
        [CommandArgument(0, "<ID>")]
        [Description("The vehicle's id.")]
        public string VehicleId { get; init; } = "";
    }

    public override async Task<int> ExecuteAsync(CommandContext context, Settings settings, CancellationToken cancel)
    {
        await using var installation = await Installation.Reach(cancel);
        try
        {
            var report = await installation.Report.GetVehicleReportAsync(new GetVehicleReportRequest { VehicleId = settings.VehicleId }, deadline: DateTime.UtcNow.AddMinutes(1), cancellationToken: cancel);
            if (settings.Json) Console.WriteLine(Json.Text(Json.Vehicle(report)));
            else Screen.Vehicle(AnsiConsole.Console, report);
            return ExitCode.Done;
        }
        catch (RpcException missing) when (missing.StatusCode == StatusCode.NotFound)
        {
            Console.Error.WriteLine(missing.Status.Detail);
            return ExitCode.SomethingRefused;
        }
    }
}
