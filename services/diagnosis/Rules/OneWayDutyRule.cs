using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Rules;

/// <summary>
/// Turning goes mostly one way and tyres wear toward the outside of those turns: the route does what a skewed axle would. Turning
/// left, the road pushes every tyre to the left, which wears the left ones inboard and the right ones outboard.
/// </summary>
public static class OneWayDutyRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        if (Witnesses.OneWayTurning(figures) is not { } turning || Witnesses.LeftTurnShare(figures) is not { } share) yield break;
        var pairs = figures.Vehicle.Axles.OrderBy(a => a.Number)
            .SelectMany(a => WheelPair.Members(a).Select(d => WheelPair.Edge(figures, a, d)))
            .Where(p => p.Pattern == PairPattern.SameVehicleSide && p.Direction!.Value.Value * turning > 0).ToList();
        if (pairs.Count == 0) yield break;
        var worst = pairs.MaxBy(p => p.Strength)!;
        var (turns, outside) = turning > 0 ? (Side.Left, Side.Right) : (Side.Right, Side.Left);
        var turned = new Evidence($"Of all turning {TradeWords.Number(100 * (turning > 0 ? share : 1 - share), 0)} % goes to the {turns.Word()}", Witnesses.TurningRests(figures));
        yield return new Finding
        {
            Kind = FindingKind.OneWayDuty,
            Side = outside,
            Sentence = $"{turned.Statement}, and tyres of {Axles(pairs)} wear toward the vehicle's {outside.Word()}, the outside of those turns, by {TradeWords.Full(worst.Direction!.Value * turning, 3, TradeWords.PerDistance)}.",
            EvidenceFor = [turned, .. pairs.SelectMany(p => Witnesses.Wheels(figures.Vehicle, p, Witnesses.EdgeOf, -turning, turning))],
            EvidenceAgainst = [.. Against(figures, turning)],
            Confounders =
            [
                new("An axle that points aside wears its tyres the same way", "Vehicles on the same route; the wear when the route is run the other way round"),
                .. figures.Depot.CrownSign() == turning ? [new("Crown of the road on the traffic side does the same", "Vehicles of the depot on other routes")] : Array.Empty<Confounder>(),
            ],
            Causes = figures.Depot.CrownSign() == turning ? [Quantity.Duty, Quantity.Crown] : [Quantity.Duty],
            FirstCheck = FirstCheck.For(CheckFor.OneWayDuty),
            AlignmentMends = false,
            Strength = worst.Strength,
        };
    }

    /// <summary>Axles worn the other way are not the route's doing.</summary>
    private static IEnumerable<Evidence> Against(VehicleFigures figures, double turning) =>
        figures.Vehicle.Axles.OrderBy(a => a.Number)
            .SelectMany(a => WheelPair.Members(a).Select(d => WheelPair.Edge(figures, a, d)))
            .Where(p => p.Pattern == PairPattern.SameVehicleSide && p.Direction!.Value.Value * turning < 0)
            .SelectMany(p => Witnesses.Wheels(figures.Vehicle, p, Witnesses.EdgeOf, turning, -turning));

    private static string Axles(IReadOnlyList<WheelPair> pairs)
    {
        var numbers = pairs.Select(p => p.Axle).Distinct().Order().ToList();
        return numbers.Count == 1 ? $"axle {numbers[0]}" : $"axles {string.Join(", ", numbers)}";
    }
}
