using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Tread;

/// <summary>Which explanations a survey of certain axles can have, and how often each is the true one before its depths are looked at.</summary>
internal static class ExplanationPriors
{
    // Prior shares of surveys, inside the 1-3 % of blunders usual in depots; from memory.
    private const double SidesSwappedPrior = 0.01;
    private const double AxleSidesSwappedPrior = 0.005;
    private const double AxlesSwappedPrior = 0.004;
    private const double PositionsExchangedPrior = 0.004;
    private const double GroovesReversedPrior = 0.002;
    private const double UnitPrior = 0.004;
    /// <summary>
    /// What is left of that prior where the gauge's step says otherwise: mm can only be taken for 32nds where the record
    /// says 32nds, and its depths are then whole steps of those; the other way round just as little. From memory.
    /// </summary>
    private const double AgainstStep = 0.02;
    private const double OtherVehiclePrior = 0.002;

    internal static List<(Explanation Explanation, double Prior)> Candidates(Vehicle vehicle, IReadOnlyList<int> axles)
    {
        List<(Explanation, double)> list = [(Explanation.AsWritten, 1 - SidesSwappedPrior - AxleSidesSwappedPrior - AxlesSwappedPrior - PositionsExchangedPrior - GroovesReversedPrior - 2 * UnitPrior - OtherVehiclePrior)];
        list.Add((new(ExplanationKind.SidesSwapped), SidesSwappedPrior));
        if (axles.Count > 1)
            foreach (var axle in axles) list.Add((new(ExplanationKind.AxleSidesSwapped, axle), AxleSidesSwappedPrior / axles.Count));
        var pairs = (from a in axles from b in axles where a < b && vehicle.AxleAt(a)?.Duals == vehicle.AxleAt(b)?.Duals select (a, b)).ToList();
        foreach (var (a, b) in pairs) list.Add((new(ExplanationKind.AxlesSwapped, a, b), AxlesSwappedPrior / pairs.Count));
        list.Add((new(ExplanationKind.ThirtySecondsTakenForMm), UnitPrior));
        list.Add((new(ExplanationKind.MmTakenForThirtySeconds), UnitPrior));
        list.Add((new(ExplanationKind.OtherVehicle), OtherVehiclePrior));
        var wheels = Exchangeable(vehicle, axles);
        foreach (var (a, b) in wheels) list.Add((new(ExplanationKind.PositionsExchanged, Position: a, OtherPosition: b), PositionsExchangedPrior / wheels.Count));
        foreach (Side? side in new Side?[] { null, Side.Left, Side.Right }) list.Add((new(ExplanationKind.GroovesReversed, Side: side), GroovesReversedPrior / 3));
        return list;
    }

    /// <summary>Wheels of one side that one reaches from the same stand on two axles, and the two duals of one end.</summary>
    private static List<(Position, Position)> Exchangeable(Vehicle vehicle, IReadOnlyList<int> axles)
    {
        Position[] read = [.. vehicle.Positions().Where(p => axles.Contains(p.Axle))];
        return [.. from a in read from b in read
                   where a.Side == b.Side && ((a.Axle < b.Axle && a.Dual != Dual.Inner && b.Dual != Dual.Inner) || (a.Axle == b.Axle && a.Dual == Dual.Outer && b.Dual == Dual.Inner))
                   select (a, b)];
    }

    /// <summary>How far a unit's mix-up agrees with the step of the gauge, as a factor on its prior.</summary>
    internal static double StepFactor(ExplanationKind kind, double resolutionMm)
    {
        var steps = resolutionMm / GaugeNoise.ThirtySecondInchMm;
        var thirtySeconds = resolutionMm > 0.15 && Math.Abs(steps - Math.Round(steps * 4) / 4) < 0.01;
        return kind switch
        {
            ExplanationKind.MmTakenForThirtySeconds => thirtySeconds ? 1 : AgainstStep,
            ExplanationKind.ThirtySecondsTakenForMm => thirtySeconds ? AgainstStep : 1,
            _ => 1,
        };
    }
}
