using System.Runtime.Intrinsics;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Roads;

/// <summary>Reads each vehicle's figures off the solved fit.</summary>
internal sealed class VehicleReading(RoadProblem problem, RoadSolve solve, double[] variance, double[] bankVariance, double[] levelVariance)
{
    public const int EvidenceKept = 5;
    private const int LeastModeRuns = 3;
    private const int Lanes = RoadProblem.Lanes;

    private readonly RoadSystem _system = solve.System;
    private readonly OwnGains _gains = new(problem, solve);
    private PresentLevels? _levels;

    public IReadOnlyList<SteeringFigures> All()
    {
        _levels = new(problem, solve, _gains);
        var companions = new int[problem.Components];
        foreach (var k in problem.ComponentOfVehicle) companions[k]++;
        var all = new SteeringFigures[problem.Vehicles.Length];
        problem.Graph.ByVehicle.Each((_, from, to) =>
        {
            for (var v = from; v < to; v++) all[v] = Of(v, companions[problem.ComponentOfVehicle[v]] > 1);
        });
        return all;
    }

    private SteeringFigures Of(int v, bool shared)
    {
        var (from, to) = (problem.RunFrom[v], problem.RunFrom[v + 1]);
        var seconds = 0.0;
        for (var i = from; i < to; i++) seconds += problem.Run(i).Seconds;
        var pull = Figure(v, Witness.Torque);
        var angle = Figure(v, Witness.Angle);
        var reads = problem.Present[Lanes * v + (int)Witness.BankReading];
        var figures = new SteeringFigures
        {
            VehicleId = problem.Vehicles[v].VehicleId,
            SteeringPullNm = pull,
            OffCentreDeg = angle,
            SteeringPullLatestNm = pull is { } p ? _levels!.Of(v, Witness.Torque, p) : null,
            OffCentreLatestDeg = angle is { } a ? _levels!.Of(v, Witness.Angle, a) : null,
            PullPerSineNm = Gain(v, Witness.Torque),
            OffCentrePerSineDeg = Gain(v, Witness.Angle),
            PullMeanBank = _gains.MeanBank(v, Witness.Torque),
            OffCentreMeanBank = _gains.MeanBank(v, Witness.Angle),
            BrakePullNm = pull is null ? null : Extra(v, RunMode.Brake),
            DrivePullNm = pull is null || problem.TakesDriven[v] ? null : Extra(v, RunMode.Drive),
            BankReadingBias = reads ? new(_system.U[Lanes * v + 2], Math.Sqrt(variance[Lanes * v + 2])) : null,
            RoadLevelError = to > from ? Math.Sqrt(levelVariance[2 * problem.ComponentOfVehicle[v] + (int)problem.Vehicles[v].TrafficSide]) : null,
            Runs = to - from,
            Seconds = seconds,
            TorqueIncludesAssist = problem.Vehicles[v].Torque == TorqueKind.Total,
            RoadShare = shared ? RoadShare.SharedCells : reads ? RoadShare.OwnBankReading : RoadShare.UsualCrown,
            EvidenceRuns = Evidence(v),
        };
        return figures with { NotPossible = NotPossible(v, figures).ToArray() };
    }

    /// <summary>The fit's figure, put right for the vehicle's own gain.</summary>
    private Estimate? Figure(int v, Witness witness)
    {
        if (solve.Unshrunk(v, witness, variance[Lanes * v + (int)witness]) is not { } figure) return null;
        if (solve.Held(v, witness)) return figure; // an earlier fit's, which saw to it
        var (shift, more) = _gains.Of(v, witness);
        return new(figure.Value + shift, Math.Sqrt(figure.StandardError * figure.StandardError + more));
    }

    private Estimate? Gain(int v, Witness witness)
    {
        if (!problem.Present[Lanes * v + (int)witness]) return null;
        var (own, error) = _gains.Departure(v, witness);
        return new(_system.U[_system.GainAt + Lanes * problem.GainOf[v] + (int)witness] + own, Math.Sqrt(error));
    }

