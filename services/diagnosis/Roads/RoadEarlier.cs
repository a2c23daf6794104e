using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// What an earlier fit knows of the vehicles and cells that new runs touch, as priors of their own. The error of a network's mean bank
/// is shared by its cells and vehicles and no day's runs lessen it, so it is taken out before the update and added again after.
/// </summary>
internal sealed class RoadEarlier
{
    private const double LeastOwn = 0.1; // of the variance, where the network's share would leave next to nothing

    private readonly RoadFit _fit;
    private readonly HashSet<string> _touched;
    private readonly Dictionary<string, SteeringFigures> _vehicles;
    private readonly Dictionary<string, CellBank> _cells;
    private readonly Dictionary<string, (double Pull, double Angle, double Bias)> _sharedOfVehicle = new(StringComparer.Ordinal);
    private readonly Dictionary<string, double> _sharedOfCell = new(StringComparer.Ordinal);

    public RoadEarlier(RoadFit fit, RoadRuns runs)
    {
        _fit = fit;
        _touched = runs.Vehicles.ToHashSet(StringComparer.Ordinal);
        _vehicles = fit.Vehicles.Where(v => _touched.Contains(v.VehicleId)).ToDictionary(v => v.VehicleId, StringComparer.Ordinal);
        var named = runs.Cells.ToHashSet(StringComparer.Ordinal);
        _cells = fit.Cells.Where(c => named.Contains(c.Cell)).ToDictionary(c => c.Cell, StringComparer.Ordinal);
    }

    public bool Touched(string vehicleId) => _touched.Contains(vehicleId);

    public bool Knows(string vehicleId) => _vehicles.TryGetValue(vehicleId, out var v) && v.Runs >= RoadProblem.EnoughSteadyRuns;

    /// <summary>Puts the earlier figures in place of the priors.</summary>
    public void Hold(RoadProblem p, RoadSolve solve, double[] centre, double[] scale, bool[] held)
    {
        var s = solve.System;
        void At(int unknown, Estimate? e, double levelShare)
        {
            if (e is not { StandardError: > 0 } x) return;
            (centre[unknown], scale[unknown], held[unknown]) = (x.Value, Own(x.StandardError, levelShare), true);
        }
        foreach (var spread in _fit.Spreads) solve.Noise[(int)spread.Witness] = (spread.RunSd, spread.TripSd);
        foreach (var crown in _fit.Crowns) At(s.CrownAt + (int)crown.TrafficSide, crown.Bank, 0);
        var gains = new double[p.Gains.Length * RoadProblem.Lanes];
        for (var g = 0; g < p.Gains.Length; g++)
        {
            var at = s.GainAt + RoadProblem.Lanes * g;
            var known = _fit.Gains.FirstOrDefault(x => (x.Class, x.Torque) == p.Gains[g]);
            At(at, known?.TorqueNmPerSine, 0);
            At(at + 1, known?.AngleDegPerSine, 0);
            if (known is { PullSpreadNm: > 0, OffCentreSpreadDeg: > 0 }) (solve.PullSpread[g], solve.OffCentreSpread[g]) = (known.PullSpreadNm, known.OffCentreSpreadDeg);
            (gains[RoadProblem.Lanes * g], gains[RoadProblem.Lanes * g + 1]) = (centre[at], centre[at + 1]);
        }
        var level = new double[p.Components];
        for (var v = 0; v < p.Vehicles.Length; v++)
        {
            if (!_vehicles.TryGetValue(p.Vehicles[v].VehicleId, out var known)) continue;
            var (at, g, shared) = (RoadProblem.Lanes * v, RoadProblem.Lanes * p.GainOf[v], known.RoadLevelError ?? 0);
            level[p.ComponentOfVehicle[v]] = Math.Max(level[p.ComponentOfVehicle[v]], shared);
            var shares = (Pull: shared * gains[g], Angle: shared * gains[g + 1], Bias: shared * (1 + Steering.SteeringEquations.RollGain));
            _sharedOfVehicle[known.VehicleId] = (Shared(known.SteeringPullNm, shares.Pull), Shared(known.OffCentreDeg, shares.Angle), Shared(known.BankReadingBias, shares.Bias));
            At(at, known.SteeringPullNm, shares.Pull);
            At(at + 1, known.OffCentreDeg, shares.Angle);
            At(at + 2, known.BankReadingBias, shares.Bias);
        }
        for (var c = 0; c < p.Cells; c++)
        {
            if (p.CellName(c) is not { } name || !_cells.TryGetValue(name, out var known)) continue;
            var error = Own(known.Bank.StandardError, level[p.CellComponent[c]]);
            _sharedOfCell[name] = Shared(known.Bank, level[p.CellComponent[c]]);
            (s.Bank[c], s.Priors[c]) = (known.Bank.Value, new(known.Bank.Value, 1 / (error * error), OnLevel: false));
        }
    }

