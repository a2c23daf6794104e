namespace WearWatch.Diagnosis.Facts;

/// <summary>
/// What can be out of alignment, and the look-alikes that produce the same signs. Signs after ISO 8855:
/// toe positive inward per wheel, camber positive with the top leaning out, directions positive to the left.
/// </summary>
public enum Quantity
{
    /// <summary>Sum of both front wheels' toe, deg.</summary>
    FrontTotalToe,
    /// <summary>Sum of both wheels' toe on a rear axle, deg; per axle.</summary>
    RearTotalToe,
    /// <summary>Camber of one wheel, deg; per axle and side.</summary>
    Camber,
    /// <summary>Front camber, left less right, deg.</summary>
    CamberSplit,
    /// <summary>Front caster, left less right, deg.</summary>
    CasterSplit,
    /// <summary>Direction of the rear (driven) axle against the vehicle's centreline, deg, positive to the left.</summary>
    Thrust,
    /// <summary>Angle between the two axles of a tandem, deg: front one's direction less the rear one's.</summary>
    TandemSkew,
    /// <summary>Direction of a trailer's axle group against its kingpin line, deg, positive to the left.</summary>
    TrailerSkew,

    /// <summary>Look-alike: lateral tyre force of construction, N, positive to the left.</summary>
    Conicity,
    /// <summary>Look-alike: a tyre's inflation below (negative) or above its setting, share.</summary>
    Pressure,
    /// <summary>Look-alike: the road's cross-slope, deg.</summary>
    Crown,
    /// <summary>Look-alike: a dragging brake, N, positive when on the left.</summary>
    Drag,
    /// <summary>Look-alike: a worn damper.</summary>
    Damper,
    /// <summary>Look-alike: turning duty mostly one way.</summary>
    Duty,
    /// <summary>Look-alike pair that steering cannot separate and that wears no tyre: zero of the angle sensor, or unequal front toe with its total in order; deg at the steering wheel.</summary>
    SensorZeroOrFrontToeSplit,
}

public static class Quantities
{
    /// <summary>Whether the quantity is an alignment angle (the rest are look-alikes).</summary>
    public static bool IsAngle(this Quantity quantity) => quantity <= Quantity.TrailerSkew;

    /// <summary>Name in JSON, CSV and the contract: <c>front_total_toe</c>.</summary>
    public static string WireName(this Quantity quantity) =>
        string.Concat(quantity.ToString().Select((c, i) => char.IsUpper(c) && i > 0 ? $"_{char.ToLowerInvariant(c)}" : $"{char.ToLowerInvariant(c)}"));

    public static Quantity? FromWireName(string name) =>
        Enum.GetValues<Quantity>().Cast<Quantity?>().FirstOrDefault(q => q!.Value.WireName() == name);

    /// <summary>Unit of the quantity's value.</summary>
    public static string Unit(this Quantity quantity) => quantity switch
    {
        Quantity.Conicity or Quantity.Drag => "N",
        Quantity.Pressure or Quantity.Duty or Quantity.Damper => "1",
        _ => "deg",
    };
}
