namespace WearWatch.Diagnosis.Facts;

public enum VehicleClass { Car, Van, Truck, Bus, Trailer }

/// <summary>How an axle's wheels are guided; decides what can be adjusted and what camber does under load.</summary>
public enum Suspension
{
    Unknown, BeamLeaf, BeamAir, Strut, DoubleWishbone, TrailingArm, SemiTrailingArm,
    /// <summary>Beam on coil springs, held by links and a lateral rod.</summary>
    BeamCoil,
}

/// <summary>What helps the driver turn the wheel; decides what a torque reading means.</summary>
public enum SteeringAssist { Unknown, None, Hydraulic, ElectroHydraulic, Electric }

/// <summary>A vehicle as recorded from a date on; a later record replaces an earlier one.</summary>
public sealed record Vehicle
{
    public required string VehicleId { get; init; }
    /// <summary>Home depot; a survey may be taken anywhere.</summary>
    public required string Depot { get; init; }
    public required VehicleClass Class { get; init; }
    public required IReadOnlyList<Axle> Axles { get; init; }
    public string? FleetNumber { get; init; }
    public string? Registration { get; init; }
    public string? Vin { get; init; }
    public DateOnly? From { get; init; }
    /// <summary>Usual distance, km per week.</summary>
    public double? KmPerWeek { get; init; }
    /// <summary>Gross vehicle mass, kg; decides which legal limit applies.</summary>
    public double? GrossMassKg { get; init; }
    /// <summary>Distance between the foremost and the rearmost axle, m.</summary>
    public double? WheelbaseM { get; init; }
    /// <summary>Steering-wheel angle per road-wheel angle, on centre.</summary>
    public double? SteeringRatio { get; init; }
    public SteeringAssist Assist { get; init; }
    /// <summary>Fuel or energy per 100 km (L or kWh), for the cost of drag.</summary>
    public double? ConsumptionPer100Km { get; init; }
    /// <summary>True when the consumption is in kWh.</summary>
    public bool Electric { get; init; }
    /// <summary>Telematics units that may send for this vehicle.</summary>
    public IReadOnlyList<string> TelematicsUnits { get; init; } = [];
    /// <summary>Date of return or sale, if planned.</summary>
    public DateOnly? LeavesOn { get; init; }
    /// <summary>Next alignment already planned.</summary>
    public DateOnly? NextAlignmentOn { get; init; }

    /// <summary>All tyre positions this vehicle has, front to rear, left before right.</summary>
    public IEnumerable<Position> Positions() => Axles.SelectMany(a => a.Positions());

    public Axle? AxleAt(int number) => Axles.FirstOrDefault(a => a.Number == number);
}

/// <summary>One axle, counted from 1 at the front.</summary>
public sealed record Axle
{
    public required int Number { get; init; }
    public Suspension Suspension { get; init; }
    public bool Steered { get; init; }
    public bool Driven { get; init; }
    public bool Lifting { get; init; }
    /// <summary>Two tyres a side.</summary>
    public bool Duals { get; init; }
    /// <summary>Maker's target for total toe and camber, deg; the class default where absent.</summary>
    public double? TargetTotalToeDeg { get; init; }
    public double? TargetCamberDeg { get; init; }
    /// <summary>Maker's tolerance, ± deg; the class default where absent.</summary>
    public double? ToleranceTotalToeDeg { get; init; }
    public double? ToleranceCamberDeg { get; init; }
    public string? TyreSize { get; init; }
    /// <summary>Price of one tyre fitted, in the depot's currency.</summary>
    public decimal? TyrePrice { get; init; }
    /// <summary>Set pressure, kPa cold.</summary>
    public double? PressureKpa { get; init; }
    /// <summary>Track width, m.</summary>
    public double? TrackM { get; init; }
    /// <summary>Whether the angle can be set on this axle, where it differs from what is usual of its suspension.</summary>
    public bool? ToeAdjustable { get; init; }
    public bool? CamberAdjustable { get; init; }
    public bool? CasterAdjustable { get; init; }
    /// <summary>Contact centre outboard of the steering axis, mm; the class's usual figure where absent.</summary>
    public double? ScrubRadiusMm { get; init; }
    /// <summary>Mechanical trail, mm; the class's usual figure where absent.</summary>
    public double? TrailMm { get; init; }

    public IEnumerable<Position> Positions() => Duals
        ? [new(Number, Side.Left, Dual.Outer), new(Number, Side.Left, Dual.Inner), new(Number, Side.Right, Dual.Inner), new(Number, Side.Right, Dual.Outer)]
        : [new(Number, Side.Left), new(Number, Side.Right)];
}
