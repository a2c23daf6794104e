using WearWatch.Diagnosis.Facts;

namespace WearWatch.Storage.Facts;

/// <summary>Everything recorded of one vehicle that holds, each list by time and, at the same time, by arrival.</summary>
public sealed record VehicleFacts
{
    /// <summary>The vehicle as it is on the as-of date.</summary>
    public required Vehicle Vehicle { get; init; }
    /// <summary>Its home depot.</summary>
    public required Depot Depot { get; init; }
    /// <summary>Revision of the vehicle that these facts stand at, or later.</summary>
    public required long Revision { get; init; }
    public IReadOnlyList<Dated<TreadSurvey>> Surveys { get; init; } = [];
    /// <summary>Held and still waiting: not reckoned with, but a depth below the limit in one is shown.</summary>
    public IReadOnlyList<Dated<TreadSurvey>> HeldSurveys { get; init; } = [];
    public IReadOnlyList<Dated<FittingRecord>> Fittings { get; init; } = [];
    /// <summary>Tyres named by the fittings.</summary>
    public IReadOnlyList<Dated<Tyre>> Tyres { get; init; } = [];
    public IReadOnlyList<Dated<DriverReport>> DriverReports { get; init; } = [];
    public IReadOnlyList<Dated<WorkshopRecord>> WorkshopRecords { get; init; } = [];
    /// <summary>Usual routes, the last one in force.</summary>
    public IReadOnlyList<Dated<UsualRoute>> Routes { get; init; } = [];
    /// <summary>Couplings as trailer or as tractor.</summary>
    public IReadOnlyList<Dated<Coupling>> Couplings { get; init; } = [];
    /// <summary>Decisions on this vehicle.</summary>
    public IReadOnlyList<Dated<Decision>> Decisions { get; init; } = [];
    /// <summary>What people have answered about surveys; surveys and fittings here are read that way.</summary>
    public IReadOnlyList<SurveyAnswered> Answers { get; init; } = [];
    /// <summary>Time of the newest thing seen, measured or done; null where nothing has happened yet.</summary>
    public DateTimeOffset? FactsThrough { get; init; }

    public UsualRoute? Route => Routes.Count > 0 ? Routes[^1].Body : null;
}

/// <summary>What a depot has set, by date: the latest that is not after the day in question applies.</summary>
public sealed record DepotSettings
{
    public required Depot Depot { get; init; }
    public required long Revision { get; init; }
    public IReadOnlyList<Dated<Price>> Prices { get; init; } = [];
    public IReadOnlyList<Dated<DepthLimitFact>> Limits { get; init; } = [];
    public IReadOnlyList<Dated<ToleranceFact>> Tolerances { get; init; } = [];
    public IReadOnlyList<Dated<OperatorSetting>> Settings { get; init; } = [];
    /// <summary>All decisions of the depot, on vehicles or not.</summary>
    public IReadOnlyList<Dated<Decision>> Decisions { get; init; } = [];
}
