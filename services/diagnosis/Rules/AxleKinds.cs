using WearWatch.Diagnosis.Chassis;
using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Rules;

/// <summary>What the rules need to know of a vehicle's axles.</summary>
internal static class AxleKinds
{
    /// <summary>The foremost axle of a motor vehicle and steered axles that follow it directly.</summary>
    public static bool IsFront(this Vehicle vehicle, int axle) =>
        vehicle.Class != VehicleClass.Trailer
        && (axle == vehicle.Axles.Min(a => a.Number) || vehicle.Axles.Where(a => a.Number <= axle).All(a => a.Steered || a.Number == vehicle.Axles.Min(b => b.Number)));

    public static Axle? SteerAxle(this Vehicle vehicle) => vehicle.Axles.Where(a => vehicle.IsFront(a.Number)).MinBy(a => a.Number);

    /// <summary>Axles that keep their direction: neither front nor steered.</summary>
    public static IReadOnlyList<Axle> FixedAxles(this Vehicle vehicle) =>
        [.. vehicle.Axles.Where(a => !vehicle.IsFront(a.Number) && !a.Steered).OrderBy(a => a.Number)];

    public static Quantity ToeOf(this Vehicle vehicle, int axle) => vehicle.IsFront(axle) ? Quantity.FrontTotalToe : Quantity.RearTotalToe;

    /// <summary>What the axle is and what can be set on it.</summary>
    public static AxleChassis Chassis(this Vehicle vehicle, Axle axle) => AxleChassis.Of(vehicle, axle, vehicle.Steers(axle));

    public static bool Steers(this Vehicle vehicle, Axle axle) => axle.Steered || vehicle.IsFront(axle.Number);

    /// <summary>Neither driven nor steered; not told where no axle of a motor vehicle is recorded as driven.</summary>
    public static bool FreeRolling(this Vehicle vehicle, Axle axle) =>
        !axle.Driven && !vehicle.Steers(axle) && (vehicle.Class == VehicleClass.Trailer || vehicle.Axles.Any(a => a.Driven));

    /// <summary>Whether an alignment mends the cause on this axle: an angle, and one that can be set there.</summary>
    public static bool Mends(this Vehicle vehicle, Axle axle, Quantity cause) =>
        cause.IsAngle() && vehicle.Chassis(axle).SettingOf(cause) is not { CanBeSet: false };

    /// <summary>+1 where the usual crown makes the driver steer left (traffic keeps right, the road falls right), −1 otherwise.</summary>
    public static int CrownSign(this Depot depot) => depot.TrafficSide == TrafficSide.Right ? 1 : -1;
}
