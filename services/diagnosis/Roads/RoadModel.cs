using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// Fleet road model: one latent bank a cell that torque, angle and acceleration all inform.
/// torque = pull of the vehicle + gain of the class × bank; angle likewise; bank reading = (1 + roll) × bank + bias of the vehicle.
/// A cell's bank is drawn to the usual crown of its traffic side; a group of vehicles that shares no cell with others has, on top, an
/// unknown mean of its own roads, which is what keeps the errors of lone vehicles honest.
/// </summary>
public static class RoadModel
{
    /// <summary>Unknowns of a group of vehicles up to which its standard errors come from the dense inverse; beyond, from random probes.</summary>
    public const int DenseUpTo = 400;

    private const int LeastCellsForWidth = 10;

    public static RoadFit Fit(IReadOnlyCollection<StraightRun> runs, IReadOnlyList<RoadVehicle> vehicles) => Fit(RoadRuns.Of(runs), vehicles);

    /// <summary>The fit from all runs: a function of them and the vehicles alone, whatever the order they came in.</summary>
    /// <param name="runs">Runs of vehicles that are not listed are left out.</param>
    /// <param name="vehicles">Each at most once.</param>
    /// <param name="denseUpTo">See <see cref="DenseUpTo"/>.</param>
    public static RoadFit Fit(RoadRuns runs, IReadOnlyList<RoadVehicle> vehicles, int denseUpTo = DenseUpTo)
    {
        var problem = new RoadProblem(runs, vehicles);
        var solve = new RoadSolve(problem);
        // The class spreads are estimated once, at a rough solution, and used once.
        solve.Run(roughly: true);
        solve.Settle();
        var rough = new RoadErrors(solve.System, denseUpTo, roughly: true);
        solve.UpdateSpreads(rough.Variances());
        solve.Run(roughly: false);
        solve.Settle();
        return Publish(problem, solve, new RoadErrors(solve.System, denseUpTo));
    }

    /// <summary>
    /// Brings an earlier fit forward by new runs without the old ones: what it found, with its errors, is where the vehicles and cells
    /// that the new runs touch start from. Provisional: gains, crowns and spreads stay, and so do all other vehicles.
    /// </summary>
    /// <param name="earlier">A full fit, or one brought forward before.</param>
    /// <param name="runs">Runs that the earlier fit has not seen.</param>
    /// <param name="vehicles">As for a full fit; those without a new run may be left out.</param>
    public static RoadFit Update(RoadFit earlier, RoadRuns runs, IReadOnlyList<RoadVehicle> vehicles)
    {
        var start = new RoadEarlier(earlier, runs);
        var problem = new RoadProblem(runs, vehicles.Where(v => start.Touched(v.VehicleId)).ToArray(), start.Knows);
        var solve = new RoadSolve(problem, start);
        solve.Run(roughly: true);
        solve.Settle();
        return start.Forward(Publish(problem, solve, new RoadErrors(solve.System, DenseUpTo)));
    }

    private static RoadFit Publish(RoadProblem problem, RoadSolve solve, RoadErrors errors)
    {
        var (variance, bankVariance, levelVariance) = (errors.Variances(), errors.CellVariances(), errors.LevelVariances());
        return new()
        {
            Vehicles = new VehicleReading(problem, solve, variance, bankVariance, levelVariance).All(),
            Gains = problem.Gains.Select((g, i) => new ClassGain
            {
                Class = g.Class,
                Torque = g.Torque,
                TorqueNmPerSine = Gain(problem, solve, variance, i, Witness.Torque),
                AngleDegPerSine = Gain(problem, solve, variance, i, Witness.Angle),
                PullSpreadNm = solve.PullSpread[i],
                OffCentreSpreadDeg = solve.OffCentreSpread[i],
            }).ToArray(),
            Crowns = Crowns(problem, solve, variance).ToArray(),
            Cells = Cells(problem, solve, bankVariance),
            Spreads = Enum.GetValues<Witness>().Select(w => new WitnessSpread(w, solve.Noise[(int)w].Run, solve.Noise[(int)w].Trip)).ToArray(),
            ReadingZeroSpread = solve.ReadingSpread,
            Components = problem.Components,
            Iterations = solve.Iterations,
            Converged = solve.Converged,
        };
    }

    private static Estimate? Gain(RoadProblem p, RoadSolve solve, double[] variance, int gain, Witness witness)
    {
        for (var v = 0; v < p.Vehicles.Length; v++)
        {
            if (p.GainOf[v] != gain || !p.Present[RoadProblem.Lanes * v + (int)witness]) continue;
            var unknown = solve.System.GainAt + RoadProblem.Lanes * gain + (int)witness;
            return new(solve.System.U[unknown], Math.Sqrt(variance[unknown]));
        }
        return null;
    }

    private static IEnumerable<UsualCrown> Crowns(RoadProblem p, RoadSolve solve, double[] variance)
    {
        var s = solve.System;
        var sides = Enumerable.Range(0, p.Cells).ToLookup(c => s.CellSide[c]);
        foreach (var side in Enum.GetValues<TrafficSide>())
        {
            if (!sides.Contains((int)side)) continue;
            var (sum, count) = (0.0, 0);
            foreach (var c in sides[(int)side])
            {
                if (p.CellName(c) is null) continue;
                sum += Math.Pow(s.Bank[c] - s.U[s.CrownAt + (int)side] - s.U[s.LevelAt + s.CellComponent[c]], 2);
                count++;
            }
            var bank = new Estimate(s.U[s.CrownAt + (int)side], Math.Sqrt(variance[s.CrownAt + (int)side]));
            yield return new(side, bank, count >= LeastCellsForWidth ? Math.Sqrt(sum / count) : RoadPriors.CellWidth);
        }
    }

    private static CellBank[] Cells(RoadProblem p, RoadSolve solve, double[] bankVariance)
    {
        var cells = new List<CellBank>();
        for (var c = 0; c < p.Cells; c++)
        {
            if (p.CellName(c) is not { } name) continue;
            var runs = 0;
            for (var j = p.Graph.CellFrom[c]; j < p.Graph.CellFrom[c + 1]; j++) runs += p.Graph.SightingFrom[p.Graph.PairOf[j] + 1] - p.Graph.SightingFrom[p.Graph.PairOf[j]];
            cells.Add(new(name, new(solve.System.Bank[c], Math.Sqrt(bankVariance[c])), runs, p.Graph.CellFrom[c + 1] - p.Graph.CellFrom[c]));
        }
        cells.Sort((a, b) => string.CompareOrdinal(a.Cell, b.Cell));
        return [.. cells];
    }
}
