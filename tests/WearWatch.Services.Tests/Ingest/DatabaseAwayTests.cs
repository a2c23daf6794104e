using Grpc.Core;
using WearWatch.Contracts.V1;
using WearWatch.Storage.Cluster;

namespace WearWatch.Services.Tests.Ingest;

/// <summary>The database goes away and comes back: senders are told to send again, and nothing acknowledged is lost.</summary>
public sealed class DatabaseAwayTests : IAsyncLifetime
{
    private readonly string _folder = Path.Combine(Path.GetTempPath(), $"wearwatch-away-{Guid.NewGuid():N}");
    private LocalCluster _cluster = null!;

    public async Task InitializeAsync() => _cluster = await LocalCluster.Start(_folder, durable: false);

    public async Task DisposeAsync()
    {
        if (_cluster.IsRunning()) await _cluster.Stop();
        Directory.Delete(_folder, recursive: true);
    }

    [Fact]
    public async Task A_sender_is_told_that_the_database_is_away_and_served_again_when_it_is_back()
    {
        await using var server = await IngestServer.Start(_cluster.ConnectionString);
        var facts = new RecordFactsRequest { Facts = { Sample.Depot("D"), Sample.Van("D", "V") } };
        await server.Client.RecordFactsAsync(facts);
        using var call = server.Client.StreamSteering();
        await call.RequestStream.WriteAsync(new StreamSteeringRequest { Header = Streams.Header("D", "V", "st1") });
        await call.RequestStream.WriteAsync(new StreamSteeringRequest { Chunk = Streams.Chunk(1) });
        Assert.True(await call.ResponseStream.MoveNext(default));

        await _cluster.Stop();
        await call.RequestStream.WriteAsync(new StreamSteeringRequest { Chunk = Streams.Chunk(2) });
        Assert.Equal(StatusCode.Unavailable, (await Assert.ThrowsAsync<RpcException>(() => call.ResponseStream.MoveNext(default))).StatusCode);
        Assert.Equal(StatusCode.Unavailable, (await Assert.ThrowsAsync<RpcException>(async () => await server.Client.RecordFactsAsync(facts))).StatusCode);

        _cluster = await LocalCluster.Start(_folder, durable: false);
        Assert.True(Assert.Single((await server.Client.RecordFactsAsync(new RecordFactsRequest { Facts = { facts.Facts[1] } })).Answers).Known);
        Assert.Equal(1, (await server.Client.GetStreamProgressAsync(new GetStreamProgressRequest { DepotId = "D", StreamId = "st1" })).CommittedThrough);
        Assert.Empty(server.UnexpectedErrors);
    }
}
