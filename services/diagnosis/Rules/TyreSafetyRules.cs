using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>
/// A reading below the legal limit. Safety does not wait for certainty: the reading counts although it may lie within its
/// noise, and the sentence says so.
/// </summary>
public static class BelowLimitRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        foreach (var tyre in figures.Tyres.OrderBy(t => t.Position))
            if (tyre is { RemainingMm: { } depth, LimitMm: { } limit } && depth.Value < limit)
                yield return Build(figures, tyre, depth, limit);
    }

    private static Finding Build(VehicleFigures figures, TyreFigures tyre, Estimate depth, double limit)
    {
        var groove = tyre.GoverningGroove is > 0 and var g ? $" in groove {g} from the outboard side" : "";
        var sure = depth.High < limit ? "" : "; the gauge's noise reaches above the limit, measure it again at once";
        var source = tyre.LimitSource is { } s ? $" ({s})" : "";
        return new Finding
        {
            Kind = FindingKind.BelowLimit,
            Axle = tyre.Position.Axle,
            Side = tyre.Position.Side,
            Dual = tyre.Position.Dual == Dual.Single ? null : tyre.Position.Dual,
            Sentence = $"The {TradeWords.Tyre(figures.Vehicle, tyre.Position)} reads {TradeWords.Full(depth, 1, "mm")}{groove}, below the limit of {TradeWords.Number(limit, 1)} mm{source}{sure}.",
            EvidenceFor = [new($"Remaining depth {TradeWords.Full(depth, 1, "mm")}", tyre.SurveyIds)],
            Confounders = depth.High < limit ? [] : [new("Noise of the gauge", "Three places round the tyre, off the wear bars")],
            FirstCheck = FirstCheck.For(CheckFor.UnsafeTyre),
            AlignmentMends = false,
            Caution = Cautions.DoNotDrive,
            Strength = RuleLimits.Strength(new(limit - depth.Value, depth.StandardError)),
        };
    }
}

/// <summary>Damage seen on a tyre that takes it off the road.</summary>
public static class UnsafeTyreRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        foreach (var tyre in figures.Tyres.OrderBy(t => t.Position))
        {
            var seen = tyre.Seen.Distinct().Where(s => s is Seen.Cord or Seen.Cut or Seen.Bulge or Seen.Unsafe).Order().ToList();
            if (seen.Count == 0) continue;
            var words = string.Join(", ", seen.Select(Word));
            var depth = tyre.RemainingMm is { } mm ? $", remaining depth {TradeWords.Full(mm, 1, "mm")}" : ", remaining depth in mm not measured";
            yield return new Finding
            {
                Kind = FindingKind.UnsafeTyre,
                Axle = tyre.Position.Axle,
                Side = tyre.Position.Side,
                Dual = tyre.Position.Dual == Dual.Single ? null : tyre.Position.Dual,
                Sentence = $"The {TradeWords.Tyre(figures.Vehicle, tyre.Position)} is not fit for the road: {words} at the last survey{depth}.",
                EvidenceFor = [new($"Seen: {words}", tyre.SurveyIds)],
                FirstCheck = FirstCheck.For(CheckFor.UnsafeTyre),
                AlignmentMends = false,
                Caution = Cautions.DoNotDrive,
                Strength = RuleLimits.StrengthCap,
            };
        }
    }

    private static string Word(Seen seen) => seen switch
    {
        Seen.Cord => "cord showing",
        Seen.Cut => "a cut",
        Seen.Bulge => "a bulge",
        _ => "marked unsafe",
    };
}
