using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Tread;

/// <summary>Which explanations a survey of certain axles can have, and how often each is the true one before its depths are looked at.</summary>
internal static class ExplanationPriors
{
    /// <summary>
    /// What is left of the prior of a unit taken for the other where the gauge's step says otherwise: mm can only be taken for 32nds where the record
    /// says 32nds, and its depths are then whole steps of those; the other way round just as little. From memory.
    /// </summary>
    private const double AgainstStep = 0.02;

    internal static List<(Explanation Explanation, double Prior)> Candidates(Vehicle vehicle, IReadOnlyList<int> axles, ErrorRates rates)
    {
        List<(Explanation, double)> list = [(Explanation.AsWritten, 1 - rates.SidesSwapped - rates.AxleSidesSwapped - rates.AxlesSwapped - rates.PositionsExchanged - rates.GroovesReversed - rates.ThirtySecondsTakenForMm - rates.MmTakenForThirtySeconds - rates.OtherVehicle)];
        list.Add((new(ExplanationKind.SidesSwapped), rates.SidesSwapped));
        if (axles.Count > 1)
            foreach (var axle in axles) list.Add((new(ExplanationKind.AxleSidesSwapped, axle), rates.AxleSidesSwapped / axles.Count));
        var pairs = (from a in axles from b in axles where a < b && vehicle.AxleAt(a)?.Duals == vehicle.AxleAt(b)?.Duals select (a, b)).ToList();
        foreach (var (a, b) in pairs) list.Add((new(ExplanationKind.AxlesSwapped, a, b), rates.AxlesSwapped / pairs.Count));
        list.Add((new(ExplanationKind.ThirtySecondsTakenForMm), rates.ThirtySecondsTakenForMm));
        list.Add((new(ExplanationKind.MmTakenForThirtySeconds), rates.MmTakenForThirtySeconds));
        list.Add((new(ExplanationKind.OtherVehicle), rates.OtherVehicle));
        var wheels = Exchangeable(vehicle, axles);
        foreach (var (a, b) in wheels) list.Add((new(ExplanationKind.PositionsExchanged, Position: a, OtherPosition: b), rates.PositionsExchanged / wheels.Count));
        foreach (Side? side in new Side?[] { null, Side.Left, Side.Right }) list.Add((new(ExplanationKind.GroovesReversed, Side: side), rates.GroovesReversed / 3));
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
