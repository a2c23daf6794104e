using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>Both shoulders wear faster than the centre beyond normal: soft or overloaded tyres, hard cornering.</summary>
public static class ShoulderWearRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures) => CentreOrShoulders.Find(figures, FindingKind.ShoulderWear, +1);
}

/// <summary>The centre wears faster than both shoulders beyond normal: hard tyres, drive torque, light load.</summary>
public static class CentreWearRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures) => CentreOrShoulders.Find(figures, FindingKind.CentreWear, -1);
}

internal static class CentreOrShoulders
{
    /// <summary>Findings for sign +1, shoulders over centre, or −1, centre over shoulders.</summary>
    public static IEnumerable<Finding> Find(VehicleFigures figures, FindingKind kind, int sign)
    {
        foreach (var axle in figures.Vehicle.Axles.OrderBy(a => a.Number))
        {
            var tyres = TyreGroup.On(figures, axle, t => Stands(figures, t, sign));
            if (tyres.Count > 0) yield return Build(figures, axle, kind, sign, tyres);
        }
    }

    private static bool Stands(VehicleFigures figures, TyreFigures tyre, int sign) =>
        tyre.ShoulderMmPer1000Km is { } s && s.Value * sign > 0
        && RuleLimits.Stands(s, RuleLimits.ShoulderShare.Value * RuleLimits.NormalRate(figures.Vehicle.Class, tyre), RuleLimits.AloneErrors);

    private static Finding Build(VehicleFigures figures, Axle axle, FindingKind kind, int sign, IReadOnlyList<TyreFigures> tyres)
    {
        var worst = TyreGroup.Worst(tyres, t => t.ShoulderMmPer1000Km)!;
        var (fast, slow) = sign > 0 ? ("shoulders", "centre") : ("centre", "shoulders");
        // Soft tyres carry on their shoulders, hard ones on the centre.
        var pressureFor = tyres.Where(t => RuleLimits.Agrees(t.PressureShare, -sign)).Select(t => PressureOffRule.EvidenceOf(figures, t));
        var pressureAgainst = tyres.Where(t => RuleLimits.Agrees(t.PressureShare, sign)).Select(t => PressureOffRule.EvidenceOf(figures, t));
        return new Finding
        {
            Kind = kind,
            Axle = axle.Number,
            Side = TyreGroup.CommonSide(tyres),
            Dual = TyreGroup.CommonDual(axle, tyres),
            Sentence = $"{TradeWords.Sentence(TyreGroup.Words(figures.Vehicle, tyres))}: the {fast} wear faster than the {slow} beyond normal, worst by "
                + $"{TradeWords.Full(worst.ShoulderMmPer1000Km!.Value * sign, 3, TradeWords.PerDistance)}.",
            EvidenceFor = [.. tyres.Select(t => Of(figures, t, sign, fast)), .. pressureFor],
            EvidenceAgainst = [.. pressureAgainst],
            Confounders = sign > 0
                ? [new("Overload rather than low pressure", "Axle weight against the pressure table"), new("Hard cornering of a high vehicle on its steer tyres", "Rounded edges without a fin; vehicles on the same route")]
                : [new("Drive torque on a lightly laden axle", "Only the driven axle shows it"), new("A rim too wide for the tyre", "Rim width against the tyre's size")],
            Causes = sign > 0 ? [Quantity.Pressure, Quantity.Duty] : [Quantity.Pressure],
            FirstCheck = FirstCheck.For(CheckFor.Pressure),
            AlignmentMends = false,
            Caution = Cautions.Demount,
            Strength = tyres.Max(t => RuleLimits.Strength(t.ShoulderMmPer1000Km!.Value)),
        };
    }

    private static Evidence Of(VehicleFigures figures, TyreFigures tyre, int sign, string fast) =>
        new($"{TradeWords.Sentence(TradeWords.Tyre(figures.Vehicle, tyre.Position))}: {fast} faster by {TradeWords.Full(tyre.ShoulderMmPer1000Km!.Value * sign, 3, TradeWords.PerDistance)}", tyre.SurveyIds);
}
