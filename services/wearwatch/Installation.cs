using System.Text.Json;
using Grpc.Core;
using Grpc.Net.Client;
using WearWatch.Contracts.V1;
using WearWatch.Storage;
using WearWatch.Storage.Cluster;

namespace WearWatch;

/// <summary>
/// Where WearWatch keeps its data on this machine, and how a command reaches the services: those already running here,
/// or its own for the length of the command.
/// </summary>
internal sealed class Installation : IAsyncDisposable
{
    private readonly LocalCluster? _cluster;
    private readonly WebApplication? _app;
    private readonly Database? _database;

    private Installation(string address, LocalCluster? cluster, Database? database, WebApplication? app)
    {
        Address = address;
        _cluster = cluster;
        _database = database;
        _app = app;
        // Messages up to 4 MiB either way, as the contract says; a report of a long vehicle history may be larger.
        Channel = GrpcChannel.ForAddress(address, new GrpcChannelOptions { MaxReceiveMessageSize = 32 << 20 });
        Ingest = new(Channel);
        Analysis = new(Channel);
        Report = new(Channel);
    }

    public string Address { get; }
    public GrpcChannel Channel { get; }
    public IngestService.IngestServiceClient Ingest { get; }
    public AnalysisService.AnalysisServiceClient Analysis { get; }
    public ReportService.ReportServiceClient Report { get; }

    /// <summary>True when this process hosts the services.</summary>
    public bool Hosting => _app is not null;

    /// <summary>Data folder: <c>WEARWATCH_DATA</c>, else /var/lib/wearwatch for root, else ~/.local/share/wearwatch.</summary>
    public static string DataFolder => Environment.GetEnvironmentVariable("WEARWATCH_DATA") is { Length: > 0 } set
        ? Path.GetFullPath(set)
        : Environment.UserName == "root" ? "/var/lib/wearwatch" : Path.Combine(Environment.GetFolderPath(Environment.SpecialFolder.UserProfile), ".local", "share", "wearwatch");

    private static string RunningFile => Path.Combine(DataFolder, "running.json");

    /// <summary>The services already running here, or else started in this process on the data folder.</summary>
    public static async Task<Installation> Reach(CancellationToken cancel) =>
        await Running(cancel) ?? await Start(Path.Combine(DataFolder, "fleet"), new HostOptions(), cancel);

    /// <summary>The services another process announced, if they answer.</summary>
    public static async Task<Installation?> Running(CancellationToken cancel)
    {
        if (!File.Exists(RunningFile)) return null;
        var address = JsonSerializer.Deserialize<Announcement>(await File.ReadAllTextAsync(RunningFile, cancel))?.Address;
        if (address is null) return null;
        var installation = new Installation(address, null, null, null);
        try
        {
            await installation.Report.GetReportStatusAsync(new(), deadline: DateTime.UtcNow.AddSeconds(20), cancellationToken: cancel);
            return installation;
        }
        catch (RpcException gone) when (gone.StatusCode == StatusCode.Unavailable)
        {
            await installation.DisposeAsync();
            return null;
        }
    }

    /// <summary>Starts the services in this process, on their own cluster unless <c>WEARWATCH_DATABASE</c> names one.</summary>
    public static async Task<Installation> Start(string folder, HostOptions options, CancellationToken cancel)
    {
        LocalCluster? cluster = null;
        var connection = options.Database ?? Environment.GetEnvironmentVariable("WEARWATCH_DATABASE");
        if (string.IsNullOrEmpty(connection))
        {
            cluster = await LocalCluster.Start(folder, cancel: cancel);
            connection = cluster.ConnectionString;
        }
        try
        {
            var database = await Database.Open(connection, cancel);
            var app = ServiceHost.Build(database, options.Port, options.Only, options.Verbose);
            await app.StartAsync(cancel);
            return new Installation(ServiceHost.Address(app), cluster, database, app);
        }
        catch
        {
            if (cluster is not null) await cluster.DisposeAsync();
            throw;
        }
    }

    /// <summary>Tells the other commands on this machine where the services are, until disposed.</summary>
    public IDisposable Announce()
    {
        Directory.CreateDirectory(DataFolder);
        File.WriteAllText(RunningFile, JsonSerializer.Serialize(new Announcement(Address)));
        return new Withdrawn();
    }

    /// <summary>Waits until every fact is analysed. Reports how many vehicles are still due.</summary>
    public async Task Analysed(Action<string, double> progress, CancellationToken cancel)
    {
        long most = 1;
        while (true)
        {
            var status = await Analysis.GetAnalysisStatusAsync(new(), deadline: DateTime.UtcNow.AddMinutes(1), cancellationToken: cancel);
            var left = status.Due + status.ChunksToReduce;
            if (left == 0) return;
            most = Math.Max(most, left);
            progress(status.ChunksToReduce > 0 ? "straight runs" : "diagnosing", 1 - left / (double)most);
            await Task.Delay(200, cancel);
        }
    }

    public async ValueTask DisposeAsync()
    {
        Channel.Dispose();
        if (_app is not null)
        {
            await _app.StopAsync();
            await _app.DisposeAsync();
        }
        if (_database is not null) await _database.DisposeAsync();
        if (_cluster is not null) await _cluster.DisposeAsync();
    }

    private sealed record Announcement(string Address);

    private sealed class Withdrawn : IDisposable
    {
        public void Dispose() => File.Delete(RunningFile);
    }
}

/// <summary>How to host the services.</summary>
internal sealed record HostOptions
{
    public int Port { get; init; }
    public IReadOnlyCollection<string> Only { get; init; } = [];
    /// <summary>Connection string; the own cluster where null.</summary>
    public string? Database { get; init; }
    public bool Verbose { get; init; }
}
