using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Chassis;
using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Rules;

/// <summary>The rule set. A new rule is a static function from a vehicle's figures to findings, added to <see cref="All"/>.</summary>
public static class GeometryRules
{
    public static IReadOnlyList<Func<VehicleFigures, IEnumerable<Finding>>> All { get; } =
    [
        UnsafeTyreRule.Find,
        BelowLimitRule.Find,
        PressureOffRule.Find,
        DepthGapRule.Find,
        SteeringPullRule.Find,
        OffCentreWheelRule.Find,
        AxleSkewRule.Find,
        OneEdgeWearRule.Find,
        FeatheringRule.Find,
        ShoulderWearRule.Find,
        CentreWearRule.Find,
        CuppingRule.Find,
        DiagonalWearRule.Find,
        FastWearRule.Find,
        ChangeRule.Find,
        HeelToeRule.Find,
        FlatSpotRule.Find,
        RibWearRule.Find,
        BrakeDragRule.Find,
        UnevenReturnRule.Find,
        SteeringBindsRule.Find,
        WheelHopRule.Find,
        OneWayDutyRule.Find,
    ];

    /// <summary>All findings on one vehicle: by safety, then strength, then place; the order of the input does not matter.</summary>
    public static IReadOnlyList<Finding> Find(VehicleFigures figures)
    {
        var check = ChassisCheck.Of(figures.Vehicle, figures.Tolerances);
        var taken = figures with { Vehicle = check.Vehicle };
        return InOrder(taken, All.SelectMany(rule => rule(taken)).Select(f => Doubtful(f, check.Problems)));
    }

    /// <summary>A finding that names angles says where the chassis data contradict themselves.</summary>
    private static Finding Doubtful(Finding finding, IReadOnlyList<CannotTell> problems) =>
        problems.Count == 0 || !finding.Causes.Any(c => c.IsAngle())
            ? finding
            : finding with { Confounders = [.. finding.Confounders, .. problems.Select(p => new Confounder($"The chassis data leave open {p.What}: {p.Because}", $"Record {p.WouldHelp}"))] };

    /// <summary>Findings in the order people read them.</summary>
    public static IReadOnlyList<Finding> InOrder(VehicleFigures figures, IEnumerable<Finding> findings) =>
        [.. findings
            .OrderBy(f => SafetyRank(figures, f))
            .ThenByDescending(f => f.Strength)
            .ThenBy(f => f.Axle ?? 0).ThenBy(f => f.Kind).ThenBy(f => f.Side).ThenBy(f => f.Dual)];

    /// <summary>0 is most urgent: damage, then depth below the limit, a soft tyre, an unlawful gap, a pull that must be held.</summary>
    private static int SafetyRank(VehicleFigures figures, Finding finding) => finding.Kind switch
    {
        FindingKind.UnsafeTyre => 0,
        FindingKind.BelowLimit => 1,
        FindingKind.PressureOff when finding.Caution is not null => 2,
        FindingKind.DepthGap when Gap(figures, finding) => 3,
        FindingKind.SteeringPull => 4,
        _ => 5,
    };

    private static bool Gap(VehicleFigures figures, Finding finding) =>
        figures.Vehicle.AxleAt(finding.Axle ?? 0) is { } axle && DepthGapRule.AcrossAxle(figures, axle) is { } gap && DepthGapRule.BreaksLaw(figures, gap);
}
