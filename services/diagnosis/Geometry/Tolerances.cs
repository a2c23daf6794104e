using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Geometry;

/// <summary>A quantity is in order within Target ± PlusMinus, deg.</summary>
/// <param name="Target">deg.</param>
/// <param name="PlusMinus">deg, above zero.</param>
/// <param name="Source">Where the figure comes from.</param>
public readonly record struct Tolerance(double Target, double PlusMinus, string Source);

/// <summary>Targets and tolerances by class; maker's figures on the axle and the operator's own stand above them.</summary>
public static class Tolerances
{
    private const string CarManual = "vehicle maker's manual (car)";
    private const string Memory = "from memory";

    /// <summary>Rows: class, quantity, front axle only (null: any), target and ± in deg.</summary>
    private static readonly (VehicleClass Class, Quantity Quantity, bool? Front, double Target, double PlusMinus, string Source)[] Table =
    [
        (VehicleClass.Car, Quantity.FrontTotalToe, null, 0.10, 0.20, CarManual),
        (VehicleClass.Car, Quantity.RearTotalToe, null, 0.15, 0.20, Memory),
        (VehicleClass.Car, Quantity.Camber, null, -0.3, 0.6, CarManual),
        (VehicleClass.Car, Quantity.CamberSplit, null, 0, 0.7, CarManual),
        (VehicleClass.Car, Quantity.CasterSplit, null, 0, 1.0, CarManual),
        (VehicleClass.Car, Quantity.Thrust, null, 0, 0.15, CarManual),
        (VehicleClass.Van, Quantity.FrontTotalToe, null, 0.15, 0.15, Memory),
        (VehicleClass.Van, Quantity.RearTotalToe, null, 0.10, 0.20, Memory),
        (VehicleClass.Van, Quantity.Camber, null, 0, 0.75, Memory),
        (VehicleClass.Van, Quantity.CamberSplit, null, 0, 0.6, Memory),
        (VehicleClass.Van, Quantity.CasterSplit, null, 0, 0.75, Memory),
        (VehicleClass.Van, Quantity.Thrust, null, 0, 0.20, Memory),
        (VehicleClass.Truck, Quantity.FrontTotalToe, null, 0.09, 0.045, "1/16 in toe-in ± 1/32 in: trade recommendation, ± from memory"),
        (VehicleClass.Truck, Quantity.RearTotalToe, null, 0, 0.10, Memory),
        (VehicleClass.Truck, Quantity.Camber, true, 0.2, 0.375, Memory),
        (VehicleClass.Truck, Quantity.Camber, false, 0, 0.375, Memory),
        (VehicleClass.Truck, Quantity.CamberSplit, null, 0, 0.5, Memory),
        (VehicleClass.Truck, Quantity.CasterSplit, null, 0, 1.0, Memory),
        (VehicleClass.Truck, Quantity.Thrust, null, 0, 0.10, Memory),
        (VehicleClass.Truck, Quantity.TandemSkew, null, 0, 0.10, "about 1/8 in between axles, from memory"),
        (VehicleClass.Trailer, Quantity.RearTotalToe, null, 0, 0.045, "0 ± 1/32 in, from memory"),
        (VehicleClass.Trailer, Quantity.Camber, null, 0, 0.5, Memory),
        (VehicleClass.Trailer, Quantity.TandemSkew, null, 0, 0.10, Memory),
        (VehicleClass.Trailer, Quantity.TrailerSkew, null, 0, 0.10, Memory),
    ];

    /// <summary>The tolerance that applies, or null where the class has no such quantity.</summary>
    /// <param name="vehicle">Vehicle, with any maker's figures on its axles.</param>
    /// <param name="quantity">An alignment angle; look-alikes have none.</param>
    /// <param name="axle">Axle the quantity belongs to; null for the whole vehicle.</param>
    /// <param name="operatorFacts">Operator's tolerances; the latest not after <paramref name="asOf"/> applies.</param>
    /// <param name="asOf">Day of judgement.</param>
    public static Tolerance? For(Vehicle vehicle, Quantity quantity, int? axle, IReadOnlyList<ToleranceFact> operatorFacts, DateOnly asOf)
    {
        // Buses carry truck axles and keep truck tolerances (common practice, no source).
        var row = vehicle.Class == VehicleClass.Bus ? VehicleClass.Truck : vehicle.Class;
        var front = vehicle.Class != VehicleClass.Trailer && axle is null or 1;
        var found = Table.FirstOrDefault(r => r.Class == row && r.Quantity == quantity && (r.Front is null || r.Front == front));
        if (found.PlusMinus <= 0) return null;
        var (target, plusMinus, source) = (found.Target, found.PlusMinus, found.Source);
        var own = operatorFacts.Where(f => f.Class == vehicle.Class && f.Quantity == quantity && f.From <= asOf && f.PlusMinus > 0).MaxBy(f => f.From);
        if (own is not null) (plusMinus, source) = (own.PlusMinus, $"operator, from {own.From:yyyy-MM-dd}");
        var maker = vehicle.AxleAt(axle ?? 1);
        var (makerTarget, makerPlusMinus) = quantity switch
        {
            Quantity.FrontTotalToe or Quantity.RearTotalToe => (maker?.TargetTotalToeDeg, maker?.ToleranceTotalToeDeg),
            Quantity.Camber => (maker?.TargetCamberDeg, maker?.ToleranceCamberDeg),
            _ => (null, null),
        };
        target = makerTarget ?? target;
        if (makerPlusMinus is > 0) (plusMinus, source) = (makerPlusMinus.Value, "vehicle maker");
        return new Tolerance(target, plusMinus, source);
    }
}
