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
    private const int Rounds = 2; // the class spreads are estimated once and used once
    private const int LeastCellsForWidth = 10;

    public static RoadFit Fit(IReadOnlyList<StraightRun> runs, IReadOnlyList<RoadVehicle> vehicles)
    {
        var problem = new RoadProblem(runs, vehicles);
        var solve = new RoadSolve(problem);
        if (problem.Unknowns > 0)
        {
            for (var round = 0; round < Rounds; round++)
            {
                if (round > 0) solve.UpdateSpreads();
                solve.Run();
            }
        }
        var variance = problem.Unknowns > 0 ? solve.Variances() : [];
        var bankVariance = problem.Unknowns > 0 ? solve.BankVariances() : [];
        return new()
        {
            Vehicles = new VehicleReading(problem, solve, variance, bankVariance).All(),
            Gains = problem.Gains.Select((g, i) => new ClassGain
            {
                Class = g.Class,
                Torque = g.Torque,
                TorqueNmPerSine = At(problem.TorqueGain[i], solve, variance),
                AngleDegPerSine = At(problem.AngleGain[i], solve, variance),
            }).ToArray(),
            Crowns = Crowns(problem, solve, variance).ToArray(),
            Cells = Cells(problem, solve, bankVariance),
            Spreads = Enum.GetValues<Witness>().Select(w => new WitnessSpread(w, solve.Noise[(int)w].Run, solve.Noise[(int)w].Trip)).ToArray(),
            Components = problem.Components,
            Iterations = solve.Iterations,
            Converged = solve.Converged || problem.Unknowns == 0,
        };
    }

    private static Estimate? At(int unknown, RoadSolve solve, double[] variance) =>
        unknown < 0 ? null : new(solve.U[unknown], Math.Sqrt(variance[unknown]));

    private static IEnumerable<UsualCrown> Crowns(RoadProblem p, RoadSolve solve, double[] variance)
    {
        for (var s = 0; s < 2; s++)
        {
            if (At(p.Crown[s], solve, variance) is not { } bank) continue;
            var away = Enumerable.Range(0, solve.Bank.Length).Where(c => p.CellList[c].Side == s && p.CellList[c].Name is not null)
                .Select(c => Math.Pow(solve.Bank[c] - bank.Value - solve.U[p.Component[p.ComponentOfVehicle[p.CellList[c].Vehicle]]], 2)).ToArray();
            yield return new((TrafficSide)s, bank, away.Length >= LeastCellsForWidth ? Math.Sqrt(away.Average()) : RoadPriors.CellWidth);
        }
    }

    private static CellBank[] Cells(RoadProblem p, RoadSolve solve, double[] bankVariance)
    {
        var runs = new HashSet<int>[solve.Bank.Length];
        var vehicles = new HashSet<int>[solve.Bank.Length];
        foreach (var o in p.Observations)
        {
            (runs[o.Cell] ??= []).Add(o.Run);
            (vehicles[o.Cell] ??= []).Add(o.Vehicle);
        }
        return Enumerable.Range(0, solve.Bank.Length).Where(c => p.CellList[c].Name is not null)
            .Select(c => new CellBank(p.CellList[c].Name!, new(solve.Bank[c], Math.Sqrt(bankVariance[c])), runs[c].Count, vehicles[c].Count))
            .OrderBy(c => c.Cell, StringComparer.Ordinal).ToArray();
    }
}
