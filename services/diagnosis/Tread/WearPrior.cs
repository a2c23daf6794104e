using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tread;

/// <summary>What an axle does; decides how its tyres wear when sound.</summary>
public enum AxleRole { Steer, SteerDriven, Drive, Free, Lifting }

/// <summary>Wear of sound tyres before the fleet has shown its own.</summary>
/// <param name="RateMmPer1000Km">Median rate, mm per 1000 km.</param>
/// <param name="LogSd">Standard deviation of ln(rate) from fleet to fleet.</param>
/// <param name="NewDepthMm">Usual depth when new, mm.</param>
public sealed record WearPrior(double RateMmPer1000Km, double LogSd, double NewDepthMm)
{
    /// <summary>Spread between sound tyres of one fleet and kind, standard deviation of ln(rate); drivers alone move wear by up to 35 %.</summary>
    public const double BetweenLogSd = 0.2;

    /// <summary>
    /// Normal edge slope and shoulder part per mm of mean wear. Sound tyres wear their outer grooves 10-50 % faster than
    /// the inner ones (NHTSA tread-wear groove patterns, 1985); which of the two parts carries it is left to the fleet.
    /// </summary>
    public static readonly Estimate EdgePerMm = new(0.1, 0.1);

    public static readonly Estimate ShoulderPerMm = new(0.15, 0.15);

    public static AxleRole RoleOf(Vehicle vehicle, int axle)
    {
        var a = vehicle.AxleAt(axle);
        if (a is { Lifting: true }) return AxleRole.Lifting;
        if (vehicle.Class == VehicleClass.Trailer || a is null) return AxleRole.Free;
        var steered = a.Steered || axle == 1;
        return (steered, a.Driven) switch { (true, true) => AxleRole.SteerDriven, (true, false) => AxleRole.Steer, (false, true) => AxleRole.Drive, _ => AxleRole.Free };
    }

    /// <summary>
    /// Middle of the ranges of the trade: line-haul trucks 10 000-20 000 miles per 1/32 inch (0.025-0.049 mm per 1000 km);
    /// cars 0.10-0.20 in front, 0.06-0.12 behind, vans 0.12-0.25, buses 0.08-0.15, trailers 0.03-0.08 (from memory).
    /// New depths: steer 18-19, drive 28-30, trailer 14-18 in 1/32 inch; vans 8-10 mm (from memory).
    /// </summary>
    public static WearPrior For(VehicleClass vehicleClass, AxleRole role) => (vehicleClass, role) switch
    {
        (VehicleClass.Car, AxleRole.Steer or AxleRole.SteerDriven) => new(0.14, 0.4, 8),
        (VehicleClass.Car, _) => new(0.085, 0.4, 8),
        (VehicleClass.Van, AxleRole.Steer or AxleRole.SteerDriven) => new(0.18, 0.4, 9),
        (VehicleClass.Van, _) => new(0.15, 0.4, 9),
        (VehicleClass.Truck, AxleRole.Drive) => new(0.055, 0.5, 22),
        (VehicleClass.Truck, _) => new(0.05, 0.5, 14.5),
        (VehicleClass.Bus, _) => new(0.11, 0.4, 15),
        _ => new(0.05, 0.5, 12.5),
    };
}