    /// <summary>Takes off the new runs what a vehicle's own gain, as the earlier fit found it, makes of the bank beyond its class's.</summary>
    public void TakeOwnGains(RoadProblem p, RoadSolve solve, double[] centre)
    {
        var s = solve.System;
        for (var v = 0; v < p.Vehicles.Length; v++)
        {
            if (!_vehicles.TryGetValue(p.Vehicles[v].VehicleId, out var known)) continue;
            var at = s.GainAt + RoadProblem.Lanes * p.GainOf[v];
            var (pull, angle) = ((float)((known.PullPerSineNm?.Value ?? centre[at]) - centre[at]), (float)((known.OffCentrePerSineDeg?.Value ?? centre[at + 1]) - centre[at + 1]));
            for (var e = p.Graph.VehicleFrom[v]; e < p.Graph.VehicleFrom[v + 1]; e++)
                for (var i = p.Graph.SightingFrom[e]; i < p.Graph.SightingFrom[e + 1]; i++)
                {
                    p.Values[RoadProblem.Witnesses * i] -= pull * (float)s.Bank[p.Graph.CellOf[e]];
                    p.Values[RoadProblem.Witnesses * i + 1] -= angle * (float)s.Bank[p.Graph.CellOf[e]];
                }
        }
    }

    /// <summary>The whole earlier fit with the touched vehicles and cells replaced, marked provisional.</summary>
    public RoadFit Forward(RoadFit update)
    {
        var gains = update.Gains.ToDictionary(g => (g.Class, g.Torque));
        var vehicles = update.Vehicles.ToDictionary(v => v.VehicleId, StringComparer.Ordinal);
        var cells = update.Cells.ToDictionary(c => c.Cell, StringComparer.Ordinal);
        var all = _fit.Vehicles.Select(v => vehicles.Remove(v.VehicleId, out var now) ? Joined(v, now) : v).ToList();
        all.AddRange(vehicles.Values);
        all.Sort((a, b) => string.CompareOrdinal(a.VehicleId, b.VehicleId));
        var roads = _fit.Cells.Select(c => cells.Remove(c.Cell, out var now) ? Joined(c, now) : c).ToList();
        roads.AddRange(cells.Values);
        roads.Sort((a, b) => string.CompareOrdinal(a.Cell, b.Cell));
        return _fit with
        {
            Vehicles = all,
            Cells = roads,
            Gains = [.. _fit.Gains, .. update.Gains.Where(g => _fit.Gains.All(x => (x.Class, x.Torque) != (g.Class, g.Torque)))],
            Crowns = [.. _fit.Crowns, .. update.Crowns.Where(c => _fit.Crowns.All(x => x.TrafficSide != c.TrafficSide))],
            Iterations = update.Iterations,
            Converged = update.Converged,
            Provisional = true,
        };
    }

    private static double Own(double error, double shared) => Math.Sqrt(Math.Max(LeastOwn * error * error, error * error - shared * shared));

    /// <summary>What <see cref="Own"/> took out.</summary>
    private static double Shared(Estimate? e, double shared) =>
        e is { } x ? Math.Sqrt(Math.Max(0, x.StandardError * x.StandardError - Math.Pow(Own(x.StandardError, shared), 2))) : 0;

    private SteeringFigures Joined(SteeringFigures before, SteeringFigures now)
    {
        if (before.Runs == 0) return now;
        var (pull, angle, bias) = _sharedOfVehicle.GetValueOrDefault(before.VehicleId);
        var (pullNow, angleNow) = (Whole(now.SteeringPullNm, before.SteeringPullNm, pull), Whole(now.OffCentreDeg, before.OffCentreDeg, angle));
        return before with
        {
            SteeringPullNm = pullNow,
            OffCentreDeg = angleNow,
            SteeringPullLatestNm = pullNow,
            OffCentreLatestDeg = angleNow,
            BankReadingBias = Whole(now.BankReadingBias, before.BankReadingBias, bias),
            PullPerSineNm = before.PullPerSineNm ?? now.PullPerSineNm,
            OffCentrePerSineDeg = before.OffCentrePerSineDeg ?? now.OffCentrePerSineDeg,
            BrakePullNm = before.BrakePullNm ?? now.BrakePullNm,
            DrivePullNm = before.DrivePullNm ?? now.DrivePullNm,
            Runs = before.Runs + now.Runs,
            Seconds = before.Seconds + now.Seconds,
            EvidenceRuns = before.EvidenceRuns.Concat(now.EvidenceRuns).Distinct().Take(VehicleReading.EvidenceKept).ToArray(),
            NotPossible = before.NotPossible.Intersect(now.NotPossible).ToArray(),
        };
    }

    private CellBank Joined(CellBank before, CellBank now) => new(before.Cell,
        Whole(now.Bank, before.Bank, _sharedOfCell.GetValueOrDefault(before.Cell))!.Value, before.Runs + now.Runs, Math.Max(before.Vehicles, now.Vehicles));

    /// <summary>The shared error added again, where it was taken out.</summary>
    private static Estimate? Whole(Estimate? now, Estimate? before, double shared) => (now, before) switch
    {
        (null, _) => before,
        ({ } x, null) => x,
        ({ } x, _) => new(x.Value, Math.Sqrt(x.StandardError * x.StandardError + shared * shared)),
    };
}
