using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Changes;

/// <summary>What changed.</summary>
public enum ChangeQuantity
{
    /// <summary>Torque that keeps the vehicle straight on a flat road, N·m at the wheel, + where the vehicle pulls right.</summary>
    SteeringPull,
    /// <summary>Steering-wheel angle when travelling straight, deg, + left.</summary>
    OffCentreAngle,
    /// <summary>Loss of tread of an axle, as a share of the fleet's normal rate.</summary>
    WearRate,
}

public enum ChangeForm { Sudden, Drift }

/// <summary>Something recorded that may change how a vehicle runs.</summary>
public enum EventKind { KerbStrike, SteerTyres, OtherTyres, Workshop }

/// <summary>One such record, by its time and id; the words say what it was.</summary>
/// <param name="Kind">What kind of thing.</param>
/// <param name="At">UTC.</param>
/// <param name="Words">As it is told: "steer tyres fitted".</param>
/// <param name="Rests">Id of the record.</param>
/// <param name="TimeKnown">False where only the day is known: it may have been at any hour of that day (UTC).</param>
public sealed record ChangeEvent(EventKind Kind, DateTimeOffset At, string Words, string Rests, bool TimeKnown = true);

/// <summary>One change of one quantity with its date range, its size and what was recorded then.</summary>
public sealed record DatedChange
{
    public required ChangeQuantity Quantity { get; init; }
    public required ChangeForm Form { get; init; }
    /// <summary>The axle, for wear.</summary>
    public int? Axle { get; init; }
    /// <summary>90 % credible range of a sudden change; first and last reading of a drift.</summary>
    public required DateTimeOffset From { get; init; }
    public required DateTimeOffset To { get; init; }
    /// <summary>As probably before as after; the middle of a drift.</summary>
    public required DateTimeOffset Likely { get; init; }
    /// <summary>After less before, in the quantity's unit.</summary>
    public required Estimate Size { get; init; }
    public required double Before { get; init; }
    public required double After { get; init; }
    /// <summary>Trips or surveys that the levels before and after rest on.</summary>
    public required int TripsBefore { get; init; }
    public required int TripsAfter { get; init; }
    /// <summary>Recorded in or near the range, nearest first.</summary>
    public IReadOnlyList<ChangeEvent> Happened { get; init; } = [];
    /// <summary>Raised between two fleet fits by the running charts; the next fit dates it or drops it.</summary>
    public bool Provisional { get; init; }
    /// <summary>Ids of the readings nearest to it on either side.</summary>
    public IReadOnlyList<string> Rests { get; init; } = [];
}
