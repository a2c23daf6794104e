using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Geometry;

namespace WearWatch.Diagnosis.Chassis;

/// <summary>Steering of a class: what is usual, and between what.</summary>
/// <param name="Class">Class.</param>
/// <param name="RatioLow">Least usual steering-wheel angle per road-wheel angle, on centre.</param>
/// <param name="RatioHigh">Greatest usual one.</param>
/// <param name="TrailMm">Mechanical trail, mm.</param>
/// <param name="ScrubRadiusMm">Contact centre outboard of the steering axis, mm.</param>
/// <param name="Source">Where it comes from.</param>
public sealed record SteeringRow(VehicleClass Class, double RatioLow, double RatioHigh, double TrailMm, double ScrubRadiusMm, string Source);

/// <summary>Change of an axle's total toe from standing to running, deg.</summary>
/// <param name="Steered">The axle steers.</param>
/// <param name="Driven">The axle is driven.</param>
/// <param name="Beam">Null where it makes no difference.</param>
/// <param name="ChangeDeg">Positive: the wheels run further in than they stand.</param>
/// <param name="Why">In words.</param>
/// <param name="Source">Where it comes from.</param>
public sealed record RunningToeRow(bool Steered, bool Driven, bool? Beam, double ChangeDeg, string Why, string Source);

public static class SteeringGeometry
{
    /// <summary>Trail and scrub radius are worked out by <see cref="Trail"/> from the radius, caster, hub offset and inclination named.</summary>
    public static IReadOnlyList<SteeringRow> Rows { get; } =
    [
        new(VehicleClass.Car, 12, 20, 21.7, -9.9, "ratio: public encyclopaedia; radius 310 mm, caster 4 deg, hub offset 56 mm, inclination 12 deg from memory"),
        new(VehicleClass.Van, 15, 20, 24.4, 18.3, "from memory: radius 350 mm, caster 4 deg, hub offset 80 mm, inclination 10 deg"),
        new(VehicleClass.Truck, 18, 25, 30.0, 68.5, "from memory: radius 490 mm, caster 3.5 deg, hub offset 120 mm, inclination 6 deg"),
        new(VehicleClass.Bus, 18, 25, 30.0, 68.5, "from memory, as trucks"),
    ];

    /// <summary>Drag turns steered wheels out about a contact centre outboard of the axis, drive turns them in; a beam keeps its toe.</summary>
    public static IReadOnlyList<RunningToeRow> RunningToe { get; } =
    [
        new(true, true, null, +0.05, "drive pulls its wheels in", "from memory"),
        new(true, false, true, -0.09, "drag and load take up its toe: trucks run near zero loaded", "tyre dealer's recommendations; figure from memory"),
        new(true, false, false, -0.05, "drag pulls its wheels out", "from memory"),
        new(false, true, false, +0.03, "drive pulls its wheels in", "from memory"),
        new(false, false, false, -0.02, "drag pulls its wheels out", "from memory"),
        new(false, true, true, 0, "a beam keeps its toe", "common practice, no source"),
        new(false, false, true, 0, "a beam keeps its toe", "common practice, no source"),
    ];

    public static SteeringRow? Of(VehicleClass vehicleClass) => Rows.FirstOrDefault(r => r.Class == vehicleClass);

    public static RunningToeRow RunningToeOf(bool steered, bool driven, bool beam) =>
        RunningToe.First(r => r.Steered == steered && r.Driven == driven && (r.Beam is null || r.Beam == beam));
}
