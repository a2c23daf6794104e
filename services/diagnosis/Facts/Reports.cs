namespace WearWatch.Diagnosis.Facts;

public enum Symptom { PullsLeft, PullsRight, WheelNotStraight, Shakes }

/// <summary>What a driver said; weak evidence, dated.</summary>
public sealed record DriverReport
{
    public required string VehicleId { get; init; }
    public required DateTimeOffset At { get; init; }
    public required Symptom Symptom { get; init; }
    public string? Note { get; init; }
}

/// <summary>The route a vehicle usually runs; a loop run one way round wears like a fault.</summary>
public sealed record UsualRoute
{
    public required string VehicleId { get; init; }
    public DateOnly? From { get; init; }
    public string? Route { get; init; }
    public bool Loop { get; init; }
    /// <summary>Share of turning done to the left, 0 to 1; 0.5 when balanced.</summary>
    public double? LeftTurnShare { get; init; }
    public bool Urban { get; init; }
}

/// <summary>A trailer runs behind a tractor for a while.</summary>
public sealed record Coupling
{
    public required string TrailerId { get; init; }
    public required string TractorId { get; init; }
    public required DateTimeOffset From { get; init; }
    public DateTimeOffset? To { get; init; }
}
