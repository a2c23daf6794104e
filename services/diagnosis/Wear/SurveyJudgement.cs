using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>What is made of one survey. A correction is only ever used together with this record of it.</summary>
public sealed record SurveyJudgement
{
    public required string SurveyId { get; init; }
    /// <summary>Explanations of the survey as a whole, likeliest first; weights sum to 1.</summary>
    public required IReadOnlyList<WeighedExplanation> Explanations { get; init; }
    /// <summary>Single tyres or grooves that do not fit, with the probability of that.</summary>
    public IReadOnlyList<WeighedExplanation> Odd { get; init; } = [];
    /// <summary>The explanation the figures use.</summary>
    public required Explanation Used { get; init; }
    /// <summary>Weight of the survey in the figures, 0 to 1; 1 when what is used is clear.</summary>
    public required double Weight { get; init; }
    public bool Corrected => Used.Kind != ExplanationKind.AsWritten;
}

public enum InferredEvent { Replaced, Moved, TurnedOnRim }

/// <summary>Something that seems to have been done to a tyre without a record; shown as such, and replaced by a late record.</summary>
public sealed record InferredFitting
{
    public required string VehicleId { get; init; }
    public required Position Position { get; init; }
    public required InferredEvent Event { get; init; }
    /// <summary>Where the tyre seems to have come from.</summary>
    public Position? FromPosition { get; init; }
    /// <summary>Last survey before and first after.</summary>
    public required DateTimeOffset After { get; init; }
    public required DateTimeOffset Before { get; init; }
    /// <summary>0 to 1.</summary>
    public required double Probability { get; init; }
    public required string Sentence { get; init; }
}
