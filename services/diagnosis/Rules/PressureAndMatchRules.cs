using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>Inflation away from its setting.</summary>
public static class PressureOffRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        foreach (var axle in figures.Vehicle.Axles.OrderBy(a => a.Number))
            foreach (var low in new[] { true, false })
            {
                var tyres = TyreGroup.On(figures, axle, t => t.PressureShare is { } p && p.Value < 0 == low
                    && RuleLimits.Stands(p, RuleLimits.Pressure.Value, RuleLimits.AgreeingErrors));
                if (tyres.Count > 0) yield return Build(figures, axle, tyres, low);
            }
    }

    internal static Evidence EvidenceOf(VehicleFigures figures, TyreFigures tyre)
    {
        var share = tyre.PressureShare!.Value;
        return new($"{TradeWords.Sentence(TradeWords.Tyre(figures.Vehicle, tyre.Position))}: pressure {Off(share)}", tyre.SurveyIds);
    }

    private static string Off(Estimate share) =>
        $"{TradeWords.Full(share * (100 * Witnesses.SignOf(share.Value)), 0, "%")} {(share.Value < 0 ? "below" : "above")} its setting";

    private static Finding Build(VehicleFigures figures, Axle axle, IReadOnlyList<TyreFigures> tyres, bool low)
    {
        var worst = TyreGroup.Worst(tyres, t => t.PressureShare)!;
        var flat = low && -worst.PressureShare!.Value.Value >= RuleLimits.PressureFlat.Value;
        return new Finding
        {
            Kind = FindingKind.PressureOff,
            Axle = axle.Number,
            Side = TyreGroup.CommonSide(tyres),
            Dual = TyreGroup.CommonDual(axle, tyres),
            Sentence = $"{TradeWords.Sentence(TyreGroup.Words(figures.Vehicle, tyres))}: pressure is {(tyres.Count > 1 ? "at worst " : "")}{Off(worst.PressureShare!.Value)}.",
            EvidenceFor = [.. tyres.Select(t => EvidenceOf(figures, t))],
            Confounders =
            [
                new("A warm tyre reads 10 to 20 % above its cold pressure", "Read it cold"),
                new("The setting on file may not be the one for this load", "Axle weight against the pressure table"),
            ],
            Causes = [Quantity.Pressure],
            FirstCheck = FirstCheck.For(CheckFor.Pressure),
            AlignmentMends = false,
            Caution = flat ? Cautions.RunFlat : null,
            Strength = tyres.Max(t => RuleLimits.Strength(t.PressureShare!.Value)),
        };
    }
}

/// <summary>Tyres that work together differ in depth: within a dual pair, or across an axle.</summary>
public static class DepthGapRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        foreach (var axle in figures.Vehicle.Axles.OrderBy(a => a.Number))
        {
            if (axle.Duals)
                foreach (var side in new[] { Side.Left, Side.Right })
                    if (Gap(figures, new(axle.Number, side, Dual.Outer), new(axle.Number, side, Dual.Inner)) is { } within && RuleLimits.Stands(within, RuleLimits.DualGap.Value, RuleLimits.AgreeingErrors))
                        yield return WithinDual(figures, axle, side, within);
            if (AcrossAxle(figures, axle) is { } across && RuleLimits.Stands(across, RuleLimits.AxleGap.Value, RuleLimits.AgreeingErrors))
                yield return Across(figures, axle, across);
        }
    }

    /// <summary>Remaining depth left less right, mm; of the outer tyres where there are duals.</summary>
    internal static Estimate? AcrossAxle(VehicleFigures figures, Axle axle)
    {
        var dual = axle.Duals ? Dual.Outer : Dual.Single;
        return Gap(figures, new(axle.Number, Side.Left, dual), new(axle.Number, Side.Right, dual));
    }

    /// <summary>Whether the gap breaks the law of the depot's country (France: 5 mm across an axle).</summary>
    internal static bool BreaksLaw(VehicleFigures figures, Estimate gap) =>
        figures.Depot.Jurisdiction is "FR" && Math.Abs(gap.Value) > RuleLimits.AxleGapFrance.Value;

    private static Estimate? Gap(VehicleFigures figures, Position a, Position b) =>
        figures.At(a)?.RemainingMm is { } first && figures.At(b)?.RemainingMm is { } second ? first - second : null;

    private static Finding WithinDual(VehicleFigures figures, Axle axle, Side side, Estimate gap)
    {
        var (outer, inner) = (figures.At(new(axle.Number, side, Dual.Outer))!, figures.At(new(axle.Number, side, Dual.Inner))!);
        var shallow = gap.Value < 0 ? "outer" : "inner";
        return Build(figures, axle, side, gap, [outer, inner],
            $"The {side.Word()} duals of axle {axle.Number} differ in depth by {TradeWords.Full(gap * Witnesses.SignOf(gap.Value), 1, "mm")}, the {shallow} being shallower; at most {TradeWords.Number(RuleLimits.DualGap.Value, 1)} mm (4/32 in) is usual.",
            [new("Unequal pressure within the pair wears one member faster", "Cold pressure of both"), new("Diameters differ though depths agree, or the reverse", "Circumference or a straightedge across the pair")]);
    }

    private static Finding Across(VehicleFigures figures, Axle axle, Estimate gap)
    {
        var dual = axle.Duals ? Dual.Outer : Dual.Single;
        var (left, right) = (figures.At(new(axle.Number, Side.Left, dual))!, figures.At(new(axle.Number, Side.Right, dual))!);
        var shallow = gap.Value < 0 ? Side.Left : Side.Right;
        var law = BreaksLaw(figures, gap) ? $", beyond the {TradeWords.Number(RuleLimits.AxleGapFrance.Value, 0)} mm that French law allows" : $"; makers allow {TradeWords.Number(RuleLimits.AxleGap.Value, 0)} mm before an alignment check";
        return Build(figures, axle, null, gap, [left, right],
            $"The {TradeWords.Tyres(figures.Vehicle, axle.Number, dual)} differ in depth by {TradeWords.Full(gap * Witnesses.SignOf(gap.Value), 1, "mm")}, the {shallow.Word()} being shallower{law}.",
            [new("One tyre was fitted later than its mate", "Fitting records"), new("The gap itself can pull the vehicle and lean the axle", "Match the tyres, then judge pull and camber")]);
    }

    private static Finding Build(VehicleFigures figures, Axle axle, Side? side, Estimate gap, IReadOnlyList<TyreFigures> pair, string sentence, IReadOnlyList<Confounder> confounders) => new()
    {
        Kind = FindingKind.DepthGap,
        Axle = axle.Number,
        Side = side,
        Sentence = sentence,
        EvidenceFor = [.. pair.Select(t => new Evidence($"{TradeWords.Sentence(TradeWords.Tyre(figures.Vehicle, t.Position))}: {TradeWords.Full(t.RemainingMm!.Value, 1, "mm")}", t.SurveyIds))],
        Confounders = confounders,
        FirstCheck = FirstCheck.For(CheckFor.DepthMatch),
        AlignmentMends = false,
        Caution = Cautions.Demount,
        Strength = RuleLimits.Strength(gap),
    };
}
