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
    /// <summary>Operator's settings; the depth at which tyres are changed is among them where the operator has one.</summary>
    public IReadOnlyList<OperatorSetting> Settings { get; init; } = [];

    /// <summary>The operator's own depth for taking a tyre off on a day, mm; null where none was set.</summary>
    public double? ChangeAtMm(DateOnly on) => Settings.Where(s => s.Name == SettingName.ChangeAtDepth && s.From <= on && (s.Class is null || s.Class == Vehicle.Class))
        .OrderByDescending(s => s.Class is not null).ThenByDescending(s => s.From).FirstOrDefault()?.Value;
}
