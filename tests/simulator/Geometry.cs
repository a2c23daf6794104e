namespace WearWatch.Simulator;

/// <summary>One angle of a vehicle as a workshop would state it, deg.</summary>
public readonly record struct Angle(string Quantity, int? Axle, char? Side, double Value, Tolerance Tolerance)
{
    /// <summary>Distance from target in tolerances; misaligned above 1.</summary>
    public double Ratio => Math.Abs(Value - Tolerance.Target) / Tolerance.PlusMinus;
}

/// <summary>
/// Wheel angles of a vehicle, deg. Signs after ISO 8855: axle directions positive to the left; total toe positive
/// inward; camber positive with the top out; caster split left less right.
/// </summary>
public sealed class Geometry(int axles)
{
    /// <summary>Standard deviation of a sound vehicle's angles, tolerances; of one that comes from the bench.</summary>
    public const double SoundSpread = 0.4, RepairedSpread = 0.2;
    /// <summary>Where a sound vehicle's angles end, tolerances.</summary>
    public const double SoundLimit = 0.95;

    public double[] TotalToe { get; } = new double[axles];
    public double[] Direction { get; } = new double[axles];
    public double[] CamberLeft { get; } = new double[axles];
    public double[] CamberRight { get; } = new double[axles];
    public double CasterSplit { get; set; }

    public int Axles => TotalToe.Length;

    /// <summary>
    /// These angles as they are when rolling under load: drag and load take up the toe that the target sets on the bench, so
    /// that a wheel on target runs straight (trucks: loaded toe near zero, tyre trade recommendations; else from memory).
    /// </summary>
    public Geometry Rolling(VehicleType type)
    {
        var rolling = Plus(this, 0);
        for (var a = 0; a < Axles; a++)
            rolling.TotalToe[a] -= (a == 0 && !type.IsTrailer ? Tolerances.FrontTotalToe(type.Class) : Tolerances.RearTotalToe(type.Class)).Target;
        return rolling;
    }

    /// <summary>Angle of a wheel against the vehicle's centreline, deg, + left: toe-in steers the left wheel right.</summary>
    public double WheelDirection(int axle, bool left) => Direction[axle] + (left ? -0.5 : 0.5) * TotalToe[axle];

    public double Camber(int axle, bool left) => left ? CamberLeft[axle] : CamberRight[axle];

    /// <summary>This plus a share of a change.</summary>
    public Geometry Plus(Geometry change, double share)
    {
        var sum = new Geometry(Axles) { CasterSplit = CasterSplit + share * change.CasterSplit };
        for (var a = 0; a < Axles; a++)
        {
            sum.TotalToe[a] = TotalToe[a] + share * change.TotalToe[a];
            sum.Direction[a] = Direction[a] + share * change.Direction[a];
            sum.CamberLeft[a] = CamberLeft[a] + share * change.CamberLeft[a];
            sum.CamberRight[a] = CamberRight[a] + share * change.CamberRight[a];
        }
        return sum;
    }

    /// <summary>Takes the angles of another, times a factor.</summary>
    public void Set(Geometry other, double factor)
    {
        CasterSplit = factor * other.CasterSplit;
        for (var a = 0; a < Axles; a++)
        {
            TotalToe[a] = factor * other.TotalToe[a];
            Direction[a] = factor * other.Direction[a];
            CamberLeft[a] = factor * other.CamberLeft[a];
            CamberRight[a] = factor * other.CamberRight[a];
        }
    }

    /// <summary>Adds another's angles, times a factor, to these.</summary>
    public void Add(Geometry other, double factor)
    {
        CasterSplit += factor * other.CasterSplit;
        for (var a = 0; a < Axles; a++)
        {
            TotalToe[a] += factor * other.TotalToe[a];
            Direction[a] += factor * other.Direction[a];
            CamberLeft[a] += factor * other.CamberLeft[a];
            CamberRight[a] += factor * other.CamberRight[a];
        }
    }

