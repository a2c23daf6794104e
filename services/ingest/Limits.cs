using WearWatch.Contracts.V1;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Ingest;

/// <summary>Every limit at the door, in one place. What the contract states, it states from here.</summary>
internal static class Limits
{
    public const int MessageBytes = 4 * 1024 * 1024;
    public const int FactsPerCall = 500;
    public const int IdLength = 64;
    public const int TextLength = 500;
    public const int AxlesPerVehicle = Diagnosis.Facts.Position.MaxAxle;
    public const int UnitsPerVehicle = 16;
    public const int TyresPerSurvey = AxlesPerVehicle * 4;
    public const int DepthsPerTyre = 96;
    public const int Groove = 24;
    public const int AnglesPerRecord = 100;
    public const int PageDefault = 100;
    public const int PageMost = 500;

    /// <summary>mm; a deeper tread does not exist on a road tyre.</summary>
    public const double DepthMm = 40;
    /// <summary>km.</summary>
    public const double DistanceKm = 5_000_000;
    public const double AngleDeg = 30;
    public const double PressureKpa = 2_000;
    public const double Money = 10_000_000;

    /// <summary>Earliest time that is believed.</summary>
    public static readonly DateTimeOffset Earliest = new(1990, 1, 1, 0, 0, 0, TimeSpan.Zero);
    /// <summary>How far a sender's clock may run ahead.</summary>
    public static readonly TimeSpan ClockAhead = TimeSpan.FromDays(1);
    /// <summary>Latest date for plans and prices to come.</summary>
    public static readonly DateOnly LatestDate = new(2100, 1, 1);

    public const double RateHzLeast = 1, RateHzMost = 200;
    public const int SamplesPerChunk = 60_000;
    /// <summary>What is kept of a refused chunk, samples a column and columns.</summary>
    public const int ExcerptSamples = 100, ExcerptColumns = 32;
    /// <summary>Largest number of a raw sensor, in its own steps.</summary>
    public const double RawMost = 1e12;
    /// <summary>Chunks being encoded or waiting for their commit, a stream; the sender waits beyond that.</summary>
    public const int ChunksInFlight = 8;
    public const int ChunksPerCommit = 32;
    /// <summary>How long a commit waits for more chunks.</summary>
    public static readonly TimeSpan CommitWait = TimeSpan.FromMilliseconds(50);

    /// <summary>Steps of a sensor over its channel's range that a stored sample can hold.</summary>
    public const double StepsPerChannel = 1e12;
}

/// <summary>One unit a channel may come in, and what makes it the stored one.</summary>
internal sealed record ChannelUnitRule(ChannelUnit Unit, double Factor);

/// <summary>What a channel may hold; bounds in the stored unit.</summary>
internal sealed record ChannelRule(Channel Channel, double Least, double Most, params ChannelUnitRule[] Units)
{
    private static readonly Dictionary<Channel, ChannelRule> ByChannel = ((ChannelRule[])[
        new(Channel.Speed, 0, 300, new(ChannelUnit.KmPerHour, 1), new(ChannelUnit.MilesPerHour, Measures.KmPerMile)),
        new(Channel.SteeringWheelAngle, -2_000, 2_000, new ChannelUnitRule(ChannelUnit.Degrees, 1)),
        new(Channel.DriverTorque, -200, 200, new(ChannelUnit.NewtonMetres, 1), new(ChannelUnit.Raw, 1)),
        new(Channel.AssistTorque, -500, 500, new(ChannelUnit.NewtonMetres, 1), new(ChannelUnit.Raw, 1)),
        new(Channel.YawRate, -500, 500, new ChannelUnitRule(ChannelUnit.DegreesPerSecond, 1)),
        new(Channel.LateralAcceleration, -50, 50, new ChannelUnitRule(ChannelUnit.MetresPerSecondSquared, 1)),
        new(Channel.LongitudinalAcceleration, -50, 50, new ChannelUnitRule(ChannelUnit.MetresPerSecondSquared, 1)),
        new(Channel.Brake, 0, 1, new ChannelUnitRule(ChannelUnit.One, 1)),
        new(Channel.DriveTorque, -50_000, 50_000, new ChannelUnitRule(ChannelUnit.NewtonMetres, 1)),
        new(Channel.Latitude, -90, 90, new ChannelUnitRule(ChannelUnit.Degrees, 1)),
        new(Channel.Longitude, -180, 180, new ChannelUnitRule(ChannelUnit.Degrees, 1)),
        new(Channel.Distance, 0, Limits.DistanceKm, new(ChannelUnit.Km, 1), new(ChannelUnit.Miles, Measures.KmPerMile)),
        new(Channel.Load, 0, 100_000, new ChannelUnitRule(ChannelUnit.Kilograms, 1)),
        new(Channel.LaneKeeping, 0, 1, new ChannelUnitRule(ChannelUnit.One, 1)),
    ]).ToDictionary(rule => rule.Channel);

    public static ChannelRule? Of(Channel channel) => ByChannel.GetValueOrDefault(channel);

    public ChannelUnitRule? Unit(ChannelUnit unit) => Units.FirstOrDefault(u => u.Unit == unit);

    /// <summary>The channel as the chunk codec stores it.</summary>
    public SteeringChannel Stored { get; } = Enum.Parse<SteeringChannel>(Channel.ToString());

    public bool IsPrecise => Channel is Channel.Latitude or Channel.Longitude or Channel.Distance;
}
