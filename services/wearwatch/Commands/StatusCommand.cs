using System.Text.Json.Nodes;
using Spectre.Console.Cli;
using WearWatch.Output;

namespace WearWatch.Commands;

/// <summary>Where the services are and how far they have come.</summary>
internal sealed class StatusCommand : AsyncCommand<OutputSettings>
{
    public override async Task<int> ExecuteAsync(CommandContext context, OutputSettings settings, CancellationToken cancel)
    {
        await using var installation = await Installation.Reach(cancel);
        var deadline = DateTime.UtcNow.AddMinutes(1);
        var ingest = await installation.Ingest.GetIngestStatusAsync(new(), deadline: deadline, cancellationToken: cancel);
        var analysis = await installation.Analysis.GetAnalysisStatusAsync(new(), deadline: deadline, cancellationToken: cancel);
        var report = await installation.Report.GetReportStatusAsync(new(), deadline: deadline, cancellationToken: cancel);
        var address = installation.Hosting ? null : installation.Address;
        if (settings.Json)
        {
            Console.WriteLine(Json.Text(new JsonObject
            {
                ["running"] = !installation.Hosting,
                ["addresses"] = new JsonObject { ["ingest"] = address, ["analysis"] = address, ["report"] = address },
                ["pages"] = null,
                ["data_folder"] = Installation.DataFolder,
                ["vehicles"] = ingest.Vehicles,
                ["surveys"] = ingest.Surveys,
                ["readings"] = ingest.Readings,
                ["steering_chunks"] = ingest.SteeringChunks,
                ["steering_samples"] = ingest.SteeringSamples,
                ["held"] = ingest.Held,
                ["refused"] = ingest.Refused,
                ["due"] = analysis.Due,
                ["chunks_to_reduce"] = analysis.ChunksToReduce,
                ["analysed"] = analysis.Analysed,
                ["open_findings"] = analysis.OpenFindings,
                ["fleet_fit"] = analysis.FleetFit == 0 ? null : analysis.FleetFit,
                ["listed"] = report.Listed,
                ["below_limit"] = report.BelowLimit,
            }));
            return ExitCode.Done;
        }
        Console.WriteLine(address is null ? $"Not running; data in {Installation.DataFolder}." : $"Running on {address}; data in {Installation.DataFolder}.");
        Console.WriteLine(FormattableString.Invariant($"{ingest.Vehicles} vehicles, {ingest.Surveys} surveys with {ingest.Readings:#,0} readings, {ingest.SteeringSamples:#,0} steering samples in {ingest.SteeringChunks:#,0} chunks."));
        Console.WriteLine($"Held for review {ingest.Held}, refused {ingest.Refused}.");
        Console.WriteLine($"Due for analysis {analysis.Due}, analysed {analysis.Analysed}, open findings {analysis.OpenFindings}.");
        Console.WriteLine($"Listed for alignment {report.Listed}; tyres below the limit or unsafe {report.BelowLimit}.");
        return ExitCode.Done;
    }
}
