using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// What the gauge alone says of one position: depth, rate and distance left of the tyre now on it, and how the place wears
/// its tyres (rate ratio, edges, rubs), whichever tyre stood there. Whatever cannot be known is null, never zero.
/// "Beyond normal" means beyond the fleet's mean for the same class, axle, kind of position and side of the crowned road.
/// </summary>
public sealed record TyreFigures
{
    public required Position Position { get; init; }
    public string? TyreId { get; init; }
    public string? Pattern { get; init; }
    public double? NewDepthMm { get; init; }
    /// <summary>Surveys that the figures rest on, oldest first: of this tyre and of those that stood here shortly before.</summary>
    public IReadOnlyList<string> SurveyIds { get; init; } = [];

    /// <summary>Mean loss of depth, mm per 1000 km.</summary>
    public Estimate? RateMmPer1000Km { get; init; }
    /// <summary>True where the rate is mostly the fleet's, for want of readings of its own.</summary>
    public bool RateBorrowed { get; init; }
    /// <summary>The fleet's rate for the same class, axle and kind of position, mm per 1000 km.</summary>
    public double? NormalRateMmPer1000Km { get; init; }
    /// <summary>ln(rate at this place ÷ fleet's normal rate), from this tyre and those that stood here shortly before.</summary>
    public Estimate? LogRateRatio { get; init; }
    /// <summary>Loss at the outboard shoulder less loss at the inboard shoulder beyond normal, mm per 1000 km; positive when the outboard shoulder wears faster.</summary>
    public Estimate? EdgeSlopeMmPer1000Km { get; init; }
    /// <summary>Loss at the shoulders less loss at the centre beyond normal, mm per 1000 km; positive when the shoulders wear faster.</summary>
    public Estimate? ShoulderMmPer1000Km { get; init; }
    /// <summary>Spread of depth round the circumference at the last survey, standard deviation in mm beyond gauge noise.</summary>
    public Estimate? RoundVariationMm { get; init; }
    /// <summary>Step of the rib edges beyond normal, mm; positive when the sharp edge stands inboard (that wheel ran toe-in).</summary>
    public Estimate? FeatherMm { get; init; }
    /// <summary>Hand rubs on this fitting that caught moving outward (sharp edge inboard, toe-in).</summary>
    public int RubsCatchingOutward { get; init; }
    /// <summary>Hand rubs on this fitting that caught moving inward (sharp edge outboard, toe-out).</summary>
    public int RubsCatchingInward { get; init; }
    public int RubsCatchingNeither { get; init; }
    /// <summary>Step of the rib edges that the rubs speak for, by what each technician's hand is worth, mm; null where only the counts are known.</summary>
    public Estimate? FeltMm { get; init; }
    /// <summary>(measured − set) ÷ set pressure.</summary>
    public Estimate? PressureShare { get; init; }
    /// <summary>What was seen on the tyre at its last survey.</summary>
    public IReadOnlyList<Seen> Seen { get; init; } = [];

    /// <summary>Least depth over the band the law requires, mm, at the last survey.</summary>
    public Estimate? RemainingMm { get; init; }
    /// <summary>Groove that sets <see cref="RemainingMm"/>, counted from the outboard side; 0 when one depth stands for the tyre.</summary>
    public int? GoverningGroove { get; init; }
    /// <summary>Legal limit that applies, mm.</summary>
    public double? LimitMm { get; init; }
    /// <summary>Where the limit comes from, with its date.</summary>
    public string? LimitSource { get; init; }
    /// <summary>Distance from the last survey to the limit at the governing groove, km, 90 %.</summary>
    public Interval? RemainingKm { get; init; }
    /// <summary>The operator's own depth for taking a tyre off, mm; null where none was set.</summary>
    public double? ChangeAtMm { get; init; }
    /// <summary>Distance from the last survey to that depth at the groove that reaches it first, km, 90 %.</summary>
    public Interval? ToChangeKm { get; init; }
    /// <summary>The tread across at the last survey, from the outboard side.</summary>
    public IReadOnlyList<GrooveMean> Across { get; init; } = [];
    /// <summary>Depth at the governing groove at each survey of the tyre now on, oldest first.</summary>
    public IReadOnlyList<WearPoint> Points { get; init; } = [];
}

/// <summary>One survey on a tyre's wear line.</summary>
/// <param name="Km">Running distance, km.</param>
/// <param name="DepthMm">Depth, mm, reader's bias taken off.</param>
public readonly record struct WearPoint(double Km, double DepthMm);
