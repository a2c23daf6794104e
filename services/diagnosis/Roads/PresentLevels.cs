using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// Where a vehicle's figures stand at its last trip. Pressures, tyres and worn joints let them wander, so that the mean of some weeks is
/// not where they are now. Means of trips, the road's share taken off, follow a random walk seen with noise (the local level model;
/// Harvey 1989), whose two variances all vehicles tell together; a step that neither explains starts the level anew.
/// </summary>
internal sealed class PresentLevels
{
    private const int Lanes = RoadProblem.Lanes, Read = 2;
    private const double SoonDays = 10, LaterDays = 28, LatestDays = 70; // between trips that tell of noise, and of the walk
    private const double Share = 0.8, OfNormal = 1.642;                  // square that this share of standard normal ones stays below: tails count
    private const double StepSquare = 16;                                // of the forecast's variance: four standard deviations

    private readonly record struct TripMean(double Day, double Value, double Variance);

    private readonly RoadProblem _p;
    private readonly RoadSolve _solve;
    private readonly OwnGains _gains;
    private readonly TripMean[] _trips; // by trip and witness; infinite variance where it was silent

    public PresentLevels(RoadProblem problem, RoadSolve solve, OwnGains gains)
    {
        (_p, _solve, _gains) = (problem, solve, gains);
        _trips = new TripMean[Read * problem.Trips];
        problem.Graph.ByVehicle.Each((_, from, to) =>
        {
            for (var v = from; v < to; v++) Means(v);
        });
        for (var lane = 0; lane < Read; lane++) (Noise[lane], PerDay[lane]) = Variances(lane);
    }

    /// <summary>Variance of a trip's mean beyond its runs' errors, by witness, and what the walk adds to the variance in a day.</summary>
    public double[] Noise { get; } = new double[Read];
    public double[] PerDay { get; } = new double[Read];

    /// <summary>
    /// The figure at the vehicle's last trip. The error of the mean stays in and the level's comes on top: the roads of the last trips are
    /// few, and what the vehicle's own gain makes of them is known less well than its spread from road to road tells.
    /// </summary>
    /// <param name="vehicle">Number of the vehicle.</param>
    /// <param name="witness">Torque or angle.</param>
    /// <param name="figure">Its mean over all trips.</param>
    public Estimate Of(int vehicle, Witness witness, Estimate figure)
    {
        var lane = (int)witness;
        var (level, variance, day) = (0.0, double.PositiveInfinity, 0.0);
        foreach (var trip in InTime(vehicle, lane))
        {
            var seen = trip.Variance + Noise[lane];
            var expected = variance + PerDay[lane] * (trip.Day - day);
            var miss = trip.Value - level;
            if (!double.IsFinite(expected) || miss * miss > StepSquare * (expected + seen)) (level, variance) = (trip.Value, seen);
            else (level, variance) = (level + expected / (expected + seen) * miss, expected * seen / (expected + seen));
            day = trip.Day;
        }
        return double.IsFinite(variance) ? new(figure.Value + level, Math.Sqrt(figure.StandardError * figure.StandardError + variance)) : figure;
    }

    private IEnumerable<TripMean> InTime(int vehicle, int lane)
    {
        var trips = new List<TripMean>();
        for (var t = _p.TripFrom[vehicle]; t < _p.TripFrom[vehicle + 1]; t++)
            if (double.IsFinite(_trips[Read * t + lane].Variance)) trips.Add(_trips[Read * t + lane]);
        return trips.OrderBy(t => t.Day).ThenBy(t => t.Value);
    }

    /// <summary>Means of a vehicle's trips less its figure and the road's share.</summary>
    private void Means(int v)
    {
        var (graph, system, first) = (_p.Graph, _solve.System, Read * _p.TripFrom[v]);
        var sums = new (double Weight, double Value, double Time)[Read * (_p.TripFrom[v + 1] - _p.TripFrom[v])];
        for (var lane = 0; lane < Read; lane++)
        {
            var run = _solve.Noise[lane].Run * _solve.Noise[lane].Run;
            var gain = system.Gain[Lanes * _p.GainOf[v] + lane] + _gains.Departure(v, (Witness)lane).Value;
            // The figure is the one put right for the vehicle's own gain.
            var mine = system.U[Lanes * v + lane] + _gains.Of(v, (Witness)lane).Shift;
            for (var e = graph.VehicleFrom[v]; e < graph.VehicleFrom[v + 1]; e++)
                for (var i = graph.SightingFrom[e]; i < graph.SightingFrom[e + 1]; i++)
                {
                    double own = _p.Variances[RoadProblem.Witnesses * i + lane];
                    if (!double.IsFinite(own)) continue;
                    var (weight, left) = (1 / (own + run), _p.Values[RoadProblem.Witnesses * i + lane] - mine - gain * system.Bank[graph.CellOf[e]]);
                    ref var s = ref sums[Read * _p.Trip[i] - first + lane];
                    s = (s.Weight + weight, s.Value + weight * left, s.Time + weight * (_p.Run(_p.PlaceOf[i]).Start / (double)TimeSpan.TicksPerDay));
                }
        }
        for (var k = 0; k < sums.Length; k++)
            _trips[first + k] = sums[k].Weight > 0 ? new(sums[k].Time / sums[k].Weight, sums[k].Value / sums[k].Weight, 1 / sums[k].Weight) : new(0, 0, double.PositiveInfinity);
    }

    /// <summary>Noise and walk from how far trips of a vehicle lie apart soon after each other and weeks later, each drawn to its prior by four pairs' worth.</summary>
    private (double Noise, double PerDay) Variances(int lane)
    {
        var (soon, later) = (new List<(double Square, double Days)>(), new List<(double Square, double Days)>());
        for (var v = 0; v < _p.Vehicles.Length; v++)
        {
            var trips = InTime(v, lane).ToArray();
            for (var i = 0; i + 1 < trips.Length; i++)
            {
                if (trips[i + 1].Day - trips[i].Day <= SoonDays) soon.Add(Apart(trips[i], trips[i + 1]));
                var j = Array.FindIndex(trips, i + 1, t => t.Day - trips[i].Day >= LaterDays);
                if (j >= 0 && trips[j].Day - trips[i].Day <= LatestDays) later.Add(Apart(trips[i], trips[j]));
            }
        }
        var (priorNoise, priorPerDay) = (Math.Pow(RoadPriors.Noise((Witness)lane).Trip, 2), RoadPriors.WalkPerDay((Witness)lane));
        var (near, far) = (Square(soon), Square(later));
        var perDay = later.Count == 0 || soon.Count == 0 ? 0 : Math.Max(0, (far.Square - near.Square) / Math.Max(1, far.Days - near.Days));
        perDay = (RoadPriors.PriorCount * priorPerDay + later.Count * perDay) / (RoadPriors.PriorCount + later.Count);
        var noise = Math.Max(0, near.Square - perDay * near.Days) / 2;
        return ((RoadPriors.PriorCount * priorNoise + soon.Count * noise) / (RoadPriors.PriorCount + soon.Count), perDay);
    }

    private static (double Square, double Days) Apart(TripMean a, TripMean b) => (Math.Max(0, Math.Pow(b.Value - a.Value, 2) - a.Variance - b.Variance), b.Day - a.Day);

    private static (double Square, double Days) Square(List<(double Square, double Days)> pairs)
    {
        if (pairs.Count == 0) return (0, 0);
        var squares = pairs.Select(p => p.Square).Order().ToArray();
        return (squares[(int)(Share * (squares.Length - 1))] / OfNormal, pairs.Average(p => p.Days));
    }
}
