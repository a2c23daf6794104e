using System.Net;
using Microsoft.AspNetCore.Server.Kestrel.Core;
using Microsoft.Extensions.Diagnostics.HealthChecks;
using WearWatch.Analysis;
using WearWatch.Ingest;
using WearWatch.Report;
using WearWatch.Storage;

namespace WearWatch;

/// <summary>The three services in one process, or some of them, on one loopback port (HTTP/2 without TLS).</summary>
internal static class ServiceHost
{
    public static readonly string[] Services = ["ingest", "analysis", "report"];

    /// <param name="database">Where facts and findings live.</param>
    /// <param name="port">Loopback port; 0 picks a free one.</param>
    /// <param name="only">Services to host; all when empty.</param>
    /// <param name="verbose">Log to the terminal what a service logs beyond warnings.</param>
    public static WebApplication Build(Database database, int port, IReadOnlyCollection<string> only, bool verbose)
    {
        bool Hosts(string service) => only.Count == 0 || only.Contains(service);
        var builder = WebApplication.CreateSlimBuilder();
        builder.Logging.ClearProviders();
        builder.Logging.AddSimpleConsole(o => o.SingleLine = true);
        builder.Logging.SetMinimumLevel(verbose ? LogLevel.Information : LogLevel.Warning);
        builder.WebHost.ConfigureKestrel(o => o.Listen(IPAddress.Loopback, port, l => l.Protocols = HttpProtocols.Http2));
        builder.Services.AddGrpc();
        builder.Services.AddGrpcReflection();
        builder.Services.AddGrpcHealthChecks().AddAsyncCheck("database", async cancel =>
        {
            try
            {
                await using var connection = await database.Report.OpenConnectionAsync(cancel);
                return HealthCheckResult.Healthy();
            }
            catch (Npgsql.NpgsqlException down)
            {
                return HealthCheckResult.Unhealthy("database", down);
            }
        });
        if (Hosts("ingest")) builder.Services.AddIngest(database);
        if (Hosts("analysis")) builder.Services.AddAnalysis(database);
        if (Hosts("report")) builder.Services.AddReport(database);
        var app = builder.Build();
        if (Hosts("ingest")) app.MapIngest();
        if (Hosts("analysis")) app.MapAnalysis();
        if (Hosts("report")) app.MapReport();
        app.MapGrpcReflectionService();
        app.MapGrpcHealthChecksService();
        return app;
    }

    /// <summary>Address the host listens on, once started.</summary>
    public static string Address(WebApplication app) => app.Urls.First();
}
