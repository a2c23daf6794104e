using System.Runtime.Intrinsics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// One pass over the sightings: residuals, Huber weights (Huber 1964) and their sums into the system, and the moments the next round's
/// spreads come from. All witnesses of a run at once.
/// </summary>
internal sealed class RoadWeighing(RoadProblem p, RoadSystem system, TripSpread spread)
{
    private const int Lanes = RoadProblem.Lanes;

    /// <summary>Squares within and between trips, by witness, of the last pass.</summary>
    public double[] Within { get; private set; } = new double[Lanes];
    public double[] Between { get; private set; } = new double[Lanes];

    /// <summary>Squared run and trip spreads by witness.</summary>
    public static (Vector128<float> Run, Vector128<float> Trip) Squares((double Run, double Trip)[] noise)
    {
        static float Square(double x) => (float)(x * x);
        return (Vector128.Create(Square(noise[0].Run), Square(noise[1].Run), Square(noise[2].Run), 0), Vector128.Create(Square(noise[0].Trip), Square(noise[1].Trip), Square(noise[2].Trip), 0));
    }

    /// <summary>Weights of a sighting's witnesses for their residuals: the run's and its own variance, and the trip's times its runs, so that a trip never counts for more than one draw of its own spread.</summary>
    /// <remarks>Single precision: seven digits of a weight are plenty, and the answer at which the steps end does not depend on the rest.</remarks>
    public static Vector256<double> Weight(Vector256<double> residual, Vector128<float> own, Vector128<float> size, Vector128<float> run, Vector128<float> trip, Vector128<float> spread, bool robust)
    {
        var variance = own + run + size * trip;
        if (!robust) return RoadSystem.Widen(Vector128<float>.One / variance) & RoadSystem.Witnesses;
        var away = Vector128.Abs(Vector128.Narrow(residual.GetLower(), residual.GetUpper()));
        return RoadSystem.Widen(Vector128.Min(Vector128<float>.One, Vector128.Create((float)RobustMean.HuberK) * spread / away) / variance) & RoadSystem.Witnesses;
    }

    public void Pass((double Run, double Trip)[] noise, bool robust)
    {
        var parts = new (double[] Gains, Vector256<double> Within, Vector256<double> Between)[p.Graph.ByVehicle.Count];
        p.Graph.ByVehicle.Each((part, from, to) =>
        {
            var (gains, within, between) = (new double[Lanes * system.Classes], Vector256<double>.Zero, Vector256<double>.Zero);
            var (run, trip) = Squares(noise);
            var (sums, squares) = (Array.Empty<Vector256<double>>(), Array.Empty<Vector256<double>>());
            for (var v = from; v < to; v++)
            {
                var trips = p.TripFrom[v + 1] - p.TripFrom[v];
                if (sums.Length < trips) (sums, squares) = (new Vector256<double>[2 * trips], new Vector256<double>[2 * trips]);
                Array.Clear(sums, 0, trips);
                Array.Clear(squares, 0, trips);
                Vehicle(v, run, trip, robust, gains, sums, squares);
                var (w, b) = spread.Squares(v, sums.AsSpan(0, trips), squares.AsSpan(0, trips));
                within += w;
                between += b;
            }
            parts[part] = (gains, within, between);
        });
        var force = RoadSystem.Sum(parts.Select(x => x.Gains).ToArray(), Lanes * system.Classes);
        for (var i = 0; i < force.Length; i++) if (i % Lanes < 2) system.Force[system.GainAt + i] = force[i];
        (Within, Between) = (Total(parts.Select(x => x.Within)), Total(parts.Select(x => x.Between)));
    }

    private void Vehicle(int v, Vector128<float> run, Vector128<float> trip, bool robust, double[] gains, Vector256<double>[] sums, Vector256<double>[] squares)
    {
        var (at, first) = (Lanes * system.ClassOf[v], p.TripFrom[v]);
        var (gain, mine) = (Vector256.LoadUnsafe(ref system.Gain[at]), Vector256.LoadUnsafe(ref system.U[Lanes * v]));
        var (force, tilted) = (Vector256<double>.Zero, Vector256<double>.Zero);
        for (var e = p.Graph.VehicleFrom[v]; e < p.Graph.VehicleFrom[v + 1]; e++)
        {
            var bank = system.Bank[p.Graph.CellOf[e]];
            var (predicted, weights, pull) = (mine + gain * bank, Vector256<double>.Zero, Vector256<double>.Zero);
            for (var i = p.Graph.SightingFrom[e]; i < p.Graph.SightingFrom[e + 1]; i++)
            {
                var (own, t) = (Vector128.LoadUnsafe(ref p.Variances[RoadProblem.Witnesses * i]), p.Trip[i]);
                var deviation = Vector128.Sqrt(own + run + trip);
                var residual = RoadSystem.Widen(Vector128.LoadUnsafe(ref p.Values[RoadProblem.Witnesses * i])) - predicted;
                var weight = Weight(residual, own, Vector128.LoadUnsafe(ref p.TripSize[Lanes * t]), run, trip, deviation, robust);
                weights += weight;
                pull += weight * residual;
                // A silent witness has an infinite deviation, and its residual counts for nothing.
                var bound = RoadSystem.Widen(deviation) * TripSpread.Cut;
                var cut = Vector256.Min(Vector256.Max(residual, -bound), bound) & Vector256.LessThan(bound, Vector256.Create(double.PositiveInfinity));
                sums[t - first] += cut;
                squares[t - first] += cut * cut;
            }
            var load = weights * gain;
            Vector128.Narrow(load.GetLower(), load.GetUpper()).StoreUnsafe(ref system.Coefficients[Lanes * e]);
            system.Coefficients[Lanes * e + 3] = (float)Vector256.Sum(pull * gain);
            force += pull;
            tilted += pull * bank;
        }
        (force & RoadSystem.Witnesses).StoreUnsafe(ref system.Force[Lanes * v]);
        (Vector256.LoadUnsafe(ref gains[at]) + tilted).StoreUnsafe(ref gains[at]);
    }

    private static double[] Total(IEnumerable<Vector256<double>> parts)
    {
        var sum = parts.Aggregate(Vector256<double>.Zero, (a, b) => a + b) / TripSpread.LeftByCut;
        return [sum[0], sum[1], sum[2], 0];
    }
}
