using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Roads;

/// <summary>What the steering signals alone say of one vehicle, the road's share removed. Null where not possible.</summary>
public sealed record SteeringFigures
{
    /// <summary>Days before the as-of date that tell how a vehicle steers now.</summary>
    public const int PresentDays = 42;

    public required string VehicleId { get; init; }
    /// <summary>Torque that keeps the vehicle straight on a flat road, N·m at the wheel; positive: the vehicle pulls right.</summary>
    public Estimate? SteeringPullNm { get; init; }
    /// <summary>Steering-wheel angle when travelling straight on a flat road, deg, + left.</summary>
    public Estimate? OffCentreDeg { get; init; }
    /// <summary>The same two where they stand at the vehicle's last trip, their wandering followed; null with them.</summary>
    public Estimate? SteeringPullLatestNm { get; init; }
    public Estimate? OffCentreLatestDeg { get; init; }
    /// <summary>Steering pull now less what it was before the last weeks, N·m; a sensor's zero does not move, a bent arm does.</summary>
    public Estimate? SteeringPullChangeNm { get; init; }
    /// <summary>Off-centre angle now less what it was before the last weeks, deg.</summary>
    public Estimate? OffCentreChangeDeg { get; init; }
    /// <summary>Age of the oldest straight run that the changes are counted from, days.</summary>
    public double? EarliestDaysAgo { get; init; }
    /// <summary>Extra steering pull while braking over coasting, N·m.</summary>
    public Estimate? BrakePullNm { get; init; }
    /// <summary>Extra steering pull under drive over coasting, N·m.</summary>
    public Estimate? DrivePullNm { get; init; }
    /// <summary>Bias of the bank reading, sine: the lateral accelerometer's zero over g.</summary>
    public Estimate? BankReadingBias { get; init; }
    /// <summary>What one unit of the bank's sine brings this vehicle, N·m and deg: its class's gain and what its own runs say beyond; null with the figure.</summary>
    public Estimate? PullPerSineNm { get; init; }
    public Estimate? OffCentrePerSineDeg { get; init; }
    /// <summary>Mean sine of the bank under the runs that the pull and the off-centre angle rest on, + left side higher; 0 without.</summary>
    public double PullMeanBank { get; init; }
    public double OffCentreMeanBank { get; init; }
    /// <summary>Standard error of the mean bank of the vehicle's road network, sine; it moves all vehicles of that network alike.</summary>
    public double? RoadLevelError { get; init; }
    public required int Runs { get; init; }
    /// <summary>Straight driving in all, s.</summary>
    public required double Seconds { get; init; }
    /// <summary>Torque is torsion bar plus assist; without assist the pull is a lower bound and downgraded.</summary>
    public bool TorqueIncludesAssist { get; init; }
    /// <summary>How the road's share was removed: by cells shared with other vehicles, the vehicle's own bank reading, or the usual crown of the traffic side.</summary>
    public required RoadShare RoadShare { get; init; }
    /// <summary>Runs that carry most weight, "stream/sequence", the evidence.</summary>
    public IReadOnlyList<string> EvidenceRuns { get; init; } = [];
    /// <summary>What was not possible and which channel would make it so.</summary>
    public IReadOnlyList<string> NotPossible { get; init; } = [];
}

public enum RoadShare { SharedCells, OwnBankReading, UsualCrown }
