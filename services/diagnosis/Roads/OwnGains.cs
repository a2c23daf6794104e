using System.Runtime.Intrinsics;

namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// How far each vehicle's own gain departs from its class's, read off the solved fit: a regression of the vehicle's residuals on the bank,
/// pair by pair of vehicle and cell, with the level free and the slope drawn to the class (a random slope; Laird and Ware 1982). The angle's
/// gain is the difference of two slip angles, front less rear, and differs between sound vehicles of a class by a fifth or more; on roads
/// that fall one way all the time that difference moves the figure by as much as a week's driving does.
/// The bank of a cell is taken as the others leave it, or the vehicle would be compared with itself.
/// </summary>
internal sealed class OwnGains
{
    private const int Lanes = RoadProblem.Lanes, Read = 2; // torque and angle; the bank reading's gain is fixed
    private const int MostRounds = 200;
    private const double Settled = 1e-4, MostSpreads = 3;
    private const double LeastOfOthers = 1e-9; // of a cell's weight, below which nobody else tells of it

    private readonly double[] _mean, _square, _slope; // by vehicle and witness: mean bank, squares about it, their product with the residuals
    private readonly double[] _spread;                // of the gains of a class, by class and witness
    private readonly RoadProblem _p;
    private readonly RoadSolve _solve;
    private readonly int[] _same; // vehicle that stands for those of the same gain

    public OwnGains(RoadProblem problem, RoadSolve solve)
    {
        (_p, _solve) = (problem, solve);
        var n = Read * problem.Vehicles.Length;
        (_mean, _square, _slope) = (new double[n], new double[n], new double[n]);
        problem.Graph.ByVehicle.Each((_, from, to) =>
        {
            for (var v = from; v < to; v++) Regress(v);
        });
        _same = Same(problem.Vehicles);
        // A vehicle that enters twice has one gain: both parts tell of it, each about its own mean.
        for (var v = 0; v < _same.Length; v++)
            for (var lane = 0; lane < Read && _same[v] != v; lane++)
            {
                _square[Read * _same[v] + lane] += _square[Read * v + lane];
                _slope[Read * _same[v] + lane] += _slope[Read * v + lane];
            }
        _spread = new double[Read * problem.Gains.Length];
        for (var g = 0; g < _spread.Length; g++) _spread[g] = Spread(g / Read, g % Read);
    }

    /// <summary>One standard deviation of the gains within a class.</summary>
    public double Spread(int gain, Witness witness) => _spread[Read * gain + (int)witness];

    /// <summary>Mean bank under the vehicle's runs of a witness.</summary>
    public double MeanBank(int vehicle, Witness witness) => _mean[Read * vehicle + (int)witness];

    /// <summary>What the vehicle's own gain adds to a figure that stands on the class's, and the variance it brings.</summary>
    public (double Shift, double Variance) Of(int vehicle, Witness witness)
    {
        var (mean, own) = (_mean[Read * vehicle + (int)witness], Departure(vehicle, witness));
        return (-own.Value * mean, own.Variance * mean * mean);
    }

    /// <summary>Own gain less the class's, and its variance.</summary>
    public (double Value, double Variance) Departure(int vehicle, Witness witness)
    {
        var (at, spread) = (Read * _same[vehicle] + (int)witness, Spread(_p.GainOf[vehicle], witness));
        var weight = _square[at] + 1 / (spread * spread);
        return (_slope[at] / weight, 1 / weight);
    }

    private static int[] Same(RoadVehicle[] vehicles)
    {
        var (first, same) = (new Dictionary<string, int>(vehicles.Length, StringComparer.Ordinal), new int[vehicles.Length]);
        for (var v = 0; v < same.Length; v++)
        {
            var name = vehicles[v].SameAs ?? vehicles[v].VehicleId;
            same[v] = first.TryGetValue(name, out var known) ? known : first[name] = v;
        }
        return same;
    }

