using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Unusual;

/// <summary>One figure by which vehicles of a class are compared.</summary>
/// <param name="Name">In words; the key in a stored fit.</param>
/// <param name="Unit">Unit of the figure.</param>
/// <param name="Decimals">Decimals in a sentence.</param>
/// <param name="Floor">Least spread that a class is granted, in the unit: a difference below what can be measured is not unusual (from memory).</param>
/// <param name="NamedBy">Findings that already speak of this figure.</param>
/// <param name="Front">True for the steer axle's tyres, false for the others', null for the steering signals.</param>
/// <param name="Of">The figure of one vehicle; null when not known.</param>
public sealed record UnusualFigure(string Name, string Unit, int Decimals, double Floor, IReadOnlyList<FindingKind> NamedBy, bool? Front, Func<VehicleFigures, Estimate?> Of);

/// <summary>The figures by which vehicles are compared: both witnesses, steer axles and other axles apart, whatever the number of axles.</summary>
public static class UnusualFigures
{
    private static readonly FindingKind[] Slides = [FindingKind.OneEdgeWear, FindingKind.Feathering, FindingKind.AxleSkew, FindingKind.DiagonalWear];

    public static IReadOnlyList<UnusualFigure> All { get; } =
    [
        new("steering pull", "N·m", 2, 0.05, [FindingKind.SteeringPull], null, f => f.Steering?.SteeringPullNm),
        new("off-centre angle", "deg", 1, 0.2, [FindingKind.OffCentreWheel], null, f => f.Steering?.OffCentreDeg),
        new("extra steering pull while braking", "N·m", 2, 0.05, [FindingKind.SteeringPull, FindingKind.BrakeDrag], null, f => f.Steering?.BrakePullNm),
        new("extra steering pull under drive", "N·m", 2, 0.05, [FindingKind.SteeringPull], null, f => f.Steering?.DrivePullNm),
        .. OfTyres(true),
        .. OfTyres(false),
    ];

    private static IEnumerable<UnusualFigure> OfTyres(bool front)
    {
        var tyres = front ? "steer tyres" : "other tyres";
        UnusualFigure Figure(string what, string unit, int decimals, double floor, FindingKind[] named, Func<VehicleFigures, Estimate?> of) =>
            new($"{what} of the {tyres}", unit, decimals, floor, named, front, of);

        yield return Figure("wear over the normal rate (natural log)", "1", 2, 0.05, [FindingKind.FastWear, .. Slides], f => MeanOf(Tyres(f, front).Select(t => t.RateBorrowed ? null : t.LogRateRatio)));
        yield return Figure("wear left less right (natural log)", "1", 2, 0.05, [FindingKind.FastWear, .. Slides], f => LeftLessRight(f, front, t => t.RateBorrowed ? null : t.LogRateRatio));
        yield return Figure("one-edge wear shared by both sides", TradeWords.PerDistance, 3, 0.002, Slides, f => MeanOf(Pairs(f, front, WheelPair.Edge).Select(p => p.Shared)));
        yield return Figure("one-edge wear toward one side of the vehicle", TradeWords.PerDistance, 3, 0.002, Slides, f => MeanOf(Pairs(f, front, WheelPair.Edge).Select(p => p.Direction)));
        yield return Figure("shoulder over centre wear", TradeWords.PerDistance, 3, 0.002, [FindingKind.ShoulderWear, FindingKind.CentreWear], f => MeanOf(Tyres(f, front).Select(t => t.ShoulderMmPer1000Km)));
        yield return Figure("greatest depth variation round a tyre", "mm", 2, 0.05, [FindingKind.Cupping, FindingKind.DiagonalWear, FindingKind.FlatSpot, FindingKind.HeelToe], f => Greatest(Tyres(f, front).Select(t => t.RoundVariationMm)));
        yield return Figure("feather shared by both sides", "mm", 2, 0.05, Slides, f => MeanOf(Pairs(f, front, WheelPair.Feather).Select(p => p.Shared)));
        yield return Figure("feather toward one side of the vehicle", "mm", 2, 0.05, Slides, f => MeanOf(Pairs(f, front, WheelPair.Feather).Select(p => p.Direction)));
        yield return Figure("pressure off its setting (share)", "1", 2, 0.01, [FindingKind.PressureOff], f => MeanOf(Tyres(f, front).Select(t => t.PressureShare)));
        yield return Figure("pressure left less right (share)", "1", 2, 0.01, [FindingKind.PressureOff, FindingKind.SteeringPull], f => LeftLessRight(f, front, t => t.PressureShare));
        yield return Figure("remaining depth left less right", "mm", 1, 0.2, [FindingKind.DepthGap], f => LeftLessRight(f, front, t => t.RemainingMm));
    }

    /// <summary>Whether a finding already names this figure on the same end of the vehicle.</summary>
    public static bool IsNamed(UnusualFigure figure, Vehicle vehicle, IReadOnlyList<Finding> findings) =>
        findings.Any(f => figure.NamedBy.Contains(f.Kind) && (figure.Front is null || f.Axle is null || vehicle.IsFront(f.Axle.Value) == figure.Front));

    /// <summary>Ids that a figure rests on.</summary>
    public static IReadOnlyList<string> Rests(UnusualFigure figure, VehicleFigures figures) =>
        figure.Front is { } front ? [.. Tyres(figures, front).SelectMany(t => t.SurveyIds).Distinct().Order(StringComparer.Ordinal)] : figures.Steering?.EvidenceRuns ?? [];

    private static IEnumerable<TyreFigures> Tyres(VehicleFigures figures, bool front) =>
        figures.Tyres.Where(t => figures.Vehicle.IsFront(t.Position.Axle) == front).OrderBy(t => t.Position);

    private static IEnumerable<WheelPair> Pairs(VehicleFigures figures, bool front, Func<VehicleFigures, Axle, Dual, WheelPair> pair) =>
        figures.Vehicle.Axles.Where(a => figures.Vehicle.IsFront(a.Number) == front).OrderBy(a => a.Number)
            .SelectMany(a => WheelPair.Members(a).Select(d => pair(figures, a, d)));

    private static Estimate? LeftLessRight(VehicleFigures figures, bool front, Func<TyreFigures, Estimate?> of)
    {
        var left = MeanOf(Tyres(figures, front).Where(t => t.Position.Side == Side.Left).Select(of));
        var right = MeanOf(Tyres(figures, front).Where(t => t.Position.Side == Side.Right).Select(of));
        return left is { } l && right is { } r ? l - r : null;
    }

    private static Estimate? MeanOf(IEnumerable<Estimate?> figures)
    {
        var known = Known(figures).ToList();
        return known.Count == 0 ? null : known.Aggregate((a, b) => a + b) * (1.0 / known.Count);
    }

    private static Estimate? Greatest(IEnumerable<Estimate?> figures)
    {
        var known = Known(figures).ToList();
        return known.Count == 0 ? null : known.MaxBy(f => f.Value);
    }

    private static IEnumerable<Estimate> Known(IEnumerable<Estimate?> figures) =>
        figures.OfType<Estimate>().Where(f => double.IsFinite(f.Value) && double.IsFinite(f.StandardError));
}
