using System.Text.Json.Serialization;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Roads;

/// <summary>What a vehicle's torque is.</summary>
public enum TorqueKind
{
    None,
    /// <summary>Driver plus assist.</summary>
    Total,
    /// <summary>Torsion bar alone; under power steering only a share of the whole.</summary>
    TorsionBar,
    /// <summary>The unit is raw or unknown: never read as N·m.</summary>
    UnknownUnit,
}

/// <summary>
/// What the road fit must know of a vehicle. FoundInOrder: its alignment was recorded in order for the time of the runs given, so
/// that its zero anchors the class.
/// </summary>
public sealed record RoadVehicle(string VehicleId, VehicleClass Class, TrafficSide TrafficSide, TorqueKind Torque, bool FoundInOrder = false)
{
    /// <summary>The vehicle this is another time of: its alignment may differ, its gains are the same. Null where it enters once.</summary>
    public string? SameAs { get; init; }

    /// <summary>The two kinds that are read as N·m.</summary>
    [JsonIgnore]
    public bool TorqueUsable => Torque is TorqueKind.Total or TorqueKind.TorsionBar;
}

/// <summary>The signals that feel the road's bank.</summary>
public enum Witness { Torque, Angle, BankReading }

/// <summary>Gain of a class: what one unit of the bank's sine brings. Null where no vehicle of the class had the signal.</summary>
public sealed record ClassGain
{
    public required VehicleClass Class { get; init; }
    public required TorqueKind Torque { get; init; }
    /// <summary>N·m per sine of bank.</summary>
    public Estimate? TorqueNmPerSine { get; init; }
    /// <summary>deg of steering wheel per sine of bank.</summary>
    public Estimate? AngleDegPerSine { get; init; }
    /// <summary>One standard deviation of the class's steering pulls, N·m, and off-centre angles, deg, as found.</summary>
    public double PullSpreadNm { get; init; }
    public double OffCentreSpreadDeg { get; init; }
}

/// <summary>
/// Usual bank of the roads of one traffic side: sine of the bank, + left side higher. Width is one standard deviation of the cells
/// about it, as found; the prior's where there are fewer than ten.
/// </summary>
public sealed record UsualCrown(TrafficSide TrafficSide, Estimate Bank, double Width);

/// <summary>Sine of the bank of one cell, + left side higher.</summary>
public sealed record CellBank(string Cell, Estimate Bank, int Runs, int Vehicles);

/// <summary>Spread of a witness beyond its runs' own standard errors, in its unit: from run to run, and between trips (wind, load).</summary>
public sealed record WitnessSpread(Witness Witness, double RunSd, double TripSd);

/// <summary>Fleet-wide snapshot: vehicles, gains, crowns and cells from the same solve. A function of the runs and vehicles alone.</summary>
public sealed record RoadFit
{
    public const string MethodVersion = "road-3";

    public string Method { get; init; } = MethodVersion;
    public required IReadOnlyList<SteeringFigures> Vehicles { get; init; }
    public required IReadOnlyList<ClassGain> Gains { get; init; }
    public required IReadOnlyList<UsualCrown> Crowns { get; init; }
    public required IReadOnlyList<CellBank> Cells { get; init; }
    public required IReadOnlyList<WitnessSpread> Spreads { get; init; }
    /// <summary>One standard deviation of the zeros of the bank readings, sine, as found.</summary>
    public double ReadingZeroSpread { get; init; } = RoadPriors.AccelerometerBias;
    /// <summary>Groups of vehicles that no shared cell joins.</summary>
    public required int Components { get; init; }
    public required int Iterations { get; init; }
    public required bool Converged { get; init; }
    /// <summary>
    /// An earlier fit brought forward by new runs alone: gains, crowns, spreads and untouched vehicles stand as they were. The next full
    /// fit replaces it.
    /// </summary>
    public bool Provisional { get; init; }

    public SteeringFigures? Of(string vehicleId) => Vehicles.FirstOrDefault(v => v.VehicleId == vehicleId);
}
