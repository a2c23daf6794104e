using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>Steps round the tread, each block worn at one end: drive or brake torque, and duals that do not match.</summary>
public static class HeelToeRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures) => SeenWear.Find(figures, Seen.HeelToe, Build);

    private static Finding Build(VehicleFigures figures, Axle axle, IReadOnlyList<TyreFigures> tyres)
    {
        var oneSided = TyreGroup.CommonSide(tyres) is { } side && figures.Tyres.Any(t => t.Position.Axle == axle.Number && t.Position.Side != side);
        var pressures = tyres.Where(t => RuleLimits.Agrees(t.PressureShare, -1)).Select(t => PressureOffRule.EvidenceOf(figures, t));
        return SeenWear.Of(figures, axle, tyres, FindingKind.HeelToe, "the tread blocks are worn in steps, heel and toe", CheckFor.HeelToe) with
        {
            EvidenceFor = [.. tyres.Select(t => SeenWear.Evidence(figures, t, "heel-and-toe steps seen")), .. pressures],
            Confounders =
            [
                new(axle.Driven ? "Drive torque on block treads does this to every tyre of the axle" : "Braking does this to free-rolling tyres", "The way the steps point: with the turning for drive, against it for braking"),
                .. axle.Duals ? [new("Duals of unequal diameter or pressure drag against each other", "Circumference and cold pressure of both")] : Array.Empty<Confounder>(),
                new("The depth read depends on which end of the block the tip stands", "Read the middle of the block"),
                .. oneSided ? [new("One side alone may slide as well", "Rub the rib edges; total toe of this axle")] : Array.Empty<Confounder>(),
            ],
            Causes = oneSided ? [Quantity.Duty, Quantity.Pressure, figures.Vehicle.ToeOf(axle.Number)] : [Quantity.Duty, Quantity.Pressure],
        };
    }
}

/// <summary>One place of the tread is worn flat: a locked or dragged wheel, or a long stand.</summary>
public static class FlatSpotRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures) => SeenWear.Find(figures, Seen.FlatSpot, (f, axle, tyres) =>
        SeenWear.Of(f, axle, tyres, FindingKind.FlatSpot, "a flat spot was seen", CheckFor.FlatSpot) with
        {
            EvidenceFor = [.. tyres.Select(t => SeenWear.Evidence(f, t, "flat spot seen")), .. Witnesses.Reports(f, Symptom.Shakes, "shakes")],
            Confounders =
            [
                new("Lock-up, or anti-lock that does not release", "The same wheel again on the new tyre; fault memory of the brakes"),
                new("A long stand under load: such a spot mostly runs out", "Look again after a warm drive"),
            ],
        });
}

/// <summary>Ribs that do not lie side by side stand low, or channels run along the rib edges: slow wear of free-rolling tyres.</summary>
public static class RibWearRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures) =>
        SeenWear.Find(figures, Seen.RibDepression, Depressed).Concat(SeenWear.Find(figures, Seen.RiverWear, River, Seen.RibDepression));

    private static Finding Depressed(VehicleFigures figures, Axle axle, IReadOnlyList<TyreFigures> tyres) =>
        SeenWear.Of(figures, axle, tyres, FindingKind.RibWear, "some ribs stand lower than the rest", CheckFor.RibWear) with
        {
            EvidenceFor =
            [
                .. tyres.Select(t => SeenWear.Evidence(figures, t, "low ribs seen")),
                .. tyres.Where(t => RuleLimits.Agrees(t.PressureShare, -1)).Select(t => PressureOffRule.EvidenceOf(figures, t)),
            ],
            Confounders =
            [
                new("Low pressure", "Cold pressure for the load carried"),
                new("Slow wear of a free-rolling tyre", "Rate of wear; others of its kind on the same haul"),
                .. axle.Duals ? [new("Duals that do not match", "Circumference of both")] : Array.Empty<Confounder>(),
                new("Bearing play", "Play at the raised wheel"),
            ],
            Causes = [Quantity.Pressure, Quantity.Duty],
        };

    private static Finding River(VehicleFigures figures, Axle axle, IReadOnlyList<TyreFigures> tyres) =>
        SeenWear.Of(figures, axle, tyres, FindingKind.RibWear, "channels run along the rib edges", CheckFor.RibWear) with
        {
            Sentence = $"{TradeWords.Sentence(TyreGroup.Words(figures.Vehicle, tyres))}: channels run along the rib edges, as on free-rolling tyres that wear slowly; how many mm deep was not measured.",
            EvidenceFor = [.. tyres.Select(t => SeenWear.Evidence(figures, t, "channels along the rib edges seen"))],
            Confounders = [new("It is a mark of slow wear and no fault", "Watch it at the next surveys")],
            Causes = [Quantity.Duty],
        };
}

/// <summary>What the findings of the eye share.</summary>
internal static class SeenWear
{
    public static IEnumerable<Finding> Find(VehicleFigures figures, Seen seen, Func<VehicleFigures, Axle, IReadOnlyList<TyreFigures>, Finding> build, Seen? butNot = null)
    {
        foreach (var axle in figures.Vehicle.Axles.OrderBy(a => a.Number))
        {
            if (butNot is { } other && figures.Tyres.Any(t => t.Position.Axle == axle.Number && t.Seen.Contains(other))) continue;
            var tyres = TyreGroup.On(figures, axle, t => t.Seen.Contains(seen));
            if (tyres.Count > 0) yield return build(figures, axle, tyres);
        }
    }

    public static Finding Of(VehicleFigures figures, Axle axle, IReadOnlyList<TyreFigures> tyres, FindingKind kind, string what, CheckFor check)
    {
        var worst = TyreGroup.Worst(tyres, t => t.RoundVariationMm);
        var figure = worst is null ? "; how many mm deep was not measured" : $"; the depth varies round the tyre with standard deviation {TradeWords.Full(worst.RoundVariationMm!.Value, 2, "mm")}";
        return new Finding
        {
            Kind = kind,
            Axle = axle.Number,
            Side = TyreGroup.CommonSide(tyres),
            Dual = TyreGroup.CommonDual(axle, tyres),
            Sentence = $"{TradeWords.Sentence(TyreGroup.Words(figures.Vehicle, tyres))}: {what}{figure}.",
            EvidenceFor = [],
            FirstCheck = FirstCheck.For(check),
            AlignmentMends = false,
            Caution = kind == FindingKind.FlatSpot ? Cautions.Demount : null,
            Strength = worst?.RoundVariationMm is { } v ? Math.Max(RuleLimits.AloneErrors.Value, RuleLimits.Strength(v)) : RuleLimits.AloneErrors.Value,
        };
    }

    public static Evidence Evidence(VehicleFigures figures, TyreFigures tyre, string what) =>
        new($"{TradeWords.Sentence(TradeWords.Tyre(figures.Vehicle, tyre.Position))}: {what}", tyre.SurveyIds);
}
