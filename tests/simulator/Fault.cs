namespace WearWatch.Simulator;

public enum FaultMode { Before, Sudden, Drifting }

/// <summary>
/// One thing that put a vehicle out of alignment, as a change of its wheel angles. Days count from the first day
/// of the window; a fault from before the window starts on a negative day.
/// </summary>
/// <param name="FullDay">Day on which a drifting fault has reached its full size.</param>
public sealed record Fault(string Quantity, int? Axle, char? Side, Geometry Change, FaultMode Mode, double StartDay, double FullDay)
{
    /// <summary>Day of a repair; never, where infinite.</summary>
    public double RepairDay { get; init; } = double.PositiveInfinity;

    /// <summary>Share of the full change present on a day, 0 to 1.</summary>
    public double Share(double day) =>
        day < StartDay || day >= RepairDay ? 0
        : Mode == FaultMode.Drifting ? Math.Min(1, (day - StartDay) / (FullDay - StartDay))
        : 1;

    /// <summary>
    /// Draws a fault that fits the vehicle and brings its worst quantity to between <paramref name="least"/> and
    /// <paramref name="most"/> tolerances.
    /// </summary>
    public static Fault Draw(VehicleType type, Geometry sound, RandomStream random, double least, double most, int days)
    {
        var (mode, start, full) = DrawTime(random, days);
        while (true)
        {
            var angles = sound.Angles(type);
            var angle = PickQuantity(type, angles, random);
            var ratio = random.Between(least, most);
            var change = Bend(type, sound, angle, angle.Tolerance.Target + random.Sign() * ratio * angle.Tolerance.PlusMinus - angle.Value, random);
            var worst = sound.Plus(change, 1).Angles(type).MaxBy(a => a.Ratio);
            if (worst.Ratio >= least && worst.Ratio < most)
                return new(angle.Quantity, angle.Axle, angle.Side, change, mode, start, full);
        }
    }

    private static (FaultMode Mode, double Start, double Full) DrawTime(RandomStream random, int days)
    {
        var mode = random.Unit() switch { < 0.4 => FaultMode.Before, < 0.7 => FaultMode.Sudden, _ => FaultMode.Drifting };
        return mode switch
        {
            FaultMode.Before => (mode, -7.0 * random.Whole(5, 60), 0),
            FaultMode.Sudden => (mode, Math.Floor(days * random.Between(0.2, 0.7)), 0),
            _ => (mode, Math.Floor(days * random.Between(-0.4, 0.25)), Math.Floor(days * random.Between(0.6, 0.95))),
        };
    }

    private static Angle PickQuantity(VehicleType type, List<Angle> angles, RandomStream random)
    {
        var tandem = angles.Any(a => a.Quantity == "tandem_skew");
        (string Name, double Weight)[] weights = type.Class switch
        {
            VehicleClass.Car => [("front_total_toe", 0.46), ("rear_total_toe", 0.20), ("camber", 0.10), ("camber_split", 0.05), ("caster_split", 0.08), ("thrust", 0.11)],
            VehicleClass.Van => [("front_total_toe", 0.55), ("rear_total_toe", 0.12), ("camber", 0.08), ("camber_split", 0.05), ("caster_split", 0.08), ("thrust", 0.12)],
            VehicleClass.Trailer => [("rear_total_toe", 0.28), ("camber", 0.10), ("tandem_skew", 0.52), ("trailer_skew", 0.10)],
            _ => [("front_total_toe", 0.42), ("rear_total_toe", 0.10), ("camber", 0.10), ("camber_split", 0.06), ("caster_split", 0.08), ("thrust", 0.15), ("tandem_skew", tandem ? 0.60 : 0)],
        };
        var at = random.Unit() * weights.Sum(w => w.Weight);
        foreach (var (name, weight) in weights)
            if ((at -= weight) < 0)
                return random.Pick(angles.Where(a => a.Quantity == name).ToList());
        return angles[0];
    }

    /// <summary>The change of wheel angles by which a quantity moves by <paramref name="delta"/> deg.</summary>
    private static Geometry Bend(VehicleType type, Geometry sound, Angle angle, double delta, RandomStream random)
    {
        var change = new Geometry(sound.Axles);
        var axle = (angle.Axle ?? 1) - 1;
        switch (angle.Quantity)
        {
            case "front_total_toe" or "rear_total_toe":
                // A bent arm or rod end moves one wheel and so the axle's direction too; a tie rod moves both.
                change.TotalToe[axle] = delta;
                if (random.Chance(0.5)) change.Direction[axle] = random.Sign() * delta / 2;
                break;
            case "camber":
                (angle.Side == 'L' ? change.CamberLeft : change.CamberRight)[axle] = delta;
                break;
            case "camber_split":
                change.CamberLeft[axle] = delta / 2;
                change.CamberRight[axle] = -delta / 2;
                break;
            case "caster_split":
                change.CasterSplit = delta;
                break;
            case "tandem_skew":
                // One axle of the pair has moved on its springs: the end axle of the group more often than the middle one.
                var last = axle + 1 == sound.Axles - 1;
                var rearOne = last && random.Chance(type.Axles.Length > 2 && type.IsTrailer && axle > 0 ? 0.8 : 0.5);
                change.Direction[rearOne ? axle + 1 : axle] = rearOne ? -delta : delta;
                break;
            default:
                foreach (var a in type.FixedAxles) change.Direction[a] = delta;
                break;
        }
        return change;
    }
}
