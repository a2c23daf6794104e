namespace WearWatch.Diagnosis.Steering;

/// <summary>One-second blocks of a stream, as columns. Filled in one pass over the samples.</summary>
internal sealed class Blocks
{
    private static readonly SteeringChannel[] Reduced = Enum.GetValues<SteeringChannel>().Where(c => !c.IsPrecise()).ToArray();

    private readonly float[]?[] _mean = new float[]?[SteeringChannels.Count];
    private readonly float[]?[] _min = new float[]?[SteeringChannels.Count];
    private readonly float[]?[] _max = new float[]?[SteeringChannels.Count];
    private readonly double[] _resolution = new double[SteeringChannels.Count];
    private readonly bool[] _flat = new bool[SteeringChannels.Count];

    private Blocks(int count)
    {
        Count = count;
        (StartTicks, Seconds, Sequence, Joined) = (Column<long>(count), Column<float>(count), Column<long>(count), Column<bool>(count));
        (Latitude, Longitude, Samples) = (Column<double>(count), Column<double>(count), Column<int>(count));
    }

    public int Count { get; }
    /// <summary>UTC ticks of each block's first sample.</summary>
    public long[] StartTicks { get; }
    public float[] Seconds { get; }
    public long[] Sequence { get; }
    /// <summary>The block follows the one before without a gap.</summary>
    public bool[] Joined { get; }
    public int[] Samples { get; }
    /// <summary>deg; NaN where unknown.</summary>
    public double[] Latitude { get; }
    public double[] Longitude { get; }
    /// <summary>Distance run between the first and the last valid sample, km; null without the channel.</summary>
    public double? DistanceKm { get; private set; }
    public bool TorqueUnitUnknown { get; private set; }
    /// <summary>How the chunks follow each other.</summary>
    public StreamClock Chunks { get; private set; } = new();

    public bool Has(SteeringChannel channel) => _mean[(int)channel] is not null;
    public ReadOnlySpan<float> Mean(SteeringChannel channel) => _mean[(int)channel];
    /// <summary>The means themselves, for those who ask for one block at a time; null without the channel.</summary>
    public float[]? Means(SteeringChannel channel) => _mean[(int)channel];
    public ReadOnlySpan<float> Min(SteeringChannel channel) => _min[(int)channel];
    public ReadOnlySpan<float> Max(SteeringChannel channel) => _max[(int)channel];
    /// <summary>Coarsest step of the channel over the stream, in its unit.</summary>
    public double Resolution(SteeringChannel channel) => _resolution[(int)channel];

    /// <summary>Some block of the channel holds one value only: most streams have none, and need not be searched for faults of that kind.</summary>
    public bool IsFlatSomewhere(SteeringChannel channel) => _flat[(int)channel];

    /// <summary>Blanks a channel where it cannot be believed.</summary>
    public void Blank(SteeringChannel channel, int from, int to) => _mean[(int)channel].AsSpan(from, to - from).Fill(float.NaN);

    /// <summary>Moves a block's values of a channel by as much.</summary>
    public void Shift(SteeringChannel channel, int block, float by)
    {
        _mean[(int)channel]![block] += by;
        _min[(int)channel]![block] += by;
        _max[(int)channel]![block] += by;
    }

    public static Blocks Of(IReadOnlyList<(long Sequence, SteeringColumns Columns)> chunks, bool scalar = false)
    {
        var ordered = Ordered(chunks);
        var blocks = new Blocks(ordered.Sum(c => CountIn(c.Columns)));
        foreach (var channel in Reduced)
            if (ordered.Any(c => !c.Columns[channel].IsEmpty)) blocks.Allocate(channel);
        blocks.Chunks = StreamClock.Of([.. ordered.Select(c => c.Columns)]);
        var at = 0;
        int[] edges = [];
        for (var i = 0; i < ordered.Count; i++)
        {
            var columns = ordered[i].Columns;
            var count = CountIn(columns);
            if (edges.Length != count + 1 || i > 0 && (ordered[i - 1].Columns.RateHz != columns.RateHz || ordered[i - 1].Columns.Count != columns.Count))
                edges = Edges(columns, count);
            blocks.Describe(at, ordered[i].Sequence, columns, i > 0 && Follows(ordered[i - 1].Columns, columns), edges);
            foreach (var channel in Reduced) blocks.Reduce(channel, at, columns, edges, scalar);
            at += count;
        }
        blocks.DropRepeated();
        blocks.TorqueUnitUnknown = ordered.Any(c => c.Columns.TorqueUnit != TorqueUnit.NewtonMetre && (c.Columns.Has(SteeringChannel.DriverTorque) || c.Columns.Has(SteeringChannel.AssistTorque)));
        blocks.DistanceKm = DistanceOver(ordered.Select(c => c.Columns));
        return blocks;
    }

    /// <summary>Chunks with samples by sequence, each once.</summary>
    internal static List<(long Sequence, SteeringColumns Columns)> Ordered(IReadOnlyList<(long Sequence, SteeringColumns Columns)> chunks) =>
        [.. chunks.Where(c => c.Columns.Count > 0).OrderBy(c => c.Sequence).DistinctBy(c => c.Sequence)];

