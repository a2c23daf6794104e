using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>Tyres lose depth well above the normal rate of their class, axle and position.</summary>
public static class FastWearRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        var axles = figures.Vehicle.Axles.OrderBy(a => a.Number)
            .Select(a => (Axle: a, Tyres: TyreGroup.On(figures, a, Stands))).Where(x => x.Tyres.Count > 0).ToList();
        var known = figures.Tyres.Where(t => t is { LogRateRatio: not null, RateBorrowed: false }).ToList();
        var whole = axles.Count > 1 && known.All(Stands);
        if (whole)
            yield return Build(figures, null, [.. known.OrderBy(t => t.Position)]);
        else
            foreach (var (axle, tyres) in axles) yield return Build(figures, axle, tyres);
    }

    /// <summary>Probability of an angle from which fast wear is put down to it, and the extra wear it must bring at the place.</summary>
    private const double ExplainedFrom = 0.5, ExtraWear = 0.2;

    /// <summary>
    /// A rule sees no more than that tyres wear fast; where the verdict puts it down to an angle, the finding says so, and that an
    /// alignment mends it.
    /// </summary>
    public static Finding Explained(Finding finding, VehicleFigures figures, Verdict verdict)
    {
        if (finding.Kind != FindingKind.FastWear || verdict.Causes.FirstOrDefault(c => c.Quantity.IsAngle()) is not { } angle || angle.Probability < ExplainedFrom) return finding;
        var extra = figures.Vehicle.Positions().Where(p => (finding.Axle ?? p.Axle) == p.Axle && (finding.Side ?? p.Side) == p.Side)
            .Select(p => verdict.Effects.Sum(e => e.Probability * e.ExtraWear.GetValueOrDefault(p))).DefaultIfEmpty(0).Max();
        return extra < ExtraWear ? finding : finding with
        {
            Causes = [angle.Quantity, .. finding.Causes.Where(q => q != angle.Quantity)],
            EvidenceFor = [.. finding.EvidenceFor, new($"Both witnesses together put it down to {OddsWords.Name(angle)} with probability {TradeWords.Number(angle.Probability, 2)}, which wears here about {TradeWords.Number(1 + extra, 1)} times as fast as normal", [])],
            AlignmentMends = true,
        };
    }

    private static bool Stands(TyreFigures tyre) =>
        tyre is { RateBorrowed: false, LogRateRatio: { Value: > 0 } ratio } && RuleLimits.Stands(ratio, Math.Log(RuleLimits.FastWear.Value), RuleLimits.AloneErrors);

    /// <summary>The axle is null when every measured tyre of the vehicle wears fast.</summary>
    private static Finding Build(VehicleFigures figures, Axle? axle, IReadOnlyList<TyreFigures> tyres)
    {
        var vehicle = figures.Vehicle;
        var worst = TyreGroup.Worst(tyres, t => t.LogRateRatio)!;
        var ratio = worst.LogRateRatio!.Value;
        var slides = axle is null ? [] : Slides(figures, axle).ToList();
        var rate = worst.RateMmPer1000Km is { } r ? $", {TradeWords.Full(r, 3, TradeWords.PerDistance)}" : "";
        IReadOnlyList<Quantity> causes = axle is null ? [Quantity.Duty, Quantity.Pressure]
            // One member of a dual pair alone carries more than its share, or less: pressure and diameter before anything else.
            : slides.Count == 0 && OneMember(figures, axle, tyres) ? [Quantity.Pressure, Quantity.Duty]
            : slides.Count > 0 ? [vehicle.ToeOf(axle.Number), Quantity.Camber, Quantity.Duty]
            : [Quantity.Duty, Quantity.Pressure, vehicle.ToeOf(axle.Number)];
        var others = axle is null ? [] : figures.Tyres.Where(t => t.Position.Axle != axle.Number && Stands(t)).ToList();
        return new Finding
        {
            Kind = FindingKind.FastWear,
            Axle = axle?.Number,
            Side = axle is null ? null : TyreGroup.CommonSide(tyres),
            Dual = axle is null ? null : TyreGroup.CommonDual(axle, tyres),
            Sentence = $"{(axle is null ? "Every measured tyre wears fast" : TradeWords.Sentence(TyreGroup.Words(vehicle, tyres)) + (tyres.Count == 1 ? " wears fast" : " wear fast"))}: "
                + $"worst {TradeWords.Number(Math.Exp(ratio.Value), 1)} times the normal rate (90 % {TradeWords.Number(Math.Exp(ratio.Low), 1)} to {TradeWords.Number(Math.Exp(ratio.High), 1)}){rate}.",
            EvidenceFor = [.. tyres.Select(t => Of(figures, t)), .. slides],
            EvidenceAgainst = others.Count == 0 ? [] : [new("Tyres of other axles wear fast too, which speaks for duty rather than this axle", [.. others.SelectMany(t => t.SurveyIds).Distinct()])],
            Confounders =
            [
                new("Driver, route and load move wear by up to a third", "Vehicles on the same route; the same vehicle with another driver"),
                new("Pattern or compound differs from the fleet's usual one", "Make and pattern on the sidewall"),
                new("The first 1 to 2 mm of a new tyre wear atypically", "One more survey"),
            ],
            Causes = causes,
            FirstCheck = axle is not null && slides.Count == 0 && OneMember(figures, axle, tyres) ? FirstCheck.For(CheckFor.DepthMatch) : FirstCheck.For(CheckFor.FastWear),
            AlignmentMends = axle is not null && vehicle.Mends(axle, causes[0]),
            Strength = tyres.Max(t => RuleLimits.Strength(t.LogRateRatio!.Value)),
        };
    }

    /// <summary>Every fast tyre has a mate in its pair that was measured and is not fast.</summary>
    private static bool OneMember(VehicleFigures figures, Axle axle, IReadOnlyList<TyreFigures> tyres) =>
        axle.Duals && tyres.All(t =>
            figures.At(t.Position with { Dual = t.Position.Dual == Dual.Outer ? Dual.Inner : Dual.Outer }) is { RateBorrowed: false, LogRateRatio: not null } mate && !tyres.Contains(mate));

    /// <summary>Edge slope or feather of the axle that says its tyres slide sideways.</summary>
    private static IEnumerable<Evidence> Slides(VehicleFigures figures, Axle axle)
    {
        foreach (var dual in WheelPair.Members(axle))
        {
            var edge = WheelPair.Edge(figures, axle, dual);
            if (edge.Pattern != PairPattern.None) yield return Witnesses.EdgeOf(figures.Vehicle, edge.WorseTyre!);
            var feather = WheelPair.Feather(figures, axle, dual);
            if (feather.Pattern != PairPattern.None) yield return Witnesses.FeatherOf(figures.Vehicle, feather.WorseTyre!);
        }
    }

    private static Evidence Of(VehicleFigures figures, TyreFigures tyre)
    {
        var ratio = tyre.LogRateRatio!.Value;
        return new($"{TradeWords.Sentence(TradeWords.Tyre(figures.Vehicle, tyre.Position))}: {TradeWords.Number(Math.Exp(ratio.Value), 2)} times normal (90 % {TradeWords.Number(Math.Exp(ratio.Low), 2)} to {TradeWords.Number(Math.Exp(ratio.High), 2)})", tyre.SurveyIds);
    }
}
