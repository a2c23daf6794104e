namespace WearWatch.Simulator.Best;

/// <summary>
/// Wheel angles of a sound vehicle as an affine function of independent standard normals, the law by which
/// <see cref="Geometry.DrawSound"/> draws them before it turns away those beyond 0.95 tolerances. The steered axles' own directions
/// (front toe split) are known: they are a look-alike, not a quantity.
/// </summary>
public sealed class AngleSpace
{
    private readonly VehicleType _type;
    private readonly Geometry _centre;
    private readonly List<Geometry> _unit = [];

    /// <summary>Every quantity with its tolerance, in the order of <see cref="Geometry.Angles"/>; values are targets.</summary>
    public Angle[] Quantities { get; }
    public int Count => _unit.Count;

    /// <param name="known">Wheel angles whose steered directions are taken as known.</param>
    /// <param name="spread">Standard deviation in tolerances.</param>
    public AngleSpace(VehicleType type, Geometry known, double spread)
    {
        _type = type;
        var (c, axles) = (type.Class, type.Axles.Length);
        _centre = new Geometry(axles);
        for (var a = 0; a < axles; a++)
        {
            var front = a == 0 && !type.IsTrailer;
            var toe = front ? Tolerances.FrontTotalToe(c) : Tolerances.RearTotalToe(c);
            var camber = Tolerances.Camber(c, front);
            _centre.TotalToe[a] = toe.Target;
            _centre.CamberLeft[a] = _centre.CamberRight[a] = camber.Target;
            if (type.Axles[a].Steered) _centre.Direction[a] = known.Direction[a];
            var axle = a;
            Unit(g => g.TotalToe[axle] = spread * toe.PlusMinus);
            Unit(g => g.CamberLeft[axle] = g.CamberRight[axle] = 0.8 * spread * camber.PlusMinus);
            var split = spread * (front ? Tolerances.CamberSplit(c) : camber).PlusMinus / 2;
            Unit(g => (g.CamberLeft[axle], g.CamberRight[axle]) = (split, -split));
        }
        if (!type.IsTrailer) Unit(g => g.CasterSplit = spread * Tolerances.CasterSplit(c).PlusMinus);
        var group = type.FixedAxles.ToArray();
        Unit(g => { foreach (var a in group) g.Direction[a] = spread * (type.IsTrailer ? Tolerances.Skew : Tolerances.Thrust(c)).PlusMinus; });
        for (var i = 1; i < group.Length; i++)
        {
            // Axles from the i-th on stand askew to those before it; the group's mean stays.
            var (from, ahead) = (i, (double)(group.Length - i) / group.Length);
            Unit(g => { for (var k = 0; k < group.Length; k++) g.Direction[group[k]] = spread * Tolerances.Skew.PlusMinus * ((k >= from ? 1 : 0) - ahead); });
        }
        Quantities = [.. _centre.Angles(type)];

        void Unit(Action<Geometry> set)
        {
            var unit = new Geometry(axles);
            set(unit);
            _unit.Add(unit);
        }
    }

    /// <summary>Wheel angles at a point.</summary>
    public void Place(ReadOnlySpan<double> normals, Geometry into)
    {
        into.Set(_centre, 1);
        for (var i = 0; i < _unit.Count; i++) into.Add(_unit[i], normals[i]);
    }

    /// <summary>Value of one quantity, deg.</summary>
    public double Value(Geometry g, int quantity)
    {
        var q = Quantities[quantity];
        var axle = (q.Axle ?? 1) - 1;
        switch (q.Quantity)
        {
            case "front_total_toe" or "rear_total_toe": return g.TotalToe[axle];
            case "camber": return g.Camber(axle, q.Side == 'L');
            case "camber_split": return g.CamberLeft[axle] - g.CamberRight[axle];
            case "caster_split": return g.CasterSplit;
            case "tandem_skew": return g.Direction[axle] - g.Direction[axle + 1];
            default:
                double sum = 0;
                var n = 0;
                for (var a = 0; a < g.Axles; a++)
                    if (!_type.Axles[a].Steered) (sum, n) = (sum + g.Direction[a], n + 1);
                return sum / n;
        }
    }

    /// <summary>Distance of a quantity from its target, tolerances.</summary>
    public double Ratio(Geometry g, int quantity) => Math.Abs(Value(g, quantity) - Quantities[quantity].Tolerance.Target) / Quantities[quantity].Tolerance.PlusMinus;

    /// <summary>The quantity farthest from its target and how far, tolerances.</summary>
    public (int Quantity, double Ratio) Worst(Geometry g)
    {
        var (worst, ratio) = (0, -1.0);
        for (var q = 0; q < Quantities.Length; q++)
        {
            var r = Ratio(g, q);
            if (r > ratio) (worst, ratio) = (q, r);
        }
        return (worst, ratio);
    }
}