    /// <summary>Runs that carry most weight; those of different witnesses are made comparable by the spread of their class.</summary>
    private string[] Evidence(int v)
    {
        var graph = problem.Graph;
        var (from, to) = (graph.SightingFrom[graph.VehicleFrom[v]], graph.SightingFrom[graph.VehicleFrom[v + 1]]);
        var (run, trip) = RoadWeighing.Squares(solve.Noise);
        var (pull, angle) = (solve.PullSpread[problem.GainOf[v]], solve.OffCentreSpread[problem.GainOf[v]]);
        var unit = Vector256.Create(pull * pull, angle * angle, RoadPriors.CellWidth * RoadPriors.CellWidth, 0);
        var (gain, mine) = (Vector256.LoadUnsafe(ref _system.Gain[Lanes * problem.GainOf[v]]), Vector256.LoadUnsafe(ref _system.U[Lanes * v]));
        var weights = new double[to - from];
        for (var e = graph.VehicleFrom[v]; e < graph.VehicleFrom[v + 1]; e++)
            for (var i = graph.SightingFrom[e]; i < graph.SightingFrom[e + 1]; i++)
            {
                var own = Vector128.LoadUnsafe(ref problem.Variances[RoadProblem.Witnesses * i]);
                var residual = RoadSystem.Widen(Vector128.LoadUnsafe(ref problem.Values[RoadProblem.Witnesses * i])) - mine - gain * _system.Bank[graph.CellOf[e]];
                var weight = RoadWeighing.Weight(residual, own, Vector128.LoadUnsafe(ref problem.TripSize[Lanes * problem.Trip[i]]), run, trip, Vector128.Sqrt(own + run + trip), robust: true);
                weights[i - from] = Vector256.Sum(weight * unit);
            }
        return Heaviest(weights, from);
    }

    /// <summary>Of equal weights the earlier run comes first, and a run that was cut in two is named once.</summary>
    private string[] Heaviest(double[] weights, int from)
    {
        var names = new List<string>(EvidenceKept);
        while (names.Count < EvidenceKept)
        {
            var best = -1;
            for (var i = 0; i < weights.Length; i++)
                if (weights[i] >= 0 && (best < 0 || weights[i] > weights[best] || (weights[i] == weights[best] && problem.PlaceOf[from + i] < problem.PlaceOf[from + best]))) best = i;
            if (best < 0) break;
            weights[best] = -1;
            if (Name(problem.PlaceOf[from + best]) is var name && !names.Contains(name)) names.Add(name);
        }
        return [.. names];
    }

    private string Name(int place)
    {
        ref readonly var run = ref problem.Run(place);
        return $"{problem.Runs.Streams[run.Stream]}/{run.Sequence}";
    }

    /// <summary>Mean torque of one mode less that of steady running, each with its road's share removed. The shared level of the road cancels.</summary>
    private Estimate? Extra(int v, RunMode mode)
    {
        var special = Mean(v, mode); // first, since few vehicles have enough of it
        return special is null ? null : special - Mean(v, RunMode.Coast);
    }

    private Estimate? Mean(int v, RunMode mode)
    {
        var (noise, trip) = solve.Noise[(int)Witness.Torque];
        var gain = _system.U[_system.GainAt + Lanes * problem.GainOf[v]];
        var (rows, cells) = (new List<(int Trip, double Value, double Variance)>(), Array.Empty<int>());
        for (var i = problem.RunFrom[v]; i < problem.RunFrom[v + 1]; i++)
        {
            ref readonly var run = ref problem.Run(i);
            if (run.Mode != mode || !problem.TorqueCounts(v, run)) continue;
            if (rows.Count == 0) cells = problem.CellsUnder(v);
            var (bank, bankError) = BankUnder(v, i, cells[i - problem.RunFrom[v]]);
            rows.Add((run.Stream, run.Torque - gain * bank, (double)run.TorqueError * run.TorqueError + noise * noise + gain * gain * bankError));
        }
        if (rows.Count < LeastModeRuns) return null;
        var sizes = rows.CountBy(r => r.Trip).ToDictionary();
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
    private (double Bank, double Variance) BankUnder(int v, int place, int cell)
    {
        if (cell >= 0) return (_system.Bank[cell], bankVariance[cell]);
        ref readonly var run = ref problem.Run(place);
        if (problem.Present[Lanes * v + 2] && !float.IsNaN(run.Bank))
            return ((run.Bank - _system.U[Lanes * v + 2]) / (1 + SteeringEquations.RollGain), (double)run.BankError * run.BankError + Math.Pow(solve.Noise[(int)Witness.BankReading].Run, 2));
        var usual = _system.U[_system.CrownAt + (int)problem.Vehicles[v].TrafficSide] + _system.U[_system.LevelAt + problem.ComponentOfVehicle[v]];
        return (usual, RoadPriors.CellWidth * RoadPriors.CellWidth);
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
