using System.Globalization;
using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Chassis;

/// <summary>
/// Chassis data that contradict themselves: what is taken instead, and why the answer is worth less. Nothing is refused here; the
/// record stays as it was written.
/// </summary>
/// <param name="Vehicle">The vehicle as the computation takes it.</param>
/// <param name="Problems">What is doubtful, because of what, and what would help; empty for sound data.</param>
public sealed record ChassisCheck(Vehicle Vehicle, IReadOnlyList<CannotTell> Problems)
{
    /// <summary>No maker sets a total toe beyond this, deg, nor a camber: minutes of arc or mm were meant (from memory).</summary>
    public const double MostTargetToeDeg = 1.5, MostTargetCamberDeg = 5;

    /// <summary>A steering ratio this far outside the class's usual range is a mistake, ratio (from memory).</summary>
    private const double RatioMargin = 1.5;

    /// <summary>Above this gross mass nothing is a car or van, below it nothing a truck or bus, kg (from memory; the law's border is 3500).</summary>
    private const double HeaviestLightKg = 7_500, LightestHeavyKg = 2_500;

    public static ChassisCheck Of(Vehicle vehicle, IReadOnlyList<ToleranceFact> tolerances)
    {
        var problems = new List<CannotTell>();
        var taken = Numbered(vehicle, problems);
        taken = OfKnownClass(taken, problems);
        taken = taken.Class == VehicleClass.Trailer ? Trailer(taken, problems) : MotorVehicle(taken, problems);
        taken = taken with { Axles = [.. taken.Axles.Select(a => Suspended(taken, Targeted(a, problems), problems))] };
        taken = Ratio(taken, problems);
        Mass(taken, problems);
        foreach (var fact in tolerances.Where(t => t.Class == taken.Class && !(t.PlusMinus > 0)).OrderBy(t => t.Quantity).ThenBy(t => t.From))
            problems.Add(new($"the operator's tolerance of {Words(fact.Quantity)}", $"± {Number(fact.PlusMinus)} excludes its own target; the built-in one is taken", "a tolerance above zero"));
        return new(taken, problems);
    }

    private static Vehicle Numbered(Vehicle vehicle, List<CannotTell> problems)
    {
        var axles = vehicle.Axles.GroupBy(a => a.Number).Select(g => g.First()).OrderBy(a => a.Number).ToList();
        if (axles.Count == 0) problems.Add(new("which axle is out", "no axle is recorded", "the vehicle's axles"));
        if (axles.Count < vehicle.Axles.Count) problems.Add(new("axles recorded twice", "two axles bear one number; the first of them is taken", "axles numbered from 1 at the front"));
        return vehicle with { Axles = axles };
    }

    /// <summary>Class from the axles where none of the known ones is recorded: what steers nowhere and is driven nowhere is towed.</summary>
    private static Vehicle OfKnownClass(Vehicle vehicle, List<CannotTell> problems)
    {
        if (Enum.IsDefined(vehicle.Class)) return vehicle;
        var guess = vehicle.Axles.Count > 0 && vehicle.Axles.All(a => a is { Steered: false, Driven: false }) ? VehicleClass.Trailer
            : vehicle.GrossMassKg > 3_500 || vehicle.Axles.Count > 2 || vehicle.Axles.Any(a => a.Duals) ? VehicleClass.Truck : VehicleClass.Van;
        problems.Add(new("tolerances and normal wear of its class", $"no class is recorded; taken for a {guess.ToString().ToLowerInvariant()} by its axles and mass", "the vehicle's class"));
        return vehicle with { Class = guess };
    }

    private static Vehicle Trailer(Vehicle vehicle, List<CannotTell> problems)
    {
        foreach (var axle in vehicle.Axles.Where(a => a.Driven))
            problems.Add(new($"axle {axle.Number} of the trailer",
                axle.Steered ? "it is recorded as steered and driven, which no towed axle is; taken as self-steering and free-rolling" : "it is recorded as driven; taken as free-rolling",
                "the class, or the axle's own record"));
        return vehicle with { Axles = [.. vehicle.Axles.Select(a => a with { Driven = false })] };
    }

    private static Vehicle MotorVehicle(Vehicle vehicle, List<CannotTell> problems)
    {
        if (vehicle.Axles.Count == 0) return vehicle;
        if (!vehicle.Axles.Any(a => a.Driven))
            problems.Add(new("which axle is driven", "no axle is recorded as driven; no axle is taken for free-rolling, so that heel-and-toe and diagonal wear are not told apart by drive", "the driven axle"));
        if (vehicle.Axles.Any(a => a.Steered)) return vehicle;
        var first = vehicle.Axles[0].Number;
        problems.Add(new("which axle steers", $"no axle is recorded as steered; axle {first} is taken for the steer axle", "the steered axle"));
        return vehicle with { Axles = [.. vehicle.Axles.Select(a => a.Number == first ? a with { Steered = true } : a)] };
    }

