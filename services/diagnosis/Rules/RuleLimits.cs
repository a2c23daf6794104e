using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>One threshold of the rule set.</summary>
/// <param name="Name">What it bounds.</param>
/// <param name="Value">In <paramref name="Unit"/>.</param>
/// <param name="Unit">Unit of the value; 1 for a share or a ratio.</param>
/// <param name="Source">Where it comes from, or 'common practice, no source', or 'from memory'.</param>
public sealed record RuleLimit(string Name, double Value, string Unit, string Source);

/// <summary>
/// Every threshold the rules use, in one table. A figure counts when it is beyond its limit and also stands
/// above its own noise, so that neither a small sure figure nor a large vague one opens a finding.
/// </summary>
public static class RuleLimits
{
    private const string Practice = "common practice, no source";
    private const string Memory = "from memory";

    // Noise. A ten-tyred vehicle shows some fifty figures, and each is a chance to be wrong: so a figure that stands
    // alone must be surer than two wheels that agree.
    public static readonly RuleLimit AloneErrors = new("a figure standing alone, standard errors", 3.3, "1", "two-sided normal tail 0.1 %, times about fifty figures of a ten-tyred vehicle");
    public static readonly RuleLimit AgreeingErrors = new("two wheels together or the only figure of its kind, standard errors", 2.5, "1", "two-sided normal tail 1.2 %");
    public static readonly RuleLimit MateErrors = new("a mate tyre or second witness that agrees, standard errors", 1.64, "1", "two-sided normal tail 10 %");
    public static readonly RuleLimit MateShare = new("a mate tyre that agrees, share of the worse tyre's figure", 0.4, "1", Practice);

    // Steering. Noticed by a driver at 0.3 to 0.5 N·m, complained of at 0.8 to 1.0.
    public static readonly RuleLimit SteeringPull = new("steering pull", 0.5, "N·m", Memory);
    public static readonly RuleLimit OffCentre = new("off-centre angle", 3, "deg", Practice);

    // Tread. Shares of the normal wear rate of the same class and position.
    public static readonly RuleLimit OneEdgeShare = new("one shoulder over the other beyond normal, share of the normal rate", 0.25, "1", Memory);
    public static readonly RuleLimit ShoulderShare = new("shoulders over centre or centre over shoulders beyond normal, share of the normal rate", 0.30, "1", Memory);
    public static readonly RuleLimit Feather = new("step of the rib edges", 0.3, "mm", Memory);
    public static readonly RuleLimit FeltStep = new("step that a hand rub speaks for", 0.5, "mm", Memory);
    public static readonly RuleLimit FeltStepError = new("standard error of one hand rub", 0.38, "mm", Memory);
    public static readonly RuleLimit RoundVariation = new("depth varying round the tyre, standard deviation", 0.5, "mm", Memory);
    public static readonly RuleLimit FastWear = new("wear rate over the normal rate", 1.5, "1", "drivers alone move wear by up to 35 % (Fleet Maintenance, 10 March 2017); beyond that with a margin from memory");

    // Pressure and match.
    public static readonly RuleLimit Pressure = new("pressure off its setting, share", 0.10, "1", Practice);
    public static readonly RuleLimit PressureFlat = new("pressure below its setting, treated as run flat, share", 0.20, "1", Practice);
    public static readonly RuleLimit DualGap = new("depth gap within a dual pair", 3.175, "mm", "4/32 in (fleet press)");
    public static readonly RuleLimit AxleGap = new("depth gap across an axle", 2, "mm", "vehicle makers' manuals: at most 2 mm before an alignment check");
    public static readonly RuleLimit AxleGapFrance = new("depth gap across an axle, France", 5, "mm", "France, order JORFARTI000038987859; defer to the law in force");

    // Signals beyond straight driving.
    public static readonly RuleLimit BrakeFlip = new("pull that braking takes away, share of the pull", 0.5, "1", Memory);
    public static readonly RuleLimit UnevenReturn = new("steering wheel coming to rest beside straight after turns, both directions together", 1.5, "deg", Memory);
    public static readonly RuleLimit Binding = new("steering wheel stopping short of straight after turns either way", 4, "deg", Memory);
    public static readonly RuleLimit HopShare = new("share of the signal's faster movement between 8 and 16 Hz", 0.5, "1", Memory);
    public static readonly RuleLimit HopTorque = new("steering torque between 8 and 16 Hz, root mean square", 0.2, "N·m", Memory);
    public static readonly RuleLimit HopAcceleration = new("lateral acceleration between 8 and 16 Hz, root mean square", 0.5, "m/s²", Memory);
    public static readonly RuleLimit HopSeconds = new("straight driving behind a figure of wheel hop", 60, "s", Memory);

