namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// How much a witness varies beyond its runs' own standard errors: within a trip, and between the trips of a vehicle (wind, load,
/// the sensor's zero at key-on). Moments of the residuals, cut at 2.5 of their present standard deviations so that gross errors do not
/// blow the spread up, each drawn to its prior by four observations' worth.
/// </summary>
internal static class TripSpread
{
    private const double Cut = 2.5;

    /// <summary>Share of a normal variance left by the cut: 2Φ(k) − 1 − 2kφ(k) + 2k²(1 − Φ(k)) at k = 2.5.</summary>
    private const double LeftByCut = 0.97757;

    public static (double Run, double Trip) Of(Witness witness, RoadProblem p, double[] residuals, RoadSolve solve)
    {
        var (priorRun, priorTrip) = RoadPriors.Noise(witness);
        var byTrip = new (int Vehicle, int N, double Sum, double Squares, double Own)[p.SizeOfTrip.Count];
        var used = new double[p.CellList.Count];
        var precision = new double[p.CellList.Count];
        for (var k = 0; k < residuals.Length; k++)
        {
            var o = p.Observations[k];
            var load = CellLoad(o.Witness, o.Gain, p, solve);
            var weighed = load * load * solve.WeightOf(k);
            precision[o.Cell] += weighed;
            if (o.Witness != witness) continue;
            used[o.Cell] += weighed;
            var t = byTrip[o.Trip];
            var bound = Cut * solve.SpreadOf(o);
            var cut = Math.Clamp(residuals[k], -bound, bound) / Math.Sqrt(LeftByCut);
            byTrip[o.Trip] = (o.Vehicle, t.N + 1, t.Sum + cut, t.Squares + cut * cut, t.Own + o.Variance);
        }
        var trips = byTrip.Where(t => t.N > 0).ToArray(); // trips are counted per witness
        if (trips.Length == 0) return (priorRun, priorTrip);
        var taken = 0.0; // residuals that the cells themselves took up
        for (var c = 0; c < used.Length; c++) taken += used[c] / (precision[c] + 1 / (RoadPriors.CellWidth * RoadPriors.CellWidth));
        var all = trips.Sum(t => t.N);
        var kept = Math.Max(0.1, 1 - taken / all);
        var (within, freedom, own) = (0.0, 0.0, 0.0);
        foreach (var t in trips)
        {
            within += t.Squares - t.Sum * t.Sum / t.N;
            freedom += (t.N - 1) * kept;
            own += t.Own;
        }
        var run = Shrink(freedom > 0 ? within / freedom - own / all : 0, freedom, priorRun);
        var (between, degrees) = (0.0, 0.0);
        foreach (var vehicle in trips.GroupBy(t => t.Vehicle).Where(g => g.Count() > 1))
        {
            var means = vehicle.Select(t => (Mean: t.Sum / t.N, Error: (run * run + t.Own / t.N) / t.N)).ToArray();
            var centre = means.Average(m => m.Mean);
            between += means.Sum(m => (m.Mean - centre) * (m.Mean - centre)) - means.Sum(m => m.Error) * (means.Length - 1) / means.Length;
            degrees += means.Length - 1;
        }
        var trip = Shrink(degrees > 0 ? between / degrees : 0, degrees, priorTrip);
        return (run, trip);
    }

    private static double Shrink(double variance, double freedom, double prior) =>
        Math.Sqrt((RoadPriors.PriorCount * prior * prior + freedom * Math.Max(0, variance)) / (RoadPriors.PriorCount + freedom));

    private static double CellLoad(Witness witness, int gain, RoadProblem p, RoadSolve solve) => witness switch
    {
        Witness.BankReading => 1 + Steering.SteeringEquations.RollGain,
        Witness.Torque => solve.U[p.TorqueGain[gain]],
        _ => solve.U[p.AngleGain[gain]],
    };
}
