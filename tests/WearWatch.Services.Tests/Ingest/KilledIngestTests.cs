using System.Collections.Concurrent;
using Grpc.Core;
using WearWatch.Contracts.V1;
using WearWatch.Storage;
using WearWatch.Storage.Streams;

namespace WearWatch.Services.Tests.Ingest;

/// <summary>Ingest killed with SIGKILL in the middle of a stream: what it acknowledged is there once, and the stream goes on.</summary>
[Collection(PostgresCollection.Name)]
public sealed class KilledIngestTests(PostgresFixture postgres)
{
    private const int Chunks = 400;

    [Fact]
    public async Task What_was_acknowledged_before_a_kill_is_stored_once_and_the_stream_resumes()
    {
        var database = await postgres.NewDatabase();
        const string Depot = "K", Van = "K-V1";
        var acknowledged = new ConcurrentDictionary<long, bool>();

        await using (var ingest = await IngestProcess.Start(database))
        {
            await ingest.Client.RecordFactsAsync(new RecordFactsRequest { Facts = { Sample.Depot(Depot), Sample.Van(Depot, Van) } });
            await Assert.ThrowsAsync<RpcException>(() => SendUntilCut(ingest, Streams.Header(Depot, Van, "st1"), acknowledged, () => ingest.Kill()));
        }
        Assert.InRange(acknowledged.Count, 1, Chunks - 1); // it was cut in the middle

        await using (var ingest = await IngestProcess.Start(database))
        {
            Assert.Equal(acknowledged.Keys.Order(), (await Stored(database)).Where(acknowledged.ContainsKey));
            var progress = await ingest.Client.GetStreamProgressAsync(new GetStreamProgressRequest { DepotId = Depot, StreamId = "st1" });
            Assert.True(progress.CommittedThrough >= acknowledged.Keys.Max());
            var rest = Enumerable.Range((int)progress.CommittedThrough + 1, Chunks - (int)progress.CommittedThrough).Select(i => Streams.Chunk(i)).ToArray();
            var answers = await Streams.Send(ingest.Client, Streams.Header(Depot, Van, "st1"), rest);
            Assert.All(answers, a => Assert.Equal((Outcome.Stored, false), (a.Outcome, a.Known)));
            Assert.Equal(Chunks, answers[^1].CommittedThrough);
        }
        Assert.Equal(Enumerable.Range(1, Chunks).Select(i => (long)i), await Stored(database));
    }

    /// <summary>Sends without waiting for answers; the kill comes after the third group of answers, with chunks under way.</summary>
    private static async Task SendUntilCut(IngestProcess ingest, StreamHeader header, ConcurrentDictionary<long, bool> acknowledged, Action kill)
    {
        using var call = ingest.Client.StreamSteering();
        await call.RequestStream.WriteAsync(new StreamSteeringRequest { Header = header });
        var reading = Task.Run(async () =>
        {
            while (await call.ResponseStream.MoveNext(default))
            {
                Assert.Equal(Outcome.Stored, call.ResponseStream.Current.Outcome);
                acknowledged[call.ResponseStream.Current.Sequence] = true;
                if (acknowledged.Count == 40) kill();
            }
        });
        try
        {
            for (var i = 1; i <= Chunks && !reading.IsCompleted; i++) await call.RequestStream.WriteAsync(new StreamSteeringRequest { Chunk = Streams.Chunk(i) });
        }
        catch (Exception error) when (error is RpcException or InvalidOperationException or IOException)
        {
            // Cut while sending; reading ends with the same error.
        }
        await reading;
    }

    private static async Task<List<long>> Stored(string connectionString)
    {
        await using var database = await Database.Open(connectionString);
        var sequences = new List<long>();
        await foreach (var chunk in new ChunkReader(database.Analysis).OfStream("K", "st1", 0, default)) sequences.Add(chunk.Sequence);
        return sequences;
    }
}
