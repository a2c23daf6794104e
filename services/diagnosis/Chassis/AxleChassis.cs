using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Chassis;

/// <summary>What an axle does and how its wheels are guided: the table's row with the operator's own axle facts over it.</summary>
public sealed record AxleChassis
{
    public required Axle Axle { get; init; }
    public required SuspensionRow Row { get; init; }
    public required bool Steers { get; init; }
    /// <summary>As in 'a live beam axle on air springs'.</summary>
    public required string Called { get; init; }
    public required Setting Toe { get; init; }
    public required Setting Camber { get; init; }
    public required Setting Caster { get; init; }
    public required Setting Direction { get; init; }
    public required RunningToeRow RunningToe { get; init; }
    /// <summary>mm; null where neither the axle nor the class tells.</summary>
    public double? ScrubRadiusMm { get; init; }
    /// <summary>mm; null where neither the axle nor the class tells.</summary>
    public double? TrailMm { get; init; }

    /// <param name="vehicle">Vehicle as taken by <see cref="ChassisCheck"/>.</param>
    /// <param name="axle">One of its axles.</param>
    /// <param name="steers">It steers, or stands where the steer axle does.</param>
    public static AxleChassis Of(Vehicle vehicle, Axle axle, bool steers)
    {
        var row = SuspensionTable.Of(axle.Suspension);
        var steering = steers ? SteeringGeometry.Of(vehicle.Class) : null;
        var kind = row.Called.StartsWith("a beam", StringComparison.Ordinal) ? "a " + (axle.Driven ? "live " : "dead ") + row.Called[2..] : row.Called;
        return new AxleChassis
        {
            Axle = axle,
            Row = row,
            Steers = steers,
            Called = kind,
            Toe = Own(steers ? row.SteeredToe : row.FixedToe, axle.ToeAdjustable),
            Camber = Own(row.Camber, axle.CamberAdjustable),
            Caster = Own(row.Caster, axle.CasterAdjustable),
            Direction = row.Direction,
            RunningToe = SteeringGeometry.RunningToeOf(steers, axle.Driven, row.Beam),
            ScrubRadiusMm = axle.ScrubRadiusMm ?? steering?.ScrubRadiusMm,
            TrailMm = axle.TrailMm ?? steering?.TrailMm,
        };
    }

    /// <summary>How an angle of this axle is set; null for what is no angle of an axle.</summary>
    public Setting? SettingOf(Quantity quantity) => quantity switch
    {
        Quantity.FrontTotalToe or Quantity.RearTotalToe => Toe,
        Quantity.Camber or Quantity.CamberSplit => Camber,
        Quantity.CasterSplit => Caster,
        Quantity.Thrust or Quantity.TandemSkew or Quantity.TrailerSkew => Direction,
        _ => null,
    };

    /// <summary>The operator's word stands above the table's; the table's words stay.</summary>
    private static Setting Own(Setting usual, bool? can) => can switch
    {
        null => usual,
        true => usual with { CanBeSet = true, Where = usual.Where.Length > 0 ? usual.Where : "where this vehicle provides for it" },
        false => usual with { CanBeSet = false },
    };
}
