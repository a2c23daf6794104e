namespace WearWatch.Diagnosis.Facts;

public enum PriceKind { AlignmentJob, Fuel, Energy, Tyre, BayHour }

/// <summary>A dated price; the latest that is not in the future applies.</summary>
public sealed record Price
{
    public required PriceKind Kind { get; init; }
    public VehicleClass? Class { get; init; }
    /// <summary>Per job, per litre, per kWh, per tyre or per hour.</summary>
    public required decimal Amount { get; init; }
    /// <summary>ISO 4217.</summary>
    public required string Currency { get; init; }
    public required DateOnly From { get; init; }
}

/// <summary>A legal limit as the operator enters it over the built-in table.</summary>
public sealed record DepthLimitFact
{
    public required string Jurisdiction { get; init; }
    public VehicleClass? Class { get; init; }
    /// <summary>1 for the steer axle; absent for all.</summary>
    public int? Axle { get; init; }
    public bool WinterOnly { get; init; }
    /// <summary>mm.</summary>
    public required double LimitMm { get; init; }
    public required DateOnly From { get; init; }
    public required string Source { get; init; }
}

/// <summary>A tolerance, ± in the quantity's unit, by class; replaces the built-in one from a date on.</summary>
public sealed record ToleranceFact
{
    public required VehicleClass Class { get; init; }
    public required Quantity Quantity { get; init; }
    public required double PlusMinus { get; init; }
    public required DateOnly From { get; init; }
}

/// <summary>An operator's setting for a depot: change-at depth, horizon, pull a driver must not hold against.</summary>
public sealed record OperatorSetting
{
    public required SettingName Name { get; init; }
    public VehicleClass? Class { get; init; }
    public required double Value { get; init; }
    public required DateOnly From { get; init; }
}

public enum SettingName
{
    /// <summary>mm.</summary>
    ChangeAtDepth,
    /// <summary>Weeks over which a job must pay.</summary>
    HorizonWeeks,
    /// <summary>N·m at the wheel beyond which a vehicle is listed whatever the money says.</summary>
    HoldingTorqueBound,
}

public enum DecisionKind { Snoozed, Dismissed, Answered, ShownTo }

/// <summary>What a person decided about a vehicle, a finding or a question.</summary>
public sealed record Decision
{
    public required DecisionKind Kind { get; init; }
    public string? VehicleId { get; init; }
    /// <summary>Finding or fact that the decision is about.</summary>
    public string? About { get; init; }
    public required DateTimeOffset At { get; init; }
    public DateOnly? Until { get; init; }
    public string? Answer { get; init; }
    public string? Who { get; init; }
}