    /// <summary>Every alignment quantity of this vehicle type with its tolerance.</summary>
    public List<Angle> Angles(VehicleType type)
    {
        var c = type.Class;
        var angles = new List<Angle>();
        if (!type.IsTrailer)
        {
            angles.Add(new("front_total_toe", 1, null, TotalToe[0], Tolerances.FrontTotalToe(c)));
            angles.Add(new("camber_split", 1, null, CamberLeft[0] - CamberRight[0], Tolerances.CamberSplit(c)));
            angles.Add(new("caster_split", 1, null, CasterSplit, Tolerances.CasterSplit(c)));
        }
        for (var a = 0; a < Axles; a++)
        {
            var front = a == 0 && !type.IsTrailer;
            if (!front) angles.Add(new("rear_total_toe", a + 1, null, TotalToe[a], Tolerances.RearTotalToe(c)));
            angles.Add(new("camber", a + 1, 'L', CamberLeft[a], Tolerances.Camber(c, front)));
            angles.Add(new("camber", a + 1, 'R', CamberRight[a], Tolerances.Camber(c, front)));
        }
        var fixedAxles = type.FixedAxles.ToArray();
        var mean = fixedAxles.Average(a => Direction[a]);
        angles.Add(type.IsTrailer ? new("trailer_skew", null, null, mean, Tolerances.Skew) : new("thrust", null, null, mean, Tolerances.Thrust(c)));
        for (var i = 0; i + 1 < fixedAxles.Length; i++)
            angles.Add(new("tandem_skew", fixedAxles[i] + 1, null, Direction[fixedAxles[i]] - Direction[fixedAxles[i + 1]], Tolerances.Skew));
        return angles;
    }

    /// <summary>
    /// A vehicle as it leaves a good workshop and settles: every quantity normal about its target, standard deviation
    /// <paramref name="spread"/> tolerances (0.4 by default), never beyond 0.95 of it.
    /// </summary>
    public static Geometry DrawSound(VehicleType type, RandomStream random, double spread = SoundSpread)
    {
        var g = new Geometry(type.Axles.Length);
        do Draw(g, type, random, spread);
        while (g.Angles(type).Any(a => a.Ratio > SoundLimit));
        return g;
    }

    private static void Draw(Geometry g, VehicleType type, RandomStream random, double spread)
    {
        var c = type.Class;
        double Near(Tolerance t, double share = 1) => t.Target + random.Within(spread * share * t.PlusMinus, SoundLimit * t.PlusMinus);
        for (var a = 0; a < g.Axles; a++)
        {
            var front = a == 0 && !type.IsTrailer;
            g.TotalToe[a] = Near(front ? Tolerances.FrontTotalToe(c) : Tolerances.RearTotalToe(c));
            var camber = Tolerances.Camber(c, front);
            var split = front ? Near(Tolerances.CamberSplit(c)) : random.Within(spread * camber.PlusMinus, camber.PlusMinus);
            var mean = Near(camber, 0.8);
            g.CamberLeft[a] = mean + split / 2;
            g.CamberRight[a] = mean - split / 2;
            g.Direction[a] = type.Axles[a].Steered ? random.Within(0.03, 0.08) : 0;
        }
        if (!type.IsTrailer) g.CasterSplit = Near(Tolerances.CasterSplit(c));
        DrawDirections(g, type, random, spread);
    }

    private static void DrawDirections(Geometry g, VehicleType type, RandomStream random, double spread)
    {
        var group = type.FixedAxles.ToArray();
        var direction = 0.0;
        foreach (var a in group)
        {
            g.Direction[a] = direction;
            direction += random.Within(spread * Tolerances.Skew.PlusMinus, SoundLimit * Tolerances.Skew.PlusMinus);
        }
        var tolerance = type.IsTrailer ? Tolerances.Skew : Tolerances.Thrust(type.Class);
        var shift = random.Within(spread * tolerance.PlusMinus, SoundLimit * tolerance.PlusMinus) - group.Average(a => g.Direction[a]);
        foreach (var a in group) g.Direction[a] += shift;
    }
}