    /// <summary>A steered axle is not carried by trailing arms, nor by twin tyres.</summary>
    private static Axle Suspended(Vehicle vehicle, Axle axle, List<CannotTell> problems)
    {
        if (axle.Steered && axle.Duals && vehicle.Class != VehicleClass.Trailer)
            problems.Add(new($"the tyres of axle {axle.Number}", "it is recorded as steered with twin tyres; readings are taken as recorded", "the axle's tyres"));
        if (!axle.Steered || axle.Suspension is not (Suspension.TrailingArm or Suspension.SemiTrailingArm)) return axle;
        problems.Add(new($"what can be set on axle {axle.Number}", $"it is recorded as steered on {(axle.Suspension == Suspension.TrailingArm ? "trailing arms" : "semi-trailing arms")}, which do not steer; its suspension is taken as not known", "the axle's suspension"));
        return axle with { Suspension = Suspension.Unknown };
    }

    private static Axle Targeted(Axle axle, List<CannotTell> problems)
    {
        bool Keep(double? value, double most, string what, string otherwise)
        {
            if (value is not { } v || (double.IsFinite(v) && Math.Abs(v) <= most)) return true;
            problems.Add(new($"the maker's {what} of axle {axle.Number}", $"{Number(v)} deg cannot be; {otherwise}", "the figure with its unit"));
            return false;
        }
        bool Above(double? value, string what)
        {
            if (value is not { } v || v > 0) return true;
            problems.Add(new($"the maker's {what} tolerance of axle {axle.Number}", $"± {Number(v)} deg excludes its own target; the class's is taken", "a tolerance above zero"));
            return false;
        }
        const string classTarget = "the class's target is taken", classTolerance = "the class's tolerance is taken";
        return axle with
        {
            TargetTotalToeDeg = Keep(axle.TargetTotalToeDeg, MostTargetToeDeg, "target of total toe", classTarget) ? axle.TargetTotalToeDeg : null,
            TargetCamberDeg = Keep(axle.TargetCamberDeg, MostTargetCamberDeg, "target of camber", classTarget) ? axle.TargetCamberDeg : null,
            ToleranceTotalToeDeg = Above(axle.ToleranceTotalToeDeg, "total toe") && Keep(axle.ToleranceTotalToeDeg, MostTargetToeDeg, "tolerance of total toe", classTolerance) ? axle.ToleranceTotalToeDeg : null,
            ToleranceCamberDeg = Above(axle.ToleranceCamberDeg, "camber") && Keep(axle.ToleranceCamberDeg, MostTargetCamberDeg, "tolerance of camber", classTolerance) ? axle.ToleranceCamberDeg : null,
        };
    }

    private static Vehicle Ratio(Vehicle vehicle, List<CannotTell> problems)
    {
        if (vehicle.SteeringRatio is not { } ratio || SteeringGeometry.Of(vehicle.Class) is not { } usual) return vehicle;
        if (ratio >= usual.RatioLow / RatioMargin && ratio <= usual.RatioHigh * RatioMargin) return vehicle;
        problems.Add(new("how far a thrust angle turns the steering wheel", $"a steering ratio of {Number(ratio)} is far from the {Number(usual.RatioLow)} to {Number(usual.RatioHigh)} of its class; the class's is taken", "the steering ratio on centre"));
        return vehicle with { SteeringRatio = null };
    }

    private static void Mass(Vehicle vehicle, List<CannotTell> problems)
    {
        var light = vehicle.Class is VehicleClass.Car or VehicleClass.Van;
        var heavy = vehicle.Class is VehicleClass.Truck or VehicleClass.Bus;
        if (vehicle.GrossMassKg is not { } mass || !(light && mass > HeaviestLightKg || heavy && mass < LightestHeavyKg)) return;
        problems.Add(new("tolerances and normal wear of its class", $"a gross mass of {mass.ToString("0", CultureInfo.InvariantCulture)} kg does not fit a {vehicle.Class.ToString().ToLowerInvariant()}; the class is taken as recorded", "the class or the gross mass"));
    }

    private static string Words(Quantity quantity) => quantity.WireName().Replace('_', ' ');

    private static string Number(double value) => value.ToString("0.###", CultureInfo.InvariantCulture);
}
