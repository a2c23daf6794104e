namespace WearWatch.Simulator;

public enum VehicleClass { Car, Van, Truck, Bus, Trailer }

/// <summary>Target and ± tolerance of one alignment quantity, deg.</summary>
public readonly record struct Tolerance(double Target, double PlusMinus);

/// <summary>
/// Targets and tolerances the fleet's workshop works to, deg. Cars after vehicle makers' manuals (camber ±0.6,
/// split 0.7/1.0, thrust ±0.15); truck steer toe target 1/16 in after a truck maintenance council's practice;
/// everything else from memory, no source.
/// </summary>
public static class Tolerances
{
    public static Tolerance FrontTotalToe(VehicleClass c) => c switch
    {
        VehicleClass.Car => new(0.10, 0.20),
        VehicleClass.Van => new(0.15, 0.15),
        _ => new(0.09, 0.045),
    };

    public static Tolerance RearTotalToe(VehicleClass c) => c switch
    {
        VehicleClass.Car => new(0.15, 0.20),
        VehicleClass.Van => new(0.10, 0.20),
        VehicleClass.Trailer => new(0, 0.045),
        _ => new(0, 0.10),
    };

    public static Tolerance Camber(VehicleClass c, bool frontAxle) => c switch
    {
        VehicleClass.Car => new(-0.3, 0.6),
        VehicleClass.Van => new(0, 0.75),
        VehicleClass.Trailer => new(0, 0.5),
        _ => new(frontAxle ? 0.2 : 0, 0.375),
    };

    public static Tolerance CamberSplit(VehicleClass c) => c switch
    {
        VehicleClass.Car => new(0, 0.7),
        VehicleClass.Van => new(0, 0.6),
        _ => new(0, 0.5),
    };

    public static Tolerance CasterSplit(VehicleClass c) => c == VehicleClass.Van ? new(0, 0.75) : new(0, 1.0);

    public static Tolerance Thrust(VehicleClass c) => c switch
    {
        VehicleClass.Car => new(0, 0.15),
        VehicleClass.Van => new(0, 0.20),
        _ => new(0, 0.10),
    };

    public static Tolerance Skew => new(0, 0.10);
}
