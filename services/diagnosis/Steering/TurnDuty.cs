namespace WearWatch.Diagnosis.Steering;

/// <summary>
/// How much a vehicle turns, left against right. Outer shoulders wear in turns as they do under toe-in, and one-way routes wear one side:
/// what is turned tells the two apart. Adds up over streams.
/// </summary>
/// <param name="LeftDeg">Heading turned to the left, deg.</param>
/// <param name="RightDeg">Heading turned to the right, deg, positive.</param>
/// <param name="TightLeftM">Distance in left turns of a radius below 20 m, m: where inner and outer wheel need much different angles (Ackermann) and scrub if they have them not.</param>
/// <param name="TightRightM">The same to the right.</param>
/// <param name="MovedM">Distance by the speed channel, m.</param>
public sealed record TurnDuty(double LeftDeg, double RightDeg, double TightLeftM, double TightRightM, double MovedM)
{
    /// <summary>Below this radius a turn is tight, m (from memory: a van's kerb-to-kerb circle has about 6, a bus's about 11).</summary>
    public const double TightRadiusM = 20;

    private const double LeastTurnedDeg = 90;

    /// <summary>Share of turning done to the left, 0 to 1; null below 90 deg turned.</summary>
    public double? LeftShare => LeftDeg + RightDeg >= LeastTurnedDeg ? LeftDeg / (LeftDeg + RightDeg) : null;

    /// <summary>Heading turned per distance, deg/km; null below 1 km.</summary>
    public double? TurnDensityDegPerKm => MovedM >= 1000 ? (LeftDeg + RightDeg) / (MovedM / 1000) : null;

    internal static TurnDuty? Of(GatedStream stream)
    {
        var blocks = stream.Blocks;
        if (!blocks.Has(SteeringChannel.YawRate) || !blocks.Has(SteeringChannel.Speed)) return null;
        var speed = blocks.Mean(SteeringChannel.Speed);
        var (left, right, tightLeft, tightRight, moved) = (0.0, 0.0, 0.0, 0.0, 0.0);
        for (var i = 0; i < blocks.Count; i++)
        {
            if (!(speed[i] > StreamStudy.MovingKmH)) continue;
            double yaw = stream.Yaw(i), metres = speed[i] / 3.6 * blocks.Seconds[i];
            moved += metres;
            if (double.IsNaN(yaw)) continue;
            if (yaw > 0) left += yaw * blocks.Seconds[i];
            else right -= yaw * blocks.Seconds[i];
            // Radius = speed over yaw rate.
            if (speed[i] / 3.6 >= TightRadiusM * Math.Abs(yaw) * Math.PI / 180) continue;
            if (yaw > 0) tightLeft += metres;
            else tightRight += metres;
        }
        return new(left, right, tightLeft, tightRight, moved);
    }

    internal static TurnDuty? Sum(IEnumerable<TurnDuty?> duties)
    {
        var known = duties.OfType<TurnDuty>().ToArray();
        double Total(Func<TurnDuty, double> of) => known.Select(of).Order().Sum();
        return known.Length == 0 ? null : new(Total(d => d.LeftDeg), Total(d => d.RightDeg), Total(d => d.TightLeftM), Total(d => d.TightRightM), Total(d => d.MovedM));
    }
}
