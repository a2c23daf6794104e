namespace WearWatch.Diagnosis.Facts;

/// <summary>Why the vehicle stood on the measuring bench; routine checks are unbiased, suspects are not.</summary>
public enum SentBecause { Unknown, Routine, Suspected, AfterRepair, Listed }

public enum WorkshopResult { Unknown, InOrder, Adjusted, CouldNotAdjust, PartsNeeded }

/// <summary>What came back from the workshop, as much as the paper says.</summary>
public sealed record WorkshopRecord
{
    public required string VehicleId { get; init; }
    public required DateTimeOffset At { get; init; }
    public SentBecause SentBecause { get; init; }
    public WorkshopResult Result { get; init; }
    public IReadOnlyList<MeasuredAngle> Angles { get; init; } = [];
    public double? DistanceKm { get; init; }
    public decimal? Cost { get; init; }
    public string? Note { get; init; }
}

/// <summary>One angle before and after the work, deg; toe given in mm without a reference diameter is kept as written instead.</summary>
public sealed record MeasuredAngle
{
    public required Quantity Quantity { get; init; }
    public int? Axle { get; init; }
    public Side? Side { get; init; }
    public double? BeforeDeg { get; init; }
    public double? AfterDeg { get; init; }
    public string? AsWritten { get; init; }
}
