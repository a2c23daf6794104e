using System.Runtime.Intrinsics;

namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// How much a witness varies beyond its runs' own standard errors: within a trip, and between the trips of a vehicle (wind, load,
/// the sensor's zero at key-on). Moments of the residuals, cut at 2.5 of their present standard deviations so that gross errors do not
/// blow the spread up, each drawn to its prior by four observations' worth.
/// </summary>
internal sealed class TripSpread
{
    public const double Cut = 2.5;

    /// <summary>Share of a normal variance left by the cut: 2Φ(k) − 1 − 2kφ(k) + 2k²(1 − Φ(k)) at k = 2.5.</summary>
    public const double LeftByCut = 0.97757;

    private const int Lanes = RoadProblem.Lanes;

    // By witness. Of all trips: observations, trips, own variances. Of vehicles with several trips: trips less one, and what the runs' own
    // spread brings to the squares between trips, as a factor of the run variance and as a sum.
    private readonly double[] _all = new double[Lanes], _freedom = new double[Lanes], _own = new double[Lanes];
    private readonly double[] _degrees = new double[Lanes], _perRun = new double[Lanes], _perOwn = new double[Lanes];
    private readonly RoadProblem _p;

    public TripSpread(RoadProblem problem)
    {
        _p = problem;
        var own = new double[Lanes * problem.Trips];
        for (var i = 0; i < problem.Trip.Length; i++)
            for (var lane = 0; lane < 3; lane++)
                if (problem.Variances[RoadProblem.Witnesses * i + lane] is var variance && float.IsFinite(variance)) own[Lanes * problem.Trip[i] + lane] += variance;
        for (var v = 0; v < problem.Vehicles.Length; v++) for (var lane = 0; lane < 3; lane++) Count(v, lane, own);
    }

    /// <summary>Squares within trips and between the trips' means of one vehicle, all witnesses at once.</summary>
    public (Vector256<double> Within, Vector256<double> Between) Squares(int v, ReadOnlySpan<Vector256<double>> sums, ReadOnlySpan<Vector256<double>> squares)
    {
        var (within, means, of, count) = (Vector256<double>.Zero, Vector256<double>.Zero, Vector256<double>.Zero, Vector256<double>.Zero);
        for (var t = 0; t < sums.Length; t++)
        {
            var n = Size(_p.TripFrom[v] + t);
            var some = Vector256.GreaterThan(n, Vector256<double>.Zero);
            var mean = sums[t] / Vector256.Max(n, Vector256<double>.One);
            within += squares[t] - sums[t] * mean;
            means += mean;
            of += mean * mean;
            count += Vector256<double>.One & some;
        }
        return (within, of - means * means / Vector256.Max(count, Vector256<double>.One));
    }

    /// <summary>Runs of a trip, by witness.</summary>
    public Vector256<double> Size(int trip) => RoadSystem.Load(_p.TripSize, trip);

    /// <param name="witness">Which witness.</param>
    /// <param name="within">Squares within trips.</param>
    /// <param name="between">Squares between trips' means about their vehicle's.</param>
    /// <param name="taken">Observations' worth that the cells took up.</param>
    public (double Run, double Trip) Of(Witness witness, double within, double between, double taken)
    {
        var (lane, (priorRun, priorTrip)) = ((int)witness, RoadPriors.Noise(witness));
        if (_all[lane] == 0) return (priorRun, priorTrip);
        var freedom = _freedom[lane] * Math.Max(0.1, 1 - taken / _all[lane]);
        var run = Shrink(freedom > 0 ? within / freedom - _own[lane] / _all[lane] : 0, freedom, priorRun);
        var excess = between - _perRun[lane] * run * run - _perOwn[lane];
        return (run, Shrink(_degrees[lane] > 0 ? excess / _degrees[lane] : 0, _degrees[lane], priorTrip));
    }

    private void Count(int v, int lane, double[] own)
    {
        var (trips, perRun, perOwn) = (0, 0.0, 0.0);
        for (var t = _p.TripFrom[v]; t < _p.TripFrom[v + 1]; t++)
        {
            var n = (double)_p.TripSize[Lanes * t + lane];
            if (n == 0) continue;
            trips++;
            _all[lane] += n;
            _freedom[lane] += n - 1;
            _own[lane] += own[Lanes * t + lane];
            perRun += 1 / n;
            perOwn += own[Lanes * t + lane] / (n * n);
        }
        if (trips < 2) return;
        _degrees[lane] += trips - 1;
        _perRun[lane] += perRun * (trips - 1) / trips;
        _perOwn[lane] += perOwn * (trips - 1) / trips;
    }

    private static double Shrink(double variance, double freedom, double prior) =>
        Math.Sqrt((RoadPriors.PriorCount * prior * prior + freedom * Math.Max(0, variance)) / (RoadPriors.PriorCount + freedom));
}
