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

        [CommandOption("--as-of <DATE>")]
        [Description("As it would have been told on that day, from the facts up to it; a fleet takes a while.")]
        public string AsOf { get; init; } = "";
    }

    public override async Task<int> ExecuteAsync(CommandContext context, Settings settings, CancellationToken cancel)
    {
        await using var installation = await Installation.Reach(cancel);
        try
        {
            var report = settings.AsOf.Length == 0
                ? await installation.Report.GetVehicleReportAsync(new GetVehicleReportRequest { VehicleId = settings.VehicleId }, deadline: DateTime.UtcNow.AddMinutes(1), cancellationToken: cancel)
                : await AsOf(installation, settings, cancel);
            if (settings.Json) Console.WriteLine(Json.Text(Json.Vehicle(report)));
            else Screen.Vehicle(AnsiConsole.Console, report);
            return ExitCode.Done;
        }
        catch (RpcException missing) when (missing.StatusCode == StatusCode.NotFound)
        {
            Console.Error.WriteLine(missing.Status.Detail);
            return ExitCode.SomethingRefused;
        }
        catch (RpcException wrong) when (wrong.StatusCode == StatusCode.InvalidArgument)
        {
            Console.Error.WriteLine(wrong.Status.Detail);
            return ExitCode.Usage;
        }
    }

    /// <summary>The past is recomputed and not stored, so it comes from the analysis service.</summary>
    private static async Task<GetVehicleReportResponse> AsOf(Installation installation, Settings settings, CancellationToken cancel)
    {
        var past = await installation.Analysis.GetDiagnosisAsync(new GetDiagnosisRequest { VehicleId = settings.VehicleId, AsOf = settings.AsOf }, deadline: DateTime.UtcNow.AddMinutes(10), cancellationToken: cancel);
        var now = await installation.Report.GetVehicleReportAsync(new GetVehicleReportRequest { VehicleId = settings.VehicleId }, deadline: DateTime.UtcNow.AddMinutes(1), cancellationToken: cancel);
        return new GetVehicleReportResponse { Diagnosis = past.Diagnosis, BelowLimit = { past.BelowLimit }, Notice = now.Notice };
    }
}
