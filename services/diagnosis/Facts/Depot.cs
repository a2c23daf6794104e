namespace WearWatch.Diagnosis.Facts;

/// <summary>Which side of the road traffic keeps to; the road falls to that side.</summary>
public enum TrafficSide { Right, Left }

public sealed record Depot
{
    public required string DepotId { get; init; }
    public string? Name { get; init; }
    public required TrafficSide TrafficSide { get; init; }
    /// <summary>ISO 3166 code of the law that applies, such as <c>DE</c> or <c>US</c>.</summary>
    public required string Jurisdiction { get; init; }
    /// <summary>IANA time zone.</summary>
    public required string TimeZone { get; init; }
    /// <summary>ISO 4217 code.</summary>
    public required string Currency { get; init; }
}
