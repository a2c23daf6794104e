using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Steering;

/// <summary>A stretch of driving with known truth, sampled into columns. Left-positive throughout.</summary>
internal sealed class Drive(double rateHz = 10, int seed = 1)
{
    public static readonly DateTimeOffset Start = new(2026, 3, 2, 6, 0, 0, TimeSpan.Zero);

    private readonly Random _random = new(seed);
    private readonly Dictionary<SteeringChannel, List<double>> _samples = Enum.GetValues<SteeringChannel>().ToDictionary(c => c, _ => new List<double>());
    private double _north;

    public double Torque { get; init; } = 0.5;
    public double Assist { get; init; } = 1.0;
    public double Angle { get; init; } = 2.0;
    public double Bank { get; init; } = 0.02;
    public double YawBias { get; init; } = 0.2;
    public double Noise { get; init; } = 1;
    /// <summary>+1, or −1 for the mirror image; the same noise is mirrored too.</summary>
    public double Hand { get; init; } = 1;

    public Drive Stand(double seconds) => Go(seconds, 0, 0);
    public Drive Straight(double seconds, double kmH = 90, double slope = 0, bool brake = false, bool lane = false, double torqueFactor = 1) =>
        Go(seconds, kmH, 0, slope, brake, lane, torqueFactor);

    public Drive Turn(double seconds, double yawDegS, double kmH = 40) => Go(seconds, kmH, yawDegS);

    private Drive Go(double seconds, double kmH, double yaw, double slope = 0, bool brake = false, bool lane = false, double torqueFactor = 1)
    {
        for (var i = 0; i < (int)Math.Round(seconds * rateHz); i++)
        {
            var v = kmH / 3.6 + slope * i / rateHz;
            _north += v / rateHz;
            Add(SteeringChannel.Speed, v * 3.6);
            Add(SteeringChannel.SteeringWheelAngle, Hand * (Angle + (v > 1 ? 16 * 3.6 / v * yaw : 0) + Wobble(0.1)));
            Add(SteeringChannel.DriverTorque, Hand * (torqueFactor * Torque + Wobble(0.1)));
            Add(SteeringChannel.AssistTorque, Hand * (Assist + Wobble(0.1)));
            Add(SteeringChannel.YawRate, Hand * (yaw + YawBias + Wobble(0.05)));
            Add(SteeringChannel.LateralAcceleration, Hand * (v * yaw * Math.PI / 180 + SteeringEquations.Gravity * Bank + Wobble(0.02)));
            Add(SteeringChannel.Brake, brake ? 1 : 0);
            Add(SteeringChannel.LaneKeeping, lane ? 1 : 0);
            Add(SteeringChannel.Latitude, 50 + _north / 111_195);
            Add(SteeringChannel.Longitude, 8);
        }
        return this;
    }

    private void Add(SteeringChannel channel, double value) => _samples[channel].Add(value);

    private double Wobble(double sd) => Noise * sd * Math.Sqrt(-2 * Math.Log(1 - _random.NextDouble())) * Math.Cos(2 * Math.PI * _random.NextDouble());

    public IReadOnlyList<(long, SteeringColumns)> Chunks(double chunkSeconds = 60, TorqueUnit unit = TorqueUnit.NewtonMetre, params SteeringChannel[] without)
    {
        var count = _samples[SteeringChannel.Speed].Count;
        var size = (int)Math.Round(chunkSeconds * rateHz);
        return Enumerable.Range(0, (count + size - 1) / size).Select(k => ((long)k, Columns(k * size, Math.Min(size, count - k * size), unit, without))).ToList();
    }

    private SteeringColumns Columns(int from, int count, TorqueUnit unit, SteeringChannel[] without) =>
        new(Start.AddSeconds(from / rateHz), rateHz, _samples.Where(s => s.Value.Count > 0 && !without.Contains(s.Key)).Select(s => s.Key.IsPrecise()
            ? SteeringColumn.Of(s.Key, s.Value.GetRange(from, count).ToArray(), 1e-7)
            : SteeringColumn.Of(s.Key, s.Value.GetRange(from, count).Select(x => (float)x).ToArray(), 0.01)), unit);
}