    // Look-alikes and old evidence.
    public static readonly RuleLimit OneWayTurning = new("share of turning one way that wears like a fault", 0.60, "1", Memory);
    public static readonly RuleLimit ReportDays = new("age at which a driver's report no longer counts", 90, "days", Practice);
    public static readonly RuleLimit WorkshopDays = new("age at which a workshop record no longer counts", 365, "days", "yearly alignment interval, common practice, no source");

    // Normal wear rates where the fleet's own is not known, mm per 1000 km.
    public static readonly RuleLimit NormalCar = new("normal wear rate, car", 0.15, "mm per 1000 km", Memory);
    public static readonly RuleLimit NormalVan = new("normal wear rate, van", 0.18, "mm per 1000 km", Memory);
    public static readonly RuleLimit NormalTruck = new("normal wear rate, truck", 0.05, "mm per 1000 km", "10 000 miles per 1/32 in, line haul (Fleet Maintenance, 10 March 2017)");
    public static readonly RuleLimit NormalBus = new("normal wear rate, bus", 0.11, "mm per 1000 km", Memory);
    public static readonly RuleLimit NormalTrailer = new("normal wear rate, trailer", 0.05, "mm per 1000 km", Memory);

    public static IReadOnlyList<RuleLimit> All { get; } =
    [
        AloneErrors, AgreeingErrors, MateErrors, MateShare, SteeringPull, OffCentre, OneEdgeShare, ShoulderShare, Feather, FeltStep,
        BrakeFlip, UnevenReturn, Binding, HopShare, HopTorque, HopAcceleration, HopSeconds, FeltStepError, RoundVariation, FastWear, Pressure, PressureFlat, DualGap, AxleGap, AxleGapFrance, OneWayTurning, ReportDays,
        WorkshopDays, NormalCar, NormalVan, NormalTruck, NormalBus, NormalTrailer,
    ];

    /// <summary>Normal wear rate of a tyre's class and position, mm per 1000 km: the fleet's where known, else the class's.</summary>
    public static double NormalRate(VehicleClass vehicleClass, TyreFigures? tyre)
    {
        if (tyre?.NormalRateMmPer1000Km is { } normal) return normal;
        var fleet = tyre is { RateMmPer1000Km: { } rate, LogRateRatio: { } ratio } ? rate.Value / Math.Exp(ratio.Value) : double.NaN;
        if (double.IsFinite(fleet) && fleet > 0) return fleet;
        return (vehicleClass switch
        {
            VehicleClass.Car => NormalCar,
            VehicleClass.Van => NormalVan,
            VehicleClass.Bus => NormalBus,
            VehicleClass.Trailer => NormalTrailer,
            _ => NormalTruck,
        }).Value;
    }

    /// <summary>Whether a figure is beyond its limit and at least so many standard errors from zero.</summary>
    public static bool Stands(Estimate figure, double limit, RuleLimit errors) =>
        IsKnown(figure) && Math.Abs(figure.Value) >= limit && Math.Abs(figure.Value) >= errors.Value * figure.StandardError;

    /// <summary>Whether a second figure points the same way as <paramref name="sign"/> and stands above its noise.</summary>
    public static bool Agrees(Estimate? figure, double sign) =>
        figure is { } f && IsKnown(f) && f.Value * sign > 0 && Math.Abs(f.Value) >= MateErrors.Value * f.StandardError;

    /// <summary>Standard errors from zero, 0 to <see cref="StrengthCap"/>.</summary>
    public static double Strength(Estimate figure) =>
        !IsKnown(figure) ? 0 : Math.Min(StrengthCap, Math.Abs(figure.Value) / Math.Max(figure.StandardError, Math.Abs(figure.Value) / StrengthCap + double.Epsilon));

    /// <summary>Strength of what was seen rather than measured, and the most a measured figure can have.</summary>
    public const double StrengthCap = 100;

    private static bool IsKnown(Estimate figure) => double.IsFinite(figure.Value) && double.IsFinite(figure.StandardError);
}
