namespace WearWatch.Diagnosis.Facts;

public enum FittingEvent { Fitted, Removed, Moved, TurnedOnRim, Regrooved }

/// <summary>Something was done to a tyre on a position; late records replace what was inferred.</summary>
public sealed record FittingRecord
{
    public required string VehicleId { get; init; }
    public required DateTimeOffset At { get; init; }
    public required FittingEvent Event { get; init; }
    public required Position Position { get; init; }
    /// <summary>Where a moved tyre came from, on the same vehicle.</summary>
    public Position? FromPosition { get; init; }
    public string? TyreId { get; init; }
    public string? Pattern { get; init; }
    /// <summary>Depth of this tyre when new (or after regrooving), mm.</summary>
    public double? NewDepthMm { get; init; }
    public double? DistanceKm { get; init; }
    public int RetreadCount { get; init; }
    /// <summary>Part of a seasonal change of the whole vehicle.</summary>
    public bool Seasonal { get; init; }
    /// <summary>Winter tyre (snowflake marked).</summary>
    public bool Winter { get; init; }
}

/// <summary>A tyre known by its own number.</summary>
public sealed record Tyre
{
    public required string TyreId { get; init; }
    public string? Number { get; init; }
    public string? Pattern { get; init; }
    public string? Size { get; init; }
    /// <summary>mm.</summary>
    public double? NewDepthMm { get; init; }
    public int RetreadCount { get; init; }
}
