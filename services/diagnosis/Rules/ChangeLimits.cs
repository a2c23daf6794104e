using WearWatch.Diagnosis.Changes;

namespace WearWatch.Diagnosis.Rules;

/// <summary>From what size on a change is told as a finding; smaller ones stay in the list of changes.</summary>
public static class ChangeLimits
{
    public static readonly RuleLimit SteeringPull = new("change of steering pull", 0.27, "N·m", "drivers notice 0.3 (from memory), less a tenth for the error of the figure");
    public static readonly RuleLimit TorsionBarShare = new("the same where the torsion bar alone was logged, share of it", 0.5, "1", "from memory");
    public static readonly RuleLimit OffCentre = new("change of the off-centre angle", 1.8, "deg", "2 deg at the wheel are seen (common practice, no source), less a tenth for the error of the figure");
    public static readonly RuleLimit WearRate = new("change of an axle's wear rate, share of the normal rate", 0.5, "1", "drivers alone move wear by up to 35 % (Fleet Maintenance, 10 March 2017); beyond that with a margin from memory");
    public static readonly RuleLimit Days = new("age at which a change is no longer told", 365, "days", "yearly alignment interval, common practice, no source");

    public static IReadOnlyList<RuleLimit> All { get; } = [SteeringPull, TorsionBarShare, OffCentre, WearRate, Days];

    /// <summary>Whether a change is large, sure and recent enough to be told. Only these count as alarms.</summary>
    public static bool IsPublished(VehicleFigures figures, DatedChange change)
    {
        var floor = change.Quantity switch
        {
            ChangeQuantity.OffCentreAngle => OffCentre.Value,
            ChangeQuantity.WearRate => WearRate.Value,
            _ => SteeringPull.Value * (figures.Steering is { TorqueIncludesAssist: false } ? TorsionBarShare.Value : 1),
        };
        var age = (figures.AsOf.ToDateTime(TimeOnly.MaxValue, DateTimeKind.Utc) - change.To.UtcDateTime).TotalDays;
        return age is >= -1 and var days && days <= Days.Value && RuleLimits.Stands(change.Size, floor, RuleLimits.AloneErrors);
    }
}
