namespace WearWatch.Diagnosis.Facts;

public enum DistanceSource { None, Odometer, HubCounter }

/// <summary>What a hand feels across the tread: inward catching on outward-facing edges and the reverse.</summary>
public enum HandRub
{
    NotTaken,
    /// <summary>The hand moving outward catches: sharp edges stand inboard (toe-in side of the story).</summary>
    CatchesOutward,
    /// <summary>The hand moving inward catches: sharp edges stand outboard (toe-out side of the story).</summary>
    CatchesInward,
    Neither,
}

public enum Seen
{
    Cord, Cut, Bulge, Cupped, FlatSpot, HeelToe, Unsafe,
    /// <summary>Ribs that do not lie side by side stand lower than the rest.</summary>
    RibDepression,
    /// <summary>A narrow channel worn along the edges of the ribs.</summary>
    RiverWear,
}

/// <summary>All readings of one vehicle on one walk round it, finished or not. Depths in mm, whatever the gauge showed.</summary>
public sealed record TreadSurvey
{
    public required string VehicleId { get; init; }
    /// <summary>UTC.</summary>
    public required DateTimeOffset At { get; init; }
    public string? Technician { get; init; }
    public string? Gauge { get; init; }
    /// <summary>Smallest step of the gauge, mm.</summary>
    public double ResolutionMm { get; init; } = 0.1;
    /// <summary>Depot where it was measured.</summary>
    public string? Place { get; init; }
    /// <summary>Distance the vehicle has run, km; absent when none was read.</summary>
    public double? DistanceKm { get; init; }
    public DistanceSource DistanceSource { get; init; }
    /// <summary>The counter was replaced since the survey before: its distance starts anew.</summary>
    public bool CounterReplaced { get; init; }
    public bool Finished { get; init; } = true;
    /// <summary>Someone has said what it means; it is read as it now stands and not explained any further.</summary>
    public bool Confirmed { get; init; }
    public required IReadOnlyList<TyreReadings> Tyres { get; init; }
}

/// <summary>What one walk learnt of one tyre.</summary>
public sealed record TyreReadings
{
    public required Position Position { get; init; }
    /// <summary>Depths, mm, any number of places round the tyre; one rounded depth (groove 0) is accepted.</summary>
    public IReadOnlyList<GrooveDepth> Depths { get; init; } = [];
    public double? PressureKpa { get; init; }
    /// <summary>Pressure taken on a warm tyre.</summary>
    public bool PressureWarm { get; init; }
    public HandRub HandRub { get; init; }
    public IReadOnlyList<Seen> Seen { get; init; } = [];
    /// <summary>Why the tyre was not reached, if it was not.</summary>
    public string? NotReached { get; init; }
}

/// <summary>One depth.</summary>
/// <param name="Groove">Counted from the outboard side, 1 to 24; 0 when one depth stands for the whole tyre.</param>
/// <param name="DepthMm">Depth, mm.</param>
/// <param name="ClockDeg">Place round the tyre, deg, where noted.</param>
/// <param name="OutboardEdgeMm">Height of the rib edge outboard of the groove less that inboard of it, mm, where measured.</param>
public sealed record GrooveDepth(int Groove, double DepthMm, double? ClockDeg = null, double? OutboardEdgeMm = null);
