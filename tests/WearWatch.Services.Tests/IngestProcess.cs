using System.Diagnostics;
using System.Net;
using System.Net.Sockets;
using Grpc.Core;
using Grpc.Net.Client;
using WearWatch.Contracts.V1;
using Client = WearWatch.Contracts.V1.IngestService.IngestServiceClient;

namespace WearWatch.Services.Tests;

/// <summary>The ingest service as the command runs it, in a process of its own, which a test may kill.</summary>
internal sealed class IngestProcess : IAsyncDisposable
{
    private readonly Process _process;
    private readonly GrpcChannel _channel;

    private IngestProcess(Process process, int port)
    {
        _process = process;
        _channel = GrpcChannel.ForAddress($"http://127.0.0.1:{port}");
        Client = new Client(_channel);
    }

    public Client Client { get; }

    public static async Task<IngestProcess> Start(string database)
    {
        var port = FreePort();
        var start = new ProcessStartInfo("dotnet") { UseShellExecute = false, RedirectStandardOutput = true, RedirectStandardError = true };
        foreach (var argument in (string[])["exec", Path.Combine(AppContext.BaseDirectory, "wearwatch.dll"), "serve", "--only", "ingest", "--port", $"{port}", "--database", database]) start.ArgumentList.Add(argument);
        var process = Process.Start(start)!;
        process.OutputDataReceived += (_, _) => { };
        process.ErrorDataReceived += (_, _) => { };
        process.BeginOutputReadLine();
        process.BeginErrorReadLine();
        var ingest = new IngestProcess(process, port);
        await ingest.Ready();
        return ingest;
    }

    /// <summary>SIGKILL: no handler runs, nothing is flushed.</summary>
    public void Kill() => _process.Kill();

    public async ValueTask DisposeAsync()
    {
        _channel.Dispose();
        if (!_process.HasExited) _process.Kill();
        await _process.WaitForExitAsync();
        _process.Dispose();
    }

    private async Task Ready()
    {
        for (var waited = Stopwatch.StartNew(); ; await Task.Delay(100))
        {
            try
            {
                await Client.GetIngestStatusAsync(new GetIngestStatusRequest());
                return;
            }
            catch (RpcException) when (waited.Elapsed < TimeSpan.FromSeconds(60) && !_process.HasExited)
            {
                // Not listening yet.
            }
        }
    }

    private static int FreePort()
    {
        using var listener = new TcpListener(IPAddress.Loopback, 0);
        listener.Start();
        return ((IPEndPoint)listener.LocalEndpoint).Port;
    }
}
