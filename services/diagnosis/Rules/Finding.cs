using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Rules;

public enum FindingKind
{
    SteeringPull, OffCentreWheel, Feathering, OneEdgeWear, AxleSkew, CentreWear, ShoulderWear, Cupping, DiagonalWear,
    FastWear, PressureOff, DepthGap, BelowLimit, UnsafeTyre, Unusual,
    SteeringPullChange, OffCentreChange, WearRateChange,
    HeelToe, FlatSpot, RibWear, BrakeDrag, UnevenReturn, SteeringBinds, WheelHop, OneWayDuty,
}

/// <summary>One condition on one axle or wheel, with its evidence.</summary>
public sealed record Finding
{
    public required FindingKind Kind { get; init; }
    public int? Axle { get; init; }
    public Side? Side { get; init; }
    public Dual? Dual { get; init; }
    /// <summary>One plain sentence with the figure, its unit and its interval.</summary>
    public required string Sentence { get; init; }
    public required IReadOnlyList<Evidence> EvidenceFor { get; init; }
    public IReadOnlyList<Evidence> EvidenceAgainst { get; init; } = [];
    /// <summary>What else could explain it and what would tell them apart.</summary>
    public IReadOnlyList<Confounder> Confounders { get; init; } = [];
    /// <summary>Causes to consider, most likely first.</summary>
    public IReadOnlyList<Quantity> Causes { get; init; } = [];
    public required string FirstCheck { get; init; }
    /// <summary>Whether an alignment mends it.</summary>
    public required bool AlignmentMends { get; init; }
    public string? Caution { get; init; }
    /// <summary>Strength of the evidence in standard errors; orders findings.</summary>
    public required double Strength { get; init; }
}

/// <summary>A statement and what it rests on.</summary>
/// <param name="Statement">Plain words with figures.</param>
/// <param name="Rests">Ids of surveys, runs ("stream/sequence"), reports or records.</param>
public sealed record Evidence(string Statement, IReadOnlyList<string> Rests);

public sealed record Confounder(string What, string WouldTell);
