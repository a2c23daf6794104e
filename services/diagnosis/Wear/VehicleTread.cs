using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Wear;

/// <summary>A survey with its id.</summary>
public sealed record StoredSurvey(string SurveyId, TreadSurvey Survey);

/// <summary>Everything the gauge knows of one vehicle, in any order.</summary>
public sealed record VehicleTread
{
    public required Vehicle Vehicle { get; init; }
    public required Depot Depot { get; init; }
    public required IReadOnlyList<StoredSurvey> Surveys { get; init; }
    public IReadOnlyList<FittingRecord> Fittings { get; init; } = [];
    /// <summary>Tyres known by their number.</summary>
    public IReadOnlyList<Tyre> Tyres { get; init; } = [];
    /// <summary>When the vehicle was last aligned: wear from before that tells of angles that are no more.</summary>
    public DateTimeOffset? AdjustedAt { get; init; }
    /// <summary>Operator's limits over the built-in ones.</summary>
    public IReadOnlyList<DepthLimitFact> Limits { get; init; } = [];
}
