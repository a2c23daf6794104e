namespace WearWatch.Diagnosis.Steering;

/// <summary>One channel of a chunk: floats, or doubles for position and distance. A missing sample is NaN. Resolution is the sensor's step in the channel's unit, above 0.</summary>
public sealed record SteeringColumn(SteeringChannel Channel, float[]? Values, double[]? PreciseValues, double Resolution)
{
    public static SteeringColumn Of(SteeringChannel channel, float[] values, double resolution) => new(channel, values, null, resolution);

    public static SteeringColumn Of(SteeringChannel channel, double[] values, double resolution) => new(channel, null, values, resolution);

    public int Count => Values?.Length ?? PreciseValues?.Length ?? 0;
}

/// <summary>Equal-rate columns of one chunk, in memory. Immutable by convention: the arrays are not copied.</summary>
public sealed class SteeringColumns
{
    /// <summary>Most samples one chunk may hold: 10 min at 100 Hz and room to spare.</summary>
    public const int MostSamples = 1 << 17;

    private readonly SteeringColumn?[] _columns = new SteeringColumn?[SteeringChannels.Count];

    /// <summary>From the UTC time of the first sample and the samples per second, above 0 and at most 1000.</summary>
    /// <exception cref="ArgumentException">Columns differ in length, repeat a channel, are of the wrong precision or carry no resolution.</exception>
    public SteeringColumns(DateTimeOffset start, double rateHz, IEnumerable<SteeringColumn> columns, TorqueUnit torqueUnit = TorqueUnit.NewtonMetre)
    {
        if (!(rateHz > 0 && rateHz <= 1000)) throw new ArgumentException($"rate_hz {rateHz} is not above 0 and at most 1000", nameof(rateHz));
        (Start, RateHz, TorqueUnit) = (start.ToUniversalTime(), rateHz, torqueUnit);
        var first = true;
        foreach (var column in columns)
        {
            Check(column);
            if (first) Count = column.Count;
            else if (column.Count != Count) throw new ArgumentException($"{column.Channel} has {column.Count} samples, the first column {Count}", nameof(columns));
            first = false;
            _columns[(int)column.Channel] = column;
        }
        if (Count > MostSamples) throw new ArgumentException($"{Count} samples are more than {MostSamples}", nameof(columns));
    }

    /// <summary>UTC.</summary>
    public DateTimeOffset Start { get; }
    public double RateHz { get; }
    public int Count { get; }
    public TorqueUnit TorqueUnit { get; }
    public DateTimeOffset End => Start.AddSeconds(Count / RateHz);

    public IEnumerable<SteeringColumn> Columns => _columns.OfType<SteeringColumn>();

    public bool Has(SteeringChannel channel) => _columns[(int)channel] is not null;

    /// <summary>Samples of a channel; empty where absent, and for torque whose unit is not N·m.</summary>
    public ReadOnlySpan<float> this[SteeringChannel channel] =>
        channel.IsTorque() && TorqueUnit != TorqueUnit.NewtonMetre ? default : _columns[(int)channel]?.Values;

    /// <summary>Samples of latitude, longitude (deg) or distance (km); empty where absent.</summary>
    public ReadOnlySpan<double> Precise(SteeringChannel channel) => _columns[(int)channel]?.PreciseValues;

    /// <summary>The sensor's step in the channel's unit; 0 where the channel is absent.</summary>
    public double Resolution(SteeringChannel channel) => _columns[(int)channel]?.Resolution ?? 0;

    private void Check(SteeringColumn column)
    {
        if ((int)column.Channel >= SteeringChannels.Count) throw new ArgumentException($"channel {column.Channel} is not known");
        if (_columns[(int)column.Channel] is not null) throw new ArgumentException($"{column.Channel} comes twice");
        if (column.Channel.IsPrecise() ? column.PreciseValues is null : column.Values is null)
            throw new ArgumentException($"{column.Channel} is kept in {(column.Channel.IsPrecise() ? "double" : "single")} precision");
        if (!(column.Resolution > 0) || !double.IsFinite(column.Resolution))
            throw new ArgumentException($"{column.Channel} declares no resolution above 0");
    }
}
