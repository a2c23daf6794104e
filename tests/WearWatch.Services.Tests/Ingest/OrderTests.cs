using CsCheck;
using WearWatch.Contracts.V1;
using WearWatch.Storage;
using WearWatch.Storage.Facts;
using WearWatch.Storage.Streams;

namespace WearWatch.Services.Tests.Ingest;

/// <summary>The order in which things arrive, and how often, does not matter.</summary>
public sealed class OrderTests(PostgresFixture postgres) : IngestTest(postgres)
{
    [Fact]
    public async Task Chunks_in_any_order_and_number_end_as_the_same_stream()
    {
        const int Count = 12;
        var stream = 0;
        await Gen.Int[1, Count].Array[0, 10].Select(Gen.Shuffle(Enumerable.Range(1, Count).ToArray())).SampleAsync(async (again, order) =>
        {
            var id = $"any{Interlocked.Increment(ref stream)}";
            var answers = await Streams.Send(Client, Streams.Header(Depot, Van, id), order.Concat(again).Select(i => Streams.Chunk(i)).ToArray());
            var stored = new List<long>();
            await foreach (var chunk in new ChunkReader(Server.Database.Analysis).OfStream(Depot, id, 0, default)) stored.Add(chunk.Sequence);
            return answers.All(a => a.Outcome == Outcome.Stored) && answers.Count(a => a.Known) == again.Length
                && answers[^1].CommittedThrough == Count && stored.SequenceEqual(Enumerable.Range(1, Count).Select(i => (long)i));
        }, iter: 10, threads: 1);
    }

    [Fact]
    public async Task Facts_in_any_order_and_number_leave_the_same_knowledge()
    {
        var run = 0;
        string? first = null;
        await Gen.Shuffle(Enumerable.Range(0, 8).ToArray()).SampleAsync(async order =>
        {
            // A new depot each time, its name taken out of what is compared.
            var depot = $"{Depot}{Interlocked.Increment(ref run):00}";
            var van = $"{depot}-V";
            var facts = Enumerable.Range(0, 4).Select(week => Sample.Survey(depot, van, $"s{week}", Sample.Monday.AddDays(7 * week), 40_000 + 600 * week, 7.1, 7.2, 7.0))
                .Concat(Enumerable.Range(0, 4).Select(week => Sample.Fitting(depot, van, $"f{week}", Sample.Monday.AddDays(-7 - week), "1L", 8))).ToArray();
            await Store(Sample.Depot(depot), Sample.Van(depot, van));
            foreach (var i in order) await Store(facts[i]);
            await Store(facts);
            var known = await new FactReader(Server.Database.Analysis).LoadVehicle(van, null, default);
            var text = FactJson.Write(known).Replace(depot, "D", StringComparison.Ordinal);
            return text == (first ??= text);
        }, iter: 8, threads: 1);
    }
}
