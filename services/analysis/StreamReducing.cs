using WearWatch.Diagnosis.Steering;
using WearWatch.Storage.Analysis;
using WearWatch.Storage.Chunks;
using WearWatch.Storage.Facts;
using WearWatch.Storage.Streams;

namespace WearWatch.Analysis;

/// <summary>Reduces steering streams to straight runs, a stream at a time.</summary>
internal sealed class StreamReducing(FactReader facts, ChunkReader chunks, RunStore runs)
{
    /// <summary>Raised when the reduction changes, so that every stream is reduced anew.</summary>
    public const string Method = "reduction-2";

    private const int Batch = 32;

    /// <returns>How many streams were reduced.</returns>
    public async Task<int> Some(CancellationToken cancel)
    {
        var waiting = await runs.ToReduce(Method, Batch, cancel);
        var done = 0;
        await Parallel.ForEachAsync(waiting, cancel, async (stream, token) =>
        {
            if (await runs.Replace(stream, Method, () => Reduce(stream, token), token)) Interlocked.Increment(ref done);
        });
        return done;
    }

    private async Task<StreamReduction> Reduce(StreamToReduce stream, CancellationToken cancel)
    {
        var vehicle = (await facts.LoadVehicle(stream.VehicleId, null, cancel))?.Vehicle;
        var columns = new List<(long, SteeringColumns)>();
        await foreach (var chunk in chunks.OfStream(stream.Depot, stream.StreamId, 0, cancel))
        {
            if (columns.Count == stream.Chunks) break;
            columns.Add((chunk.Sequence, ChunkCodec.Decode(chunk.Columns)));
        }
        return RunReduction.ReduceStream(stream.VehicleId, stream.StreamId, columns, vehicle is null ? new(null, null) : ReductionVehicle.Of(vehicle));
    }
}
