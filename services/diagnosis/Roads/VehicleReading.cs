using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Roads;

/// <summary>Reads each vehicle's figures off the solved fit.</summary>
internal sealed class VehicleReading(RoadProblem problem, RoadSolve solve, double[] variance, double[] bankVariance)
{
    private const int LeastModeRuns = 3;
    private const int EvidenceKept = 5;

    public IReadOnlyList<SteeringFigures> All()
    {
        var weights = new Dictionary<int, double>();
        for (var k = 0; k < problem.Observations.Count; k++)
        {
            var o = problem.Observations[k];
            // Weights of different witnesses are made comparable by the spread of their class.
            var unit = o.Witness switch { Witness.Torque => solve.PullSpread[o.Gain], Witness.Angle => solve.OffCentreSpread[o.Gain], _ => RoadPriors.CellWidth };
            weights[o.Run] = weights.GetValueOrDefault(o.Run) + unit * unit * solve.WeightOf(k);
        }
        var companions = problem.ComponentOfVehicle.GroupBy(c => c).ToDictionary(g => g.Key, g => g.Count());
        return Enumerable.Range(0, problem.Vehicles.Length).Select(v => Of(v, weights, companions[problem.ComponentOfVehicle[v]] > 1)).ToArray();
    }

    private SteeringFigures Of(int v, Dictionary<int, double> weights, bool shared)
    {
        var runs = problem.RunsOf[v];
        var pull = problem.Pull[v] < 0 ? null : solve.Unshrunk(problem.Pull[v], variance[problem.Pull[v]]);
        var figures = new SteeringFigures
        {
            VehicleId = problem.Vehicles[v].VehicleId,
            SteeringPullNm = pull,
            OffCentreDeg = problem.OffCentre[v] < 0 ? null : solve.Unshrunk(problem.OffCentre[v], variance[problem.OffCentre[v]]),
            BrakePullNm = pull is null ? null : Extra(v, RunMode.Brake),
            DrivePullNm = pull is null || problem.TakesDriven[v] ? null : Extra(v, RunMode.Drive),
            Runs = runs.Count,
            Seconds = runs.Sum(i => problem.Runs[i].Seconds),
            TorqueIncludesAssist = problem.Vehicles[v].Torque == TorqueKind.Total,
            RoadShare = shared ? RoadShare.SharedCells : problem.Bias[v] >= 0 ? RoadShare.OwnBankReading : RoadShare.UsualCrown,
            EvidenceRuns = runs.Where(weights.ContainsKey).OrderByDescending(i => weights[i]).ThenBy(i => i)
                .Select(i => $"{problem.Runs[i].StreamId}/{problem.Runs[i].Sequence}").Distinct().Take(EvidenceKept).ToArray(),
        };
        return figures with { NotPossible = NotPossible(v, figures).ToArray() };
    }

    /// <summary>Mean torque of one mode less that of steady running, each with its road's share removed. The shared level of the road cancels.</summary>
    private Estimate? Extra(int v, RunMode mode)
    {
        var special = Mean(v, problem.RunsOf[v].Where(i => problem.Runs[i].Mode == mode));
        var steady = Mean(v, problem.RunsOf[v].Where(i => problem.Runs[i].Mode == RunMode.Coast));
        return special - steady;
    }

    private Estimate? Mean(int v, IEnumerable<int> runs)
    {
        var (noise, trip) = solve.Noise[(int)Witness.Torque];
        var gain = solve.U[problem.TorqueGain[problem.GainOf(problem.Vehicles[v])]];
        var rows = runs.Where(i => problem.TorqueCounts(v, problem.Runs[i])).Select(i =>
        {
            var (bank, bankError) = BankUnder(v, i);
            var e = problem.Runs[i].TorqueNm!.Value;
            return (Trip: problem.Runs[i].StreamId, Value: e.Value - gain * bank, Variance: e.StandardError * e.StandardError + noise * noise + gain * gain * bankError);
        }).ToArray();
        if (rows.Length < LeastModeRuns) return null;
        var sizes = rows.GroupBy(r => r.Trip).ToDictionary(g => g.Key, g => g.Count());
        var centre = RobustMean.Huber(rows.Select(r => r.Value).ToArray());
        var (weights, sum) = (0.0, 0.0);
        foreach (var r in rows)
        {
            var z = Math.Abs(r.Value - centre) / Math.Sqrt(r.Variance + trip * trip);
            var w = Math.Min(1, RobustMean.HuberK / Math.Max(z, 1e-12)) / (r.Variance + sizes[r.Trip] * trip * trip);
            weights += w;
            sum += w * r.Value;
        }
        return new(sum / weights, Math.Sqrt(1 / weights));
    }

    /// <summary>Sine of the bank under a run and its variance, from the cell, the run's own reading, or the usual crown.</summary>
    private (double Bank, double Variance) BankUnder(int v, int run)
    {
        var cell = problem.CellOfRun[run] >= 0 ? problem.CellOfRun[run] : problem.CellNamed(problem.Runs[run].RoadCell);
        if (cell >= 0) return (solve.Bank[cell], bankVariance[cell]);
        if (problem.Bias[v] >= 0 && problem.Runs[run].BankReading is { } reading)
            return ((reading.Value - solve.U[problem.Bias[v]]) / (1 + SteeringEquations.RollGain),
                reading.StandardError * reading.StandardError + Math.Pow(solve.Noise[(int)Witness.BankReading].Run, 2));
        var component = problem.Component[problem.ComponentOfVehicle[v]];
        return (solve.U[problem.Crown[(int)problem.Vehicles[v].TrafficSide]] + (component < 0 ? 0 : solve.U[component]), RoadPriors.CellWidth * RoadPriors.CellWidth);
    }

    private IEnumerable<string> NotPossible(int v, SteeringFigures f)
    {
        var vehicle = problem.Vehicles[v];
        if (f.Runs == 0)
        {
            yield return "steering pull and off-centre angle: no straight run; steady driving above 50 km/h would help";
            yield break;
        }
        if (vehicle.Torque == TorqueKind.UnknownUnit) yield return "steering pull: the torque's unit is raw or unknown; the operator's word on its unit would help";
        else if (f.SteeringPullNm is null) yield return "steering pull: no torque in any steady run; a driver torque channel in N·m would help";
        else if (vehicle.Torque == TorqueKind.TorsionBar) yield return "steering pull in full: torsion bar alone, so the figure is a lower bound; the assist torque would help";
        if (f.OffCentreDeg is null) yield return "off-centre angle: no steering-wheel angle in any steady run; a steering-wheel angle channel would help";
        if (f.SteeringPullNm is not null && f.BrakePullNm is null) yield return "pull under braking: fewer than 3 straight braking runs; the brake channel and longer logs would help";
        if (f.SteeringPullNm is not null && f.DrivePullNm is null) yield return "pull under drive: fewer than 3 runs of either steady or driven running; the drive torque channel and longer logs would help";
        if (f.RoadShare == RoadShare.OwnBankReading) yield return "zero of the bank reading: it cannot be told from the mean bank of roads that no other vehicle was seen on; position, or more vehicles on the same roads, would help";
        if (f.RoadShare == RoadShare.UsualCrown) yield return "the road's own bank: the usual crown of the traffic side stands in for it; lateral acceleration with yaw rate, or position, would help";
    }
}
