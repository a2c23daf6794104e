using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Steering;

public enum RunMode { Coast, Drive, Brake }

/// <summary>One stretch of straight driving, reduced to a row. What was not measured is null.</summary>
public sealed record StraightRun
{
    public required string VehicleId { get; init; }
    /// <summary>Stream and sequence of the chunk it starts in, the evidence.</summary>
    public required string StreamId { get; init; }
    public required long Sequence { get; init; }
    /// <summary>UTC.</summary>
    public required DateTimeOffset Start { get; init; }
    /// <summary>s.</summary>
    public required double Seconds { get; init; }
    public required RunMode Mode { get; init; }
    /// <summary>Mean speed, km/h.</summary>
    public required double SpeedKmH { get; init; }
    /// <summary>Torque at the wheel that held the vehicle straight (torsion bar plus assist where logged), N·m, + left.</summary>
    public Estimate? TorqueNm { get; init; }
    /// <summary>The torque is driver plus assist; false where it is the torsion bar alone.</summary>
    public bool TorqueIncludesAssist { get; init; }
    /// <summary>Steering-wheel angle, deg, + left.</summary>
    public Estimate? AngleDeg { get; init; }
    /// <summary>Lateral acceleration less speed × yaw rate, over g: sine of the bank plus the sensor's bias; + left side higher.</summary>
    public Estimate? BankReading { get; init; }
    /// <summary>Mean yaw rate, bias removed, deg/s.</summary>
    public double? YawRateDegS { get; init; }
    /// <summary>Load, kg, where known.</summary>
    public double? LoadKg { get; init; }
    /// <summary>Road cell, direction aware, where the position is known.</summary>
    public string? RoadCell { get; init; }
}
