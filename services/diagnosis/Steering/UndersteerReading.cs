using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Steering;

/// <summary>
/// Understeer gradient in left and in right turns, rad/g, from turns met on the road: road-wheel angle beyond the geometric L·r/v against
/// lateral acceleration v·r. A difference between the sides points to camber, a soft tyre or a bent arm; a duty all one way leaves one side unknown.
/// </summary>
/// <remarks>
/// ISO 4138 asks for steady circles; steady seconds of ordinary bends stand in for them, one point a turn. δ = L/R + K·ay/g: Gillespie,
/// Fundamentals of Vehicle Dynamics (1992). Lateral acceleration is taken from speed and yaw rate, which a bank does not touch.
/// </remarks>
public sealed record UndersteerReading(Estimate? LeftRadPerG, Estimate? RightRadPerG, int LeftTurns, int RightTurns)
{
    private const double LeastSpeedMs = 8, LeastLateral = 0.5, MostLateral = 4;   // m/s, m/s² (from memory: linear to about 4)
    private const double SteadyShare = 0.15, SteadySpeedSlope = 0.5;              // share of the yaw rate, m/s²
    private const int LeastTurns = 6;
    private const double LeastSpread = 0.4;                                       // m/s², one standard deviation among the turns

    internal static UndersteerReading? Of(GatedStream stream, ReductionVehicle vehicle)
    {
        var blocks = stream.Blocks;
        if (vehicle is not { WheelbaseM: { } wheelbase, SteeringRatio: { } ratio }) return null;
        if (!blocks.Has(SteeringChannel.YawRate) || !blocks.Has(SteeringChannel.SteeringWheelAngle) || !blocks.Has(SteeringChannel.Speed)) return null;
        var angle = blocks.Mean(SteeringChannel.SteeringWheelAngle);
        var speed = blocks.Mean(SteeringChannel.Speed);
        var (left, right) = (new List<(double Lateral, double Excess)>(), new List<(double Lateral, double Excess)>());
        var (lateralSum, excessSum, count) = (0.0, 0.0, 0);
        for (var i = 1; i < blocks.Count; i++)
        {
            double yaw = stream.Yaw(i) * Math.PI / 180, before = stream.Yaw(i - 1) * Math.PI / 180, v = speed[i] / 3.6;
            var lateral = v * yaw;
            var steady = blocks.Joined[i] && v > LeastSpeedMs && Math.Abs(lateral) is >= LeastLateral and <= MostLateral
                && Math.Abs(yaw - before) <= SteadyShare * Math.Abs(yaw) && Math.Abs(stream.Slope[i]) <= SteadySpeedSlope && !float.IsNaN(angle[i]);
            if (steady)
            {
                (lateralSum, excessSum, count) = (lateralSum + lateral, excessSum + angle[i] / ratio * Math.PI / 180 - wheelbase * yaw / v, count + 1);
                continue;
            }
            Close();
        }
        Close();
        return left.Count + right.Count == 0 ? null : new(Slope(left), Slope(right), left.Count, right.Count);

        void Close()
        {
            if (count > 0) (lateralSum > 0 ? left : right).Add((lateralSum / count, excessSum / count));
            (lateralSum, excessSum, count) = (0, 0, 0);
        }
    }

    /// <summary>Least-squares slope of the excess angle over lateral acceleration in g; the free level takes the off-centre angle.</summary>
    private static Estimate? Slope(List<(double Lateral, double Excess)> turns)
    {
        var n = turns.Count;
        if (n < LeastTurns) return null;
        var (x, y) = (turns.Average(t => t.Lateral), turns.Average(t => t.Excess));
        var (xx, xy) = (turns.Sum(t => (t.Lateral - x) * (t.Lateral - x)), turns.Sum(t => (t.Lateral - x) * (t.Excess - y)));
        if (!(xx / n >= LeastSpread * LeastSpread)) return null;
        var slope = xy / xx;
        var rest = turns.Sum(t => Math.Pow(t.Excess - y - slope * (t.Lateral - x), 2)) / (n - 2);
        return new(slope * SteeringEquations.Gravity, Math.Sqrt(rest / xx) * SteeringEquations.Gravity);
    }

    internal static UndersteerReading? Join(IEnumerable<UndersteerReading?> parts)
    {
        var known = parts.OfType<UndersteerReading>().ToArray();
        return known.Length == 0 ? null
            : new(MeanOfTrips.Join(known.Select(k => k.LeftRadPerG)), MeanOfTrips.Join(known.Select(k => k.RightRadPerG)), known.Sum(k => k.LeftTurns), known.Sum(k => k.RightTurns));
    }
}
