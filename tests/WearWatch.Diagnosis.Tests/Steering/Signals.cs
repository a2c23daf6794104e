using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Steering;

/// <summary>Channels as functions of time, s, cut into chunks of a minute.</summary>
internal sealed class Signals(double rateHz = 10)
{
    private readonly List<(SteeringChannel Channel, Func<double, double> Value, double Step)> _channels = [];
    private readonly Random _random = new(5);

    public Signals With(SteeringChannel channel, Func<double, double> value, double step = 0.01)
    {
        _channels.Add((channel, value, step));
        return this;
    }

    public double Noise(double sd) => sd * Math.Sqrt(-2 * Math.Log(1 - _random.NextDouble())) * Math.Cos(2 * Math.PI * _random.NextDouble());

    public List<(long Sequence, SteeringColumns Columns)> Chunks(double seconds, double chunkSeconds = 60, Func<double, TorqueUnit>? unit = null) =>
        [.. Enumerable.Range(0, (int)Math.Ceiling(seconds / chunkSeconds)).Select(k => ((long)k, Chunk(k * chunkSeconds, Math.Min(chunkSeconds, seconds - k * chunkSeconds), unit?.Invoke(k * chunkSeconds) ?? TorqueUnit.NewtonMetre)))];

    private SteeringColumns Chunk(double from, double seconds, TorqueUnit unit)
    {
        var times = Enumerable.Range(0, (int)Math.Round(seconds * rateHz)).Select(i => from + i / rateHz).ToArray();
        return new(Drive.Start.AddSeconds(from), rateHz, _channels.Select(c => c.Channel.IsPrecise()
            ? SteeringColumn.Of(c.Channel, [.. times.Select(c.Value)], c.Step)
            : SteeringColumn.Of(c.Channel, [.. times.Select(t => (float)c.Value(t))], c.Step)), unit);
    }
}
