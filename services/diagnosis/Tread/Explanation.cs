using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tread;

public enum ExplanationKind
{
    AsWritten,
    /// <summary>Left and right exchanged on every axle.</summary>
    SidesSwapped,
    /// <summary>Left and right exchanged on one axle.</summary>
    AxleSidesSwapped,
    /// <summary>Two axles exchanged.</summary>
    AxlesSwapped,
    /// <summary>Counts of 1/32 inch taken for mm.</summary>
    ThirtySecondsTakenForMm,
    /// <summary>mm taken for counts of 1/32 inch.</summary>
    MmTakenForThirtySeconds,
    /// <summary>The survey belongs to another vehicle.</summary>
    OtherVehicle,
    /// <summary>This one is right and the only survey it can be compared with is the wrong one.</summary>
    ComparedSurveyWrong,
    /// <summary>One groove mistyped.</summary>
    GrooveMistyped,
    /// <summary>One tyre misread, or read at another wheel.</summary>
    TyreMisread,
    /// <summary>Two wheels of one side exchanged: the walk began at the wrong corner, or two duals were taken for each other.</summary>
    PositionsExchanged,
    /// <summary>Grooves counted from the inboard side, on the whole vehicle or on one side of it.</summary>
    GroovesReversed,
    /// <summary>One groove measured on a wear bar.</summary>
    ReadOnWearBar,
    /// <summary>Another tyre stands there, mostly a new one.</summary>
    TyreChanged,
    /// <summary>The tyre was regrooved.</summary>
    Regrooved,
    /// <summary>The tyre was turned on its rim: what was its outboard shoulder stands inboard.</summary>
    TurnedOnRim,
    /// <summary>The distance counter was replaced or reset since.</summary>
    CounterReplaced,
    /// <summary>The distance was mistyped; the depths stand.</summary>
    DistanceMistyped,
}

/// <summary>One way to explain a survey.</summary>
public sealed record Explanation(ExplanationKind Kind, int? Axle = null, int? OtherAxle = null, Position? Position = null, int? Groove = null, Position? OtherPosition = null, Side? Side = null)
{
    /// <summary>Done to the tyres themselves, not on paper; see <see cref="CanBeDoneToTyres"/>.</summary>
    public bool Moved { get; init; }

    /// <summary>What a mistyped groove was meant to read, mm, where the slip tells it.</summary>
    public double? MeantMm { get; init; }

    public static readonly Explanation AsWritten = new(ExplanationKind.AsWritten);

    /// <summary>Factor from the depth as stored to the depth as meant.</summary>
    public double Factor => Kind switch
    {
        ExplanationKind.ThirtySecondsTakenForMm => GaugeNoise.ThirtySecondInchMm,
        ExplanationKind.MmTakenForThirtySeconds => 1 / GaugeNoise.ThirtySecondInchMm,
        _ => 1,
    };

    /// <summary>The position that a reading written at <paramref name="written"/> belongs to; its own inverse.</summary>
    public Position Belongs(Position written) => Kind switch
    {
        ExplanationKind.SidesSwapped => written.Mirrored,
        ExplanationKind.AxleSidesSwapped when written.Axle == Axle => written.Mirrored,
        ExplanationKind.AxlesSwapped when written.Axle == Axle => written with { Axle = OtherAxle!.Value },
        ExplanationKind.AxlesSwapped when written.Axle == OtherAxle => written with { Axle = Axle!.Value },
        ExplanationKind.PositionsExchanged when written == Position => OtherPosition!.Value,
        ExplanationKind.PositionsExchanged when written == OtherPosition => Position!.Value,
        _ => written,
    };

    /// <summary>The grooves of a position were counted from the wrong shoulder.</summary>
    public bool Reverses(Position written) =>
        Kind == ExplanationKind.GroovesReversed && (Position is { } one ? one == written : Side is null || Side == written.Side);

    /// <summary>Something that a workshop can do to the tyres as well as a pen on paper: in walk after walk it was done to the tyres.</summary>
    public bool CanBeDoneToTyres => Kind is ExplanationKind.SidesSwapped or ExplanationKind.AxleSidesSwapped or ExplanationKind.AxlesSwapped or ExplanationKind.PositionsExchanged;

    /// <summary>The answer that gives this explanation, as a plain sentence.</summary>
    public string Answer => ExplanationWords.Answer(this);

    /// <summary>A plain sentence.</summary>
    public string Sentence => Kind switch
    {
        ExplanationKind.AsWritten => "As written.",
        ExplanationKind.SidesSwapped => "Left and right look exchanged on the whole vehicle.",
        ExplanationKind.AxleSidesSwapped => $"Left and right look exchanged on axle {Axle}.",
        ExplanationKind.AxlesSwapped => $"Axles {Axle} and {OtherAxle} look exchanged.",
        ExplanationKind.ThirtySecondsTakenForMm => "The depths look like 32nds of an inch written as mm.",
        ExplanationKind.MmTakenForThirtySeconds => "The depths look like mm written as 32nds of an inch.",
        ExplanationKind.OtherVehicle => "The depths look like another vehicle's.",
        ExplanationKind.ComparedSurveyWrong => "This survey may be right and the other one wrong.",
        ExplanationKind.GrooveMistyped => $"Groove {Groove} of {Position} looks mistyped.",
        ExplanationKind.PositionsExchanged => $"{Position} and {OtherPosition} look exchanged.",
        ExplanationKind.GroovesReversed => $"The grooves look counted from the inboard side{(Position is { } p ? $" at {p}" : Side is { } s ? $" on the {s.ToString().ToLowerInvariant()}" : "")}.",
        ExplanationKind.ReadOnWearBar => $"Groove {Groove} of {Position} looks measured on a wear bar.",
        ExplanationKind.TyreChanged => $"Another tyre seems to stand at {Position}.",
        ExplanationKind.Regrooved => $"The tyre at {Position} looks regrooved.",
        ExplanationKind.TurnedOnRim => $"The tyre at {Position} looks turned on its rim.",
        ExplanationKind.CounterReplaced => "The distance counter looks replaced.",
        ExplanationKind.DistanceMistyped => "The distance looks mistyped.",
        ExplanationKind.TyreMisread => $"{Position} does not fit its own history in this survey alone.",
        _ => Kind.ToString(),
    };
}

/// <summary>An explanation with its posterior weight, 0 to 1.</summary>
public sealed record WeighedExplanation(Explanation Explanation, double Weight);

/// <summary>What a tyre's own history leads one to expect at a survey, from the other surveys only.</summary>
/// <param name="MeanMm">Mean depth, mm; its error without that of the reading and without technicians' biases.</param>
/// <param name="EdgeMm">See <see cref="TreadShape.EdgeMm"/>.</param>
/// <param name="ShoulderMm">See <see cref="TreadShape.ShoulderMm"/>.</param>
/// <param name="Surveys">How many surveys of this fitting it rests on.</param>
public readonly record struct TyreExpectation(Estimate MeanMm, Estimate EdgeMm, Estimate ShoulderMm, int Surveys)
{
    /// <summary>Mean depth that a tyre would show had it been put on new since the survey before, mm; null where nothing is known of that.</summary>
    public Estimate? NewMm { get; init; }
}
