using WearWatch.Diagnosis.Steering;
using WearWatch.Storage.Chunks;

namespace WearWatch.Benchmarks;

/// <summary>
/// Samples per second of the reduction on one core, decoding timed apart. One sample is one row of six channels. The plain
/// reference reduces the same columns to the same block means, sample by sample, and stops there.
/// </summary>
internal static class ReductionBenchmark
{
    private static readonly SteeringChannel[] Channels =
        [SteeringChannel.Speed, SteeringChannel.SteeringWheelAngle, SteeringChannel.DriverTorque, SteeringChannel.AssistTorque, SteeringChannel.YawRate, SteeringChannel.LateralAcceleration];

    private const int Minutes = 40;
    private const int WarmUps = 60;

    public static IReadOnlyDictionary<string, object> Run()
    {
        var figures = new Dictionary<string, object> { ["channels"] = Channels.Length };
        foreach (var rate in (int[])[10, 100]) Run(rate, figures);
        return figures;
    }

    private static void Run(int rate, Dictionary<string, object> figures)
    {
        var chunks = Enumerable.Range(0, Minutes).Select(m => ((long)m, Chunk(m, rate))).ToList();
        var samples = chunks.Sum(c => (long)c.Item2.Count);
        var encoded = chunks.Select(c => ChunkCodec.Encode(c.Item2).Bytes).ToArray();
        var decoded = encoded.Select((bytes, m) => ((long)m, ChunkCodec.Decode(bytes))).ToList();
        var vehicle = new ReductionVehicle(3.6, 16);
        var repeats = Math.Max(1, (int)(500_000 / samples));
        double Rate(Action once) => Math.Round(samples * repeats / Timing.Best(15, () => { for (var i = 0; i < repeats; i++) once(); }) / 1e6, 2);

        // What is timed is code as a worker runs it, not its first compilation, which would count against whichever form comes first.
        for (var i = 0; i < WarmUps; i++)
        {
            RunReduction.Reduce("v", "s", decoded, vehicle);
            RunReduction.ReduceStream("v", "s", decoded, vehicle, scalar: true);
        }
        Thread.Sleep(500);
        var runs = 0;
        var held = GC.GetAllocatedBytesForCurrentThread();
        RunReduction.Reduce("v", "s", decoded, vehicle);
        held = GC.GetAllocatedBytesForCurrentThread() - held;
        var sink = 0.0;
        var at = $"{rate}_hz";
        figures[$"samples_{at}"] = samples;
        figures[$"reduction_msamples_per_s_{at}"] = Rate(() => runs = RunReduction.Reduce("v", "s", decoded, vehicle).Count);
        figures[$"reduction_scalar_twin_msamples_per_s_{at}"] = Rate(() => RunReduction.ReduceStream("v", "s", decoded, vehicle, scalar: true));
        figures[$"plain_block_means_msamples_per_s_{at}"] = Rate(() => sink += PlainBlockMeans(decoded, rate));
        figures[$"decoding_msamples_per_s_{at}"] = Rate(() => { foreach (var bytes in encoded) ChunkCodec.Decode(bytes); });
        figures[$"encoding_msamples_per_s_{at}"] = Rate(() => { foreach (var (_, columns) in chunks) ChunkCodec.Encode(columns); });
        figures[$"bytes_per_stored_sample_{at}"] = Math.Round(encoded.Sum(b => (double)b.Length) / samples, 2);
        figures[$"bytes_per_uncompressed_sample_{at}"] = 4 * Channels.Length;
        figures[$"allocated_bytes_per_sample_{at}"] = Math.Round((double)held / samples, 2);
        figures[$"runs_{at}"] = runs;
        if (double.IsNaN(sink)) throw new InvalidOperationException("block means are not numbers");
    }

    /// <summary>The obvious way: one list of values per block and channel, its mean taken sample by sample in double.</summary>
    private static double PlainBlockMeans(List<(long, SteeringColumns)> chunks, int rate)
    {
        var sum = 0.0;
        foreach (var (_, columns) in chunks)
            foreach (var channel in Channels)
            {
                var values = columns[channel];
                for (var from = 0; from < values.Length; from += rate)
                {
                    var (total, count, least, most) = (0.0, 0, double.MaxValue, double.MinValue);
                    for (var i = from; i < Math.Min(from + rate, values.Length); i++)
                    {
                        if (float.IsNaN(values[i])) continue;
                        total += values[i];
                        count++;
                        least = Math.Min(least, values[i]);
                        most = Math.Max(most, values[i]);
                    }
                    sum += total / count + least - most;
                }
            }
        return sum;
    }

    /// <summary>A minute of motorway with a bend in every fifth; slow wander plus noise, at the steps usual for such sensors.</summary>
    private static SteeringColumns Chunk(int minute, int rate)
    {
        var random = new Random(minute);
        double Normal() => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());
        var count = 60 * rate;
        var values = Channels.Select(_ => new float[count]).ToArray();
        var (wander, smooth) = (0.0, Math.Exp(-1.0 / rate));
        for (var i = 0; i < count; i++)
        {
            wander = smooth * wander + Math.Sqrt(1 - smooth * smooth) * Normal();
            var bend = minute % 5 == 4 && i < 10 * rate ? 4.0 : 0;
            (values[0][i], values[1][i]) = ((float)(88 + 0.3 * wander), (float)(1.5 + 0.4 * wander + 2.3 * bend + 0.05 * Normal()));
            (values[2][i], values[3][i]) = ((float)(0.5 + 0.2 * wander + 0.2 * Normal()), (float)(1.2 + 0.4 * wander + 0.2 * Normal()));
            (values[4][i], values[5][i]) = ((float)(0.1 + 0.1 * wander + bend + 0.05 * Normal()), (float)(0.2 + 1.7 * bend / 4 + 0.05 * Normal()));
        }
        double[] steps = [1.0 / 256, 0.1, 0.01, 0.01, 0.01, 0.01];
        return new(new DateTimeOffset(2026, 3, 2, 6, minute, 0, TimeSpan.Zero), rate, Channels.Select((c, k) => SteeringColumn.Of(c, values[k], steps[k])));
    }
}
