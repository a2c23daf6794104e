using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>Depth varies round the tyre in scallops: the wheel hops or shakes.</summary>
public static class CuppingRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        foreach (var axle in figures.Vehicle.Axles.OrderBy(a => a.Number))
        {
            var tyres = TyreGroup.On(figures, axle, t => Varies(t) && !DiagonalWearRule.IsDiagonal(figures, axle, t));
            if (tyres.Count > 0) yield return Build(figures, axle, tyres);
        }
    }

    /// <summary>Cupping seen, or depth varying round the tyre that no flat spot or heel-and-toe step explains.</summary>
    internal static bool Varies(TyreFigures tyre) =>
        tyre.Seen.Contains(Seen.Cupped)
        || (MeasuredToVary(tyre) && !tyre.Seen.Contains(Seen.FlatSpot) && !tyre.Seen.Contains(Seen.HeelToe));

    internal static bool MeasuredToVary(TyreFigures tyre) =>
        tyre.RoundVariationMm is { Value: > 0 } v && RuleLimits.Stands(v, RuleLimits.RoundVariation.Value, RuleLimits.AloneErrors);

    internal static Evidence EvidenceOf(VehicleFigures figures, TyreFigures tyre)
    {
        var seen = tyre.Seen.Contains(Seen.Cupped) ? "cupping seen" : "";
        var measured = tyre.RoundVariationMm is { } v ? $"depth varies round the tyre by {TradeWords.Full(v, 2, "mm")}" : "";
        return new($"{TradeWords.Sentence(TradeWords.Tyre(figures.Vehicle, tyre.Position))}: {string.Join(", ", new[] { seen, measured }.Where(s => s.Length > 0))}", tyre.SurveyIds);
    }

    private static Finding Build(VehicleFigures figures, Axle axle, IReadOnlyList<TyreFigures> tyres)
    {
        var worst = TyreGroup.Worst(tyres, t => t.RoundVariationMm);
        var what = tyres.Any(t => t.Seen.Contains(Seen.Cupped)) ? "cupping was seen" : "the depth varies round the tyre";
        var figure = worst is null ? "; how many mm it varies round the tyre was not measured" : $", standard deviation {TradeWords.Full(worst.RoundVariationMm!.Value, 2, "mm")}";
        var freeRolling = figures.Vehicle.FreeRolling(axle);
        var hop = WheelHopRule.EvidenceOf(figures);
        var steps = tyres.Where(t => t.Seen.Contains(Seen.FlatSpot) || t.Seen.Contains(Seen.HeelToe)).ToList();
        return new Finding
        {
            Kind = FindingKind.Cupping,
            Axle = axle.Number,
            Side = TyreGroup.CommonSide(tyres),
            Dual = TyreGroup.CommonDual(axle, tyres),
            Sentence = $"{TradeWords.Sentence(TyreGroup.Words(figures.Vehicle, tyres))}: {what}{figure}.",
            EvidenceFor = [.. tyres.Select(t => EvidenceOf(figures, t)), .. hop is null ? Array.Empty<Evidence>() : [hop], .. Witnesses.Reports(figures, Symptom.Shakes, "shakes")],
            EvidenceAgainst = [.. steps.Select(t => new Evidence("A flat spot or heel-and-toe step was seen too and moves the reading", t.SurveyIds))],
            Confounders =
            [
                new("Balance, run-out or a worn hub bearing", "Spin the raised wheel; play at the rim"),
                .. freeRolling ? [new("Toe can start cupping on a free-rolling rear axle", "The fin of the rib edges; total toe of this axle")] : Array.Empty<Confounder>(),
            ],
            Causes = freeRolling ? [Quantity.Damper, figures.Vehicle.ToeOf(axle.Number)] : [Quantity.Damper],
            FirstCheck = FirstCheck.For(CheckFor.WearRoundTyre, figures.Vehicle, axle),
            AlignmentMends = false,
            Caution = Cautions.Under(axle),
            Strength = tyres.Max(t => t.RoundVariationMm is { } v ? RuleLimits.Strength(v) : RuleLimits.AloneErrors.Value),
        };
    }
}

/// <summary>A wipe across and round the tread of free-rolling tyres: toe under light load, bearing end play, slack location.</summary>
public static class DiagonalWearRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        foreach (var axle in figures.Vehicle.Axles.OrderBy(a => a.Number))
        {
            var tyres = TyreGroup.On(figures, axle, t => IsDiagonal(figures, axle, t));
            if (tyres.Count > 0) yield return Build(figures, axle, tyres);
        }
    }

    /// <summary>Free-rolling rear tyre that varies round its circumference and slides sideways as well.</summary>
    internal static bool IsDiagonal(VehicleFigures figures, Axle axle, TyreFigures tyre) =>
        figures.Vehicle.FreeRolling(axle)
        && CuppingRule.MeasuredToVary(tyre) && !tyre.Seen.Contains(Seen.FlatSpot)
        && (EdgeStands(figures, tyre) || FeatherStands(tyre));

    private static bool EdgeStands(VehicleFigures figures, TyreFigures tyre) =>
        tyre.EdgeSlopeMmPer1000Km is { } e
        && RuleLimits.Stands(e, RuleLimits.OneEdgeShare.Value * RuleLimits.NormalRate(figures.Vehicle.Class, tyre), RuleLimits.AgreeingErrors);

    private static bool FeatherStands(TyreFigures tyre) =>
        FeatherReading.Of(tyre) is { } f && RuleLimits.Stands(f, RuleLimits.Feather.Value, RuleLimits.AgreeingErrors);

    private static Finding Build(VehicleFigures figures, Axle axle, IReadOnlyList<TyreFigures> tyres)
    {
        var worst = TyreGroup.Worst(tyres, t => t.RoundVariationMm)!;
        return new Finding
        {
            Kind = FindingKind.DiagonalWear,
            Axle = axle.Number,
            Side = TyreGroup.CommonSide(tyres),
            Dual = TyreGroup.CommonDual(axle, tyres),
            Sentence = $"{TradeWords.Sentence(TyreGroup.Words(figures.Vehicle, tyres))}: wiped across and round the tread, depth varying round the tyre with standard deviation {TradeWords.Full(worst.RoundVariationMm!.Value, 2, "mm")}.",
            EvidenceFor =
            [
                .. tyres.Select(t => CuppingRule.EvidenceOf(figures, t)),
                .. tyres.Where(t => EdgeStands(figures, t)).Select(t => Witnesses.EdgeOf(figures.Vehicle, t)),
                .. tyres.Where(FeatherStands).Select(t => Witnesses.FeatherOf(figures.Vehicle, t)),
            ],
            EvidenceAgainst = [.. Witnesses.Workshop(figures).Against],
            Confounders =
            [
                new("Bearing end play or slack axle location", "Play at the raised wheel; bushes under a bar"),
                new("Low pressure or much running empty", "Cold pressure; share of empty kilometres"),
            ],
            Causes = [figures.Vehicle.ToeOf(axle.Number), Quantity.Pressure, Quantity.Damper],
            FirstCheck = FirstCheck.For(CheckFor.DiagonalWear, figures.Vehicle, axle),
            AlignmentMends = figures.Vehicle.Mends(axle, figures.Vehicle.ToeOf(axle.Number)),
            Caution = Cautions.Under(axle),
            Strength = tyres.Max(t => RuleLimits.Strength(t.RoundVariationMm!.Value)),
        };
    }
}