    /// <summary>A clock that went back repeats a time: what came under it again is not driven twice and is left out.</summary>
    private void DropRepeated()
    {
        if (Chunks.Backwards == 0) return;
        var latest = long.MinValue;
        for (var b = 0; b < Count; b++)
        {
            var end = StartTicks[b] + (long)(Seconds[b] * TimeSpan.TicksPerSecond);
            if (StartTicks[b] < latest - TimeSpan.TicksPerSecond / 2)
            {
                foreach (var channel in Reduced) if (Has(channel)) Blank(channel, b, b + 1);
                (Latitude[b], Longitude[b], Joined[b]) = (double.NaN, double.NaN, false);
            }
            else latest = Math.Max(latest, end);
        }
    }

    private void Allocate(SteeringChannel channel)
    {
        (_mean[(int)channel], _min[(int)channel], _max[(int)channel]) = (Column<float>(Count), Column<float>(Count), Column<float>(Count));
    }

    /// <summary>Not cleared: every block is written.</summary>
    private static T[] Column<T>(int count) => GC.AllocateUninitializedArray<T>(count);

    /// <summary>The next chunk starts where the one before ended, to half a sample (or half a second at low rates).</summary>
    private static bool Follows(SteeringColumns before, SteeringColumns next) =>
        Math.Abs((next.Start - before.End).TotalSeconds) <= Math.Min(0.5, 1.5 / before.RateHz);

    /// <summary>Whole seconds in the chunk, and its rest when at least half a second (always at least one).</summary>
    private static int CountIn(SteeringColumns columns) =>
        columns.RateHz <= 1 ? columns.Count : Math.Max(1, (int)Math.Round(columns.Count / columns.RateHz));

    /// <summary>First sample of each block, and the end.</summary>
    private static int[] Edges(SteeringColumns columns, int blocks)
    {
        var edges = new int[blocks + 1];
        for (var b = 1; b < blocks; b++) edges[b] = columns.RateHz <= 1 ? b : (int)Math.Round(b * columns.RateHz);
        edges[blocks] = columns.Count;
        return edges;
    }

    private void Describe(int at, long sequence, SteeringColumns columns, bool follows, int[] edges)
    {
        var latitude = columns.Precise(SteeringChannel.Latitude);
        var longitude = columns.Precise(SteeringChannel.Longitude);
        var (start, ticksPerSample, samplesPerSecond) = (columns.Start.UtcTicks, TimeSpan.TicksPerSecond / columns.RateHz, columns.RateHz);
        for (var b = 0; b + 1 < edges.Length; b++)
        {
            var (from, to) = (edges[b], edges[b + 1]);
            StartTicks[at + b] = start + (long)(from * ticksPerSample);
            Seconds[at + b] = (float)((to - from) / samplesPerSecond);
            Samples[at + b] = to - from;
            Sequence[at + b] = sequence;
            Joined[at + b] = b > 0 || follows;
            var middle = (from + to) / 2;
            Latitude[at + b] = latitude.IsEmpty ? double.NaN : latitude[middle];
            Longitude[at + b] = longitude.IsEmpty ? double.NaN : longitude[middle];
        }
    }

    private void Reduce(SteeringChannel channel, int at, SteeringColumns columns, int[] edges, bool scalar)
    {
        if (_mean[(int)channel] is not { } mean) return;
        var (min, max) = (_min[(int)channel]!, _max[(int)channel]!);
        var samples = columns[channel];
        var flat = _flat[(int)channel];
        _resolution[(int)channel] = Math.Max(_resolution[(int)channel], columns.Resolution(channel));
        var b = 0;
        if (!scalar && !samples.IsEmpty && columns.RateHz is var rate and >= BlockPass.LeastAbreast and <= BlockPass.MostAbreast && rate == Math.Floor(rate))
        {
            // Whole seconds of the same number of samples: all, or all but the last.
            var length = (int)rate;
            b = Math.Min(edges.Length - 1, samples.Length / length);
            if (edges[b] != b * length) b--;
            flat |= BlockPass.Abreast(samples, length, mean.AsSpan(at, b), min.AsSpan(at, b), max.AsSpan(at, b));
        }
        for (; b + 1 < edges.Length; b++)
        {
            var block = samples.IsEmpty ? BlockSummary.Missing
                : scalar ? BlockPass.Scalar(samples[edges[b]..edges[b + 1]]) : BlockPass.Vectorised(samples[edges[b]..edges[b + 1]]);
            (mean[at + b], min[at + b], max[at + b]) = (block.Mean, block.Min, block.Max);
            flat |= block.Min == block.Max;
        }
        _flat[(int)channel] = flat;
    }

    private static double? DistanceOver(IEnumerable<SteeringColumns> chunks)
    {
        double? first = null, last = null;
        foreach (var columns in chunks)
            foreach (var km in columns.Precise(SteeringChannel.Distance))
                if (!double.IsNaN(km)) (first, last) = (first ?? km, km);
        return last - first;
    }
}