    private void Regress(int v)
    {
        var (graph, system) = (_p.Graph, _solve.System);
        var (run, trip) = RoadWeighing.Squares(_solve.Noise);
        var (gain, mine) = (Vector256.LoadUnsafe(ref system.Gain[Lanes * _p.GainOf[v]]), Vector256.LoadUnsafe(ref system.U[Lanes * v]));
        var sums = new Sums[Read];
        for (var e = graph.VehicleFrom[v]; e < graph.VehicleFrom[v + 1]; e++)
        {
            var (bank, pivot) = (system.Bank[graph.CellOf[e]], system.Pivot[graph.CellOf[e]]);
            var (predicted, weights, pull) = (mine + gain * bank, Vector256<double>.Zero, Vector256<double>.Zero);
            for (var i = graph.SightingFrom[e]; i < graph.SightingFrom[e + 1]; i++)
            {
                var (own, residual) = (Vector128.LoadUnsafe(ref _p.Variances[RoadProblem.Witnesses * i]), RoadSystem.Widen(Vector128.LoadUnsafe(ref _p.Values[RoadProblem.Witnesses * i])) - predicted);
                var weight = RoadWeighing.Weight(residual, own, Vector128.LoadUnsafe(ref _p.TripSize[Lanes * _p.Trip[i]]), run, trip, Vector128.Sqrt(own + run + trip), robust: true);
                weights += weight;
                pull += weight * residual;
            }
            for (var lane = 0; lane < Read; lane++)
            {
                var others = pivot - weights[lane] * gain[lane] * gain[lane];
                if (!(weights[lane] > 0) || !(others > LeastOfOthers * pivot)) continue;
                // Without this witness's own say the bank stands elsewhere, and its error counts against the pair.
                var without = bank - gain[lane] * pull[lane] / others;
                sums[lane].Add(1 / (1 / weights[lane] + gain[lane] * gain[lane] / others), without, pull[lane] / weights[lane] + gain[lane] * (bank - without));
            }
        }
        for (var lane = 0; lane < Read; lane++)
        {
            var s = sums[lane];
            if (!(s.Weight > 0)) continue;
            var at = Read * v + lane;
            _mean[at] = s.Bank / s.Weight;
            _square[at] = Math.Max(0, s.Square - _mean[at] * s.Bank);
            _slope[at] = s.Product - _mean[at] * s.Left;
        }
    }

    /// <summary>Weighted sums of a regression of residuals on the bank.</summary>
    private struct Sums
    {
        public double Weight, Bank, Square, Left, Product;

        public void Add(double weight, double bank, double left)
        {
            Weight += weight;
            Bank += weight * bank;
            Square += weight * bank * bank;
            Left += weight * left;
            Product += weight * bank * left;
        }
    }

    /// <summary>Spread of a class's gains by expectation and maximisation (Dempster, Laird and Rubin 1977), drawn to the prior by four vehicles' worth.</summary>
    private double Spread(int gain, int lane)
    {
        var class_ = _solve.System.Gain[Lanes * gain + lane];
        var prior = RoadPriors.OwnGainSpread * Math.Abs(class_);
        var of = Enumerable.Range(0, _same.Length).Where(v => _same[v] == v && _p.GainOf[v] == gain && _square[Read * v + lane] > 0).ToArray();
        var variance = prior * prior;
        for (var round = 0; round < MostRounds; round++)
        {
            var sum = RoadPriors.PriorCount * prior * prior;
            foreach (var v in of)
            {
                var weight = _square[Read * v + lane] + 1 / variance;
                var own = _slope[Read * v + lane] / weight;
                sum += Math.Min(own * own, MostSpreads * MostSpreads * variance) + 1 / weight;
            }
            var next = sum / (RoadPriors.PriorCount + of.Length);
            var moved = Math.Abs(next - variance);
            variance = next;
            if (moved <= Settled * variance) break;
        }
        return Math.Sqrt(variance);
    }
}
