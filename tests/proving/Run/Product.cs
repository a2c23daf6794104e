using System.Text.Json;
using Grpc.Core;
using Grpc.Net.Client;
using Npgsql;
using WearWatch.Contracts.V1;
using WearWatch.Storage.Cluster;

namespace WearWatch.Proving.Run;

/// <summary>
/// The product on a data folder of its own: its serve command as a process, a real PostgreSQL, and its gRPC address. The
/// cluster is started here without fsync, as its data can be made again; the product joins it.
/// </summary>
internal sealed class Product : IAsyncDisposable
{
    private readonly LocalCluster _cluster;
    private readonly Child _serve;
    private readonly GrpcChannel _channel;

    private Product(LocalCluster cluster, Child serve, string address)
    {
        (_cluster, _serve) = (cluster, serve);
        _channel = GrpcChannel.ForAddress(address, new GrpcChannelOptions { MaxReceiveMessageSize = 32 << 20 });
        Analysis = new(_channel);
        Report = new(_channel);
    }

    public AnalysisService.AnalysisServiceClient Analysis { get; }
    public ReportService.ReportServiceClient Report { get; }

    /// <param name="program">The product's command.</param>
    /// <param name="data">Its data folder.</param>
    /// <param name="forget">Drop what was reduced, fitted and diagnosed before, so that all of it is done anew.</param>
    /// <param name="cancel">Stops the waiting.</param>
    public static async Task<Product> Start(string program, string data, bool forget, CancellationToken cancel)
    {
        var cluster = await LocalCluster.Start(Path.Combine(data, "fleet"), durable: false, note => Console.Error.WriteLine(note), cancel);
        Child? serve = null;
        try
        {
            if (forget) await Forget(cluster.ConnectionString, cancel);
            var announced = Path.Combine(data, "running.json");
            File.Delete(announced);
            serve = Child.Start(program, data, "serve", "--port", "0");
            for (var waited = DateTime.UtcNow; ; await Task.Delay(100, cancel))
            {
                if (serve.HasExited || DateTime.UtcNow - waited > TimeSpan.FromMinutes(2)) throw new InvalidOperationException($"the product does not serve: {serve.Errors}");
                if (Address(announced) is { } address) return new(cluster, serve, address);
            }
        }
        catch
        {
            if (serve is not null) await serve.DisposeAsync();
            await cluster.DisposeAsync();
            throw;
        }
    }

    /// <summary>Waits until nothing is due any more.</summary>
    public async Task Analysed(CancellationToken cancel)
    {
        while (true)
        {
            var status = await Analysis.GetAnalysisStatusAsync(new(), deadline: DateTime.UtcNow.AddMinutes(2), cancellationToken: cancel);
            if (status.Due + status.ChunksToReduce == 0) return;
            if (_serve.HasExited) throw new InvalidOperationException($"the product ended: {_serve.Errors}");
            await Task.Delay(200, cancel);
        }
    }

    /// <summary>Ids of the vehicles in the order of the worklist.</summary>
    public async Task<IReadOnlyList<string>> Worklist(CancellationToken cancel)
    {
        var ids = new List<string>();
        var token = "";
        do
        {
            var page = await Report.GetWorklistAsync(new GetWorklistRequest { PageSize = 500, PageToken = token }, deadline: DateTime.UtcNow.AddMinutes(2), cancellationToken: cancel);
            ids.AddRange(page.Vehicles.Select(v => v.VehicleId));
            token = page.NextPageToken;
        }
        while (token.Length > 0);
        return ids;
    }

    public async Task<Contracts.V1.Diagnosis?> DiagnosisOf(string vehicleId, CancellationToken cancel)
    {
        try
        {
            return (await Analysis.GetDiagnosisAsync(new GetDiagnosisRequest { VehicleId = vehicleId }, deadline: DateTime.UtcNow.AddMinutes(1), cancellationToken: cancel)).Diagnosis;
        }
        catch (RpcException missing) when (missing.StatusCode == StatusCode.NotFound)
        {
            return null;
        }
    }

    public async ValueTask DisposeAsync()
    {
        _channel.Dispose();
        await _serve.DisposeAsync();
        await _cluster.DisposeAsync();
    }

    private static string? Address(string file)
    {
        try
        {
            return File.Exists(file) ? JsonDocument.Parse(File.ReadAllText(file)).RootElement.GetProperty("Address").GetString() : null;
        }
        catch (JsonException)
        {
            return null; // half written
        }
    }

    private const string ForgetSql = """
        DO $$ BEGIN
          EXECUTE (SELECT 'TRUNCATE ' || string_agg(format('analysis.%I', tablename), ', ') FROM pg_tables WHERE schemaname = 'analysis');
        END $$
        """;

    private static async Task Forget(string connectionString, CancellationToken cancel)
    {
        await using var connection = new NpgsqlConnection(connectionString);
        await connection.OpenAsync(cancel);
        await using var truncate = new NpgsqlCommand(ForgetSql, connection);
        await truncate.ExecuteNonQueryAsync(cancel);
    }
}
