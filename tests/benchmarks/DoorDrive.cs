using Google.Protobuf.WellKnownTypes;
using WearWatch.Contracts.V1;

namespace WearWatch.Benchmarks;

/// <summary>
/// An hour of one van's country road at 100 Hz, eight channels at the steps usual for such sensors (from memory): slow wander of speed
/// and bends, what follows from them in yaw, lateral acceleration and position, and a noise of a few steps on each sensor.
/// </summary>
internal sealed class DoorDrive
{
    public const double RateHz = 100;
    public const int Samples = 360_000;
    public const string Depot = "bench";

    /// <summary>Mean Earth radius 6 371.0 km (IUGG) times π/180.</summary>
    private const double MetresPerDegree = 111_195;
    private const double WheelbaseM = 3.6, SteeringRatio = 16;

    public static readonly DateTimeOffset Start = new(2026, 3, 2, 6, 0, 0, TimeSpan.Zero);

    /// <summary>The six channels of single precision, in this order, then latitude and longitude.</summary>
    public static readonly ChannelInfo[] Channels =
    [
        new() { Channel = Channel.Speed, Unit = ChannelUnit.KmPerHour, Resolution = 0.1 },
        new() { Channel = Channel.SteeringWheelAngle, Unit = ChannelUnit.Degrees, Resolution = 0.1 },
        new() { Channel = Channel.DriverTorque, Unit = ChannelUnit.NewtonMetres, Resolution = 0.01 },
        new() { Channel = Channel.YawRate, Unit = ChannelUnit.DegreesPerSecond, Resolution = 0.01 },
        new() { Channel = Channel.LateralAcceleration, Unit = ChannelUnit.MetresPerSecondSquared, Resolution = 0.01 },
        new() { Channel = Channel.LongitudinalAcceleration, Unit = ChannelUnit.MetresPerSecondSquared, Resolution = 0.01 },
        new() { Channel = Channel.Latitude, Unit = ChannelUnit.Degrees, Resolution = 1e-6 },
        new() { Channel = Channel.Longitude, Unit = ChannelUnit.Degrees, Resolution = 1e-6 },
    ];

    private DoorDrive(int number) => VehicleId = $"bench-van-{number}";

    public string VehicleId { get; }

    public float[][] Values { get; } = [.. Enumerable.Range(0, Channels.Length - 2).Select(_ => new float[Samples])];

    public double[][] Position { get; } = [new double[Samples], new double[Samples]];

    /// <param name="number">Seeds the drive and names its vehicle.</param>
    public static DoorDrive Make(int number)
    {
        var drive = new DoorDrive(number);
        var random = new Random(number);
        double Normal() => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());
        // First-order wander of unit variance; seconds is its time constant.
        double Wander(double last, double seconds)
        {
            var keep = Math.Exp(-1 / (RateHz * seconds));
            return keep * last + Math.Sqrt(1 - keep * keep) * Normal();
        }
        var (pace, bend, grip, pedal, heading, north, east) = (0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0);
        for (var i = 0; i < Samples; i++)
        {
            (pace, bend, grip, pedal) = (Wander(pace, 60), Wander(bend, 4), Wander(grip, 1), Wander(pedal, 5));
            var (speedKmH, angleDeg) = (Math.Max(0, 75 + 8 * pace), 8 * bend);
            var metresPerSecond = speedKmH / 3.6;
            var yawDegPerS = metresPerSecond * angleDeg / SteeringRatio / WheelbaseM; // rolling without slip, small angles
            var yawRadPerS = yawDegPerS * Math.PI / 180;
            heading += yawRadPerS / RateHz;
            north += metresPerSecond * Math.Cos(heading) / RateHz;
            east -= metresPerSecond * Math.Sin(heading) / RateHz;
            drive.Set(i, speedKmH + 0.05 * Normal(), angleDeg + 0.05 * Normal(), 0.15 * angleDeg + 0.2 * grip + 0.03 * Normal(),
                yawDegPerS + 0.05 * Normal(), metresPerSecond * yawRadPerS + 0.05 * Normal(), 0.3 * pedal + 0.05 * Normal());
            var latitude = 48 + north / MetresPerDegree;
            drive.Position[0][i] = Step(latitude, 6);
            drive.Position[1][i] = Step(11 + east / (MetresPerDegree * Math.Cos(latitude * Math.PI / 180)), 7);
        }
        return drive;
    }

    public StreamSteeringRequest Header(string streamId) => new()
    {
        Header = new StreamHeader { StreamId = streamId, DepotId = Depot, VehicleId = VehicleId, RateHz = RateHz, Channels = { Channels } },
    };

    /// <summary>The whole drive cut into messages of so many samples each.</summary>
    public List<StreamSteeringRequest> Chunks(int samples)
    {
        var messages = new List<StreamSteeringRequest>(Samples / samples);
        for (var from = 0; from < Samples; from += samples)
        {
            var chunk = new SteeringChunk { Sequence = messages.Count + 1, Start = Start.AddSeconds(from / RateHz).ToTimestamp() };
            for (var k = 0; k < Channels.Length; k++)
            {
                var column = new Column { Channel = Channels[k].Channel };
                if (k < Values.Length) column.Values.AddRange(new ArraySegment<float>(Values[k], from, samples));
                else column.PreciseValues.AddRange(new ArraySegment<double>(Position[k - Values.Length], from, samples));
                chunk.Columns.Add(column);
            }
            messages.Add(new StreamSteeringRequest { Chunk = chunk });
        }
        return messages;
    }

    private void Set(int i, params ReadOnlySpan<double> values)
    {
        for (var k = 0; k < values.Length; k++) Values[k][i] = (float)Step(values[k], k);
    }

    /// <summary>The nearest whole number of the channel's steps.</summary>
    private static double Step(double value, int channel) => Math.Round(value / Channels[channel].Resolution) * Channels[channel].Resolution;
}
