namespace WearWatch.Diagnosis.Steering;

/// <summary>One-second blocks of a stream, as columns. Filled in one pass over the samples.</summary>
internal sealed class Blocks
{
    private static readonly SteeringChannel[] Reduced = Enum.GetValues<SteeringChannel>().Where(c => !c.IsPrecise()).ToArray();

    private readonly float[]?[] _mean = new float[]?[SteeringChannels.Count];
    private readonly float[]?[] _min = new float[]?[SteeringChannels.Count];
    private readonly float[]?[] _max = new float[]?[SteeringChannels.Count];
    private readonly double[] _resolution = new double[SteeringChannels.Count];

    private Blocks(int count)
    {
        Count = count;
        (StartTicks, Seconds, Sequence, Joined) = (new long[count], new float[count], new long[count], new bool[count]);
        (Latitude, Longitude, Samples) = (new double[count], new double[count], new int[count]);
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

    public bool Has(SteeringChannel channel) => _mean[(int)channel] is not null;
    public ReadOnlySpan<float> Mean(SteeringChannel channel) => _mean[(int)channel];
    public ReadOnlySpan<float> Min(SteeringChannel channel) => _min[(int)channel];
    public ReadOnlySpan<float> Max(SteeringChannel channel) => _max[(int)channel];
    /// <summary>Coarsest step of the channel over the stream, in its unit.</summary>
    public double Resolution(SteeringChannel channel) => _resolution[(int)channel];

    /// <summary>Blanks a channel where it cannot be believed.</summary>
    public void Blank(SteeringChannel channel, int from, int to) => _mean[(int)channel].AsSpan(from, to - from).Fill(float.NaN);

    public static Blocks Of(IReadOnlyList<(long Sequence, SteeringColumns Columns)> chunks, bool scalar = false)
    {
        var ordered = chunks.Where(c => c.Columns.Count > 0).OrderBy(c => c.Sequence).DistinctBy(c => c.Sequence).ToList();
        var blocks = new Blocks(ordered.Sum(c => CountIn(c.Columns)));
        foreach (var channel in Reduced)
            if (ordered.Any(c => !c.Columns[channel].IsEmpty)) blocks.Allocate(channel);
        var at = 0;
        for (var i = 0; i < ordered.Count; i++)
        {
            blocks.Describe(at, ordered[i].Sequence, ordered[i].Columns, i > 0 && Follows(ordered[i - 1].Columns, ordered[i].Columns));
            foreach (var channel in Reduced) blocks.Reduce(channel, at, ordered[i].Columns, scalar);
            at += CountIn(ordered[i].Columns);
        }
        blocks.TorqueUnitUnknown = ordered.Any(c => c.Columns.TorqueUnit != TorqueUnit.NewtonMetre && (c.Columns.Has(SteeringChannel.DriverTorque) || c.Columns.Has(SteeringChannel.AssistTorque)));
        blocks.DistanceKm = DistanceOver(ordered.Select(c => c.Columns));
        return blocks;
    }

    private void Allocate(SteeringChannel channel)
    {
        (_mean[(int)channel], _min[(int)channel], _max[(int)channel]) = (new float[Count], new float[Count], new float[Count]);
    }

    /// <summary>The next chunk starts where the one before ended, to half a sample (or half a second at low rates).</summary>
    private static bool Follows(SteeringColumns before, SteeringColumns next) =>
        Math.Abs((next.Start - before.End).TotalSeconds) <= Math.Min(0.5, 1.5 / before.RateHz);

    /// <summary>Whole seconds in the chunk, and its rest when at least half a second (always at least one).</summary>
    private static int CountIn(SteeringColumns columns) =>
        columns.RateHz <= 1 ? columns.Count : Math.Max(1, (int)Math.Round(columns.Count / columns.RateHz));

    private static int Edge(SteeringColumns columns, int block, int blocks) =>
        block == blocks ? columns.Count : columns.RateHz <= 1 ? block : (int)Math.Round(block * columns.RateHz);

    private void Describe(int at, long sequence, SteeringColumns columns, bool follows)
    {
        var blocks = CountIn(columns);
        var latitude = columns.Precise(SteeringChannel.Latitude);
        var longitude = columns.Precise(SteeringChannel.Longitude);
        for (var b = 0; b < blocks; b++)
        {
            var (from, to) = (Edge(columns, b, blocks), Edge(columns, b + 1, blocks));
            StartTicks[at + b] = columns.Start.UtcTicks + (long)(from / columns.RateHz * TimeSpan.TicksPerSecond);
            Seconds[at + b] = (float)((to - from) / columns.RateHz);
            Samples[at + b] = to - from;
            Sequence[at + b] = sequence;
            Joined[at + b] = b > 0 || follows;
            var middle = (from + to) / 2;
            Latitude[at + b] = latitude.IsEmpty ? double.NaN : latitude[middle];
            Longitude[at + b] = longitude.IsEmpty ? double.NaN : longitude[middle];
        }
    }

    private void Reduce(SteeringChannel channel, int at, SteeringColumns columns, bool scalar)
    {
        if (_mean[(int)channel] is not { } mean) return;
        var (min, max, blocks) = (_min[(int)channel]!, _max[(int)channel]!, CountIn(columns));
        var samples = columns[channel];
        _resolution[(int)channel] = Math.Max(_resolution[(int)channel], columns.Resolution(channel));
        for (var (b, from) = (0, 0); b < blocks; b++)
        {
            var to = Edge(columns, b + 1, blocks);
            var block = samples.IsEmpty ? BlockSummary.Missing
                : scalar ? BlockPass.Scalar(samples[from..to]) : BlockPass.Vectorised(samples[from..to]);
            (mean[at + b], min[at + b], max[at + b]) = (block.Mean, block.Min, block.Max);
            from = to;
        }
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
