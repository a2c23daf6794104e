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
            if (Try(type, sound, random, least, most) is var (angle, change))
                return new(angle.Quantity, angle.Axle, angle.Side, change, mode, start, full);
    }

    /// <summary>One try at a fault; null where the worst quantity comes to lie out of range.</summary>
    public static (Angle Angle, Geometry Change)? Try(VehicleType type, Geometry sound, RandomStream random, double least, double most)
    {
        var angles = sound.Angles(type);
        var angle = PickQuantity(type, angles, random);
        var ratio = random.Between(least, most);
        var change = Bend(type, angle, angle.Tolerance.Target + random.Sign() * ratio * angle.Tolerance.PlusMinus - angle.Value, random);
        var worst = sound.Plus(change, 1).Angles(type).MaxBy(a => a.Ratio);
        return worst.Ratio >= least && worst.Ratio < most ? (angle, change) : null;
    }

    /// <summary>Shares of faults that are older than the window and that come at once inside it; the others drift.</summary>
    public const double BeforeShare = 0.4, SuddenShare = 0.3;

    private static (FaultMode Mode, double Start, double Full) DrawTime(RandomStream random, int days)
    {
        var mode = random.Unit() switch { < BeforeShare => FaultMode.Before, < BeforeShare + SuddenShare => FaultMode.Sudden, _ => FaultMode.Drifting };
        return mode switch
        {
            FaultMode.Before => (mode, -7.0 * random.Whole(5, 60), 0),
            FaultMode.Sudden => (mode, Math.Floor(days * random.Between(0.2, 0.7)), 0),
            _ => (mode, Math.Floor(days * random.Between(-0.4, 0.25)), Math.Floor(days * random.Between(0.6, 0.95))),
        };
    }

    /// <summary>How often each quantity goes wrong on such a vehicle, by weight (invented; about what workshops find).</summary>
    public static (string Quantity, double Weight)[] Weights(VehicleType type)
    {
        var tandem = type.FixedAxles.Count() > 1;
        return type.Class switch
        {
            VehicleClass.Car => [("front_total_toe", 0.46), ("rear_total_toe", 0.20), ("camber", 0.10), ("camber_split", 0.05), ("caster_split", 0.08), ("thrust", 0.11)],
            VehicleClass.Van => [("front_total_toe", 0.55), ("rear_total_toe", 0.12), ("camber", 0.08), ("camber_split", 0.05), ("caster_split", 0.08), ("thrust", 0.12)],
            VehicleClass.Trailer => [("rear_total_toe", 0.28), ("camber", 0.10), ("tandem_skew", 0.52), ("trailer_skew", 0.10)],
            _ => [("front_total_toe", 0.42), ("rear_total_toe", 0.10), ("camber", 0.10), ("camber_split", 0.06), ("caster_split", 0.08), ("thrust", 0.15), ("tandem_skew", tandem ? 0.60 : 0)],
        };
    }

    private static Angle PickQuantity(VehicleType type, List<Angle> angles, RandomStream random)
    {
        var weights = Weights(type);
        var at = random.Unit() * weights.Sum(w => w.Weight);
        foreach (var (name, weight) in weights)
            if ((at -= weight) < 0)
                return random.Pick(angles.Where(a => a.Quantity == name).ToList());
        return angles[0];
    }

    /// <summary>
    /// The ways in which a quantity comes to change by 1 deg, with how often each happens. A bent arm or rod end moves one
    /// wheel and so the axle's direction too, a tie rod moves both. Of a skewed pair one axle has moved on its springs: the end
    /// axle of the group more often than the middle one.
    /// </summary>
    public static (double Share, Geometry PerDeg)[] Ways(VehicleType type, Angle angle)
    {
        var axle = (angle.Axle ?? 1) - 1;
        Geometry Change(Action<Geometry> set)
        {
            var change = new Geometry(type.Axles.Length);
            set(change);
            return change;
        }
        switch (angle.Quantity)
        {
            case "front_total_toe" or "rear_total_toe":
                Geometry Toe(double direction) => Change(g => (g.TotalToe[axle], g.Direction[axle]) = (1, direction));
                return [(0.5, Toe(0)), (0.25, Toe(0.5)), (0.25, Toe(-0.5))];
            case "camber":
                return [(1, Change(g => (angle.Side == 'L' ? g.CamberLeft : g.CamberRight)[axle] = 1))];
            case "camber_split":
                return [(1, Change(g => (g.CamberLeft[axle], g.CamberRight[axle]) = (0.5, -0.5)))];
            case "caster_split":
                return [(1, Change(g => g.CasterSplit = 1))];
            case "tandem_skew":
                var last = axle + 1 == type.Axles.Length - 1;
                var rear = !last ? 0 : type.Axles.Length > 2 && type.IsTrailer && axle > 0 ? 0.8 : 0.5;
                return [(1 - rear, Change(g => g.Direction[axle] = 1)), (rear, Change(g => g.Direction[axle + 1] = -1))];
            default:
                return [(1, Change(g => { foreach (var a in type.FixedAxles) g.Direction[a] = 1; }))];
        }
    }

    /// <summary>The change of wheel angles by which a quantity moves by <paramref name="delta"/> deg, in a way drawn at random.</summary>
    private static Geometry Bend(VehicleType type, Angle angle, double delta, RandomStream random)
    {
        var ways = Ways(type, angle);
        var way = angle.Quantity switch
        {
            "front_total_toe" or "rear_total_toe" => random.Chance(0.5) ? random.Sign() > 0 ? 1 : 2 : 0,
            "tandem_skew" when ways[1].Share > 0 => random.Chance(ways[1].Share) ? 1 : 0,
            _ => 0,
        };
        return new Geometry(type.Axles.Length).Plus(ways[way].PerDeg, delta);
    }
}
