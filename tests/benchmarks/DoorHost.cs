using System.Net;
using Grpc.Core;
using Grpc.Net.Client;
using Microsoft.AspNetCore.Builder;
using Microsoft.AspNetCore.Hosting;
using Microsoft.AspNetCore.Server.Kestrel.Core;
using Microsoft.Extensions.DependencyInjection;
using Microsoft.Extensions.Logging;
using WearWatch.Contracts.V1;
using WearWatch.Ingest;
using WearWatch.Storage;
using Client = WearWatch.Contracts.V1.IngestService.IngestServiceClient;

namespace WearWatch.Benchmarks;

/// <summary>Kestrel on a free loopback port (HTTP/2 without TLS), with a client over the same loopback.</summary>
internal sealed class DoorHost : IAsyncDisposable
{
    private readonly WebApplication _app;
    private readonly GrpcChannel _channel;

    private DoorHost(WebApplication app)
    {
        _app = app;
        _channel = GrpcChannel.ForAddress(app.Urls.First());
        Client = new Client(_channel);
    }

    public Client Client { get; }

    /// <summary>The ingest service itself.</summary>
    public static Task<DoorHost> Ingest(Database database, CancellationToken cancel) =>
        Start(services => services.AddIngest(database), app => app.MapIngest(), cancel);

    /// <summary>The same contract, everything thrown away.</summary>
    public static Task<DoorHost> Discard(CancellationToken cancel) =>
        Start(services => services.AddGrpc(), app => app.MapGrpcService<DiscardService>(), cancel);

    public async ValueTask DisposeAsync()
    {
        _channel.Dispose();
        await _app.StopAsync();
        await _app.DisposeAsync();
    }

    /// <summary>Sends one stream, reading its answers meanwhile; returns when every chunk is answered as stored.</summary>
    public async Task Send(StreamSteeringRequest header, List<StreamSteeringRequest> chunks, CancellationToken cancel)
    {
        using var call = Client.StreamSteering(cancellationToken: cancel);
        var reading = ReadAnswers(call.ResponseStream, cancel);
        await call.RequestStream.WriteAsync(header, cancel);
        foreach (var chunk in chunks) await call.RequestStream.WriteAsync(chunk, cancel);
        await call.RequestStream.CompleteAsync();
        var answered = await reading;
        if (answered != chunks.Count) throw new InvalidOperationException($"{header.Header.StreamId}: {answered} of {chunks.Count} chunks were answered");
    }

    private static async Task<int> ReadAnswers(IAsyncStreamReader<StreamSteeringResponse> answers, CancellationToken cancel)
    {
        var answered = 0;
        while (await answers.MoveNext(cancel))
        {
            answered++;
            if (answers.Current.Outcome != Outcome.Stored || answers.Current.Known)
                throw new InvalidOperationException($"chunk {answers.Current.Sequence} was not stored anew: {answers.Current}");
        }
        return answered;
    }

    private static async Task<DoorHost> Start(Action<IServiceCollection> add, Action<WebApplication> map, CancellationToken cancel)
    {
        var builder = WebApplication.CreateSlimBuilder();
        builder.Logging.ClearProviders();
        builder.WebHost.ConfigureKestrel(kestrel => kestrel.Listen(IPAddress.Loopback, 0, listen => listen.Protocols = HttpProtocols.Http2));
        add(builder.Services);
        var app = builder.Build();
        map(app);
        await app.StartAsync(cancel);
        return new DoorHost(app);
    }

    /// <summary>Reads each chunk and answers it, and does nothing else: the cost of gRPC alone.</summary>
    private sealed class DiscardService : IngestService.IngestServiceBase
    {
        public override async Task StreamSteering(IAsyncStreamReader<StreamSteeringRequest> requestStream, IServerStreamWriter<StreamSteeringResponse> responseStream, ServerCallContext context)
        {
            while (await requestStream.MoveNext(context.CancellationToken))
            {
                if (requestStream.Current.Chunk is not { } chunk) continue;
                await responseStream.WriteAsync(new StreamSteeringResponse { Sequence = chunk.Sequence, Outcome = Outcome.Stored, CommittedThrough = chunk.Sequence }, context.CancellationToken);
            }
        }
    }
}
