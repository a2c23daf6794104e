namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// How much a witness varies beyond its runs' own standard errors: within a trip, and between the trips of a vehicle (wind, load,
/// the sensor's zero at key-on). Moments of the residuals, each drawn to its prior by four observations' worth.
/// </summary>
internal static class TripSpread
{
    public static (double Run, double Trip) Of(Witness witness, RoadProblem p, double[] residuals, double[] weight, RoadSolve solve)
    {
        var (priorRun, priorTrip) = RoadPriors.Noise(witness);
        var trips = new SortedDictionary<int, (int Vehicle, int N, double Sum, double Squares, double Own)>();
        var used = new double[p.CellList.Count];
        var precision = new double[p.CellList.Count];
        for (var k = 0; k < residuals.Length; k++)
        {
            var o = p.Observations[k];
            var load = CellLoad(o.Witness, o.Gain, p, solve);
            precision[o.Cell] += load * load * solve.WeightOf(k);
            if (o.Witness != witness) continue;
            used[o.Cell] += load * load * solve.WeightOf(k);
            var t = trips.GetValueOrDefault(o.Trip);
            var r = Math.Sqrt(weight[k]) * residuals[k]; // Huber's winsorised square
            trips[o.Trip] = (o.Vehicle, t.N + 1, t.Sum + weight[k] * residuals[k], t.Squares + r * r, t.Own + o.Variance);
        }
        if (trips.Count == 0) return (priorRun, priorTrip);
        var taken = 0.0; // residuals that the cells themselves took up
        for (var c = 0; c < used.Length; c++) taken += used[c] / (precision[c] + 1 / (RoadPriors.CellWidth * RoadPriors.CellWidth));
        var all = trips.Values.Sum(t => t.N);
        var kept = Math.Max(0.1, 1 - taken / all);
        var (within, freedom, own) = (0.0, 0.0, 0.0);
        foreach (var t in trips.Values)
        {
            within += t.Squares - t.Sum * t.Sum / t.N;
            freedom += (t.N - 1) * kept;
            own += t.Own;
        }
        var run = Shrink(freedom > 0 ? within / freedom - own / all : 0, freedom, priorRun);
        var (between, degrees) = (0.0, 0.0);
        foreach (var vehicle in trips.Values.GroupBy(t => t.Vehicle).Where(g => g.Count() > 1))
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
