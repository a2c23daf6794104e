namespace WearWatch.Diagnosis.Steering;

/// <summary>Whether a signal's sign can be told from turns, and which it is.</summary>
public enum SignVerdict
{
    /// <summary>Too little turning, or a channel is missing.</summary>
    NotTold,
    /// <summary>Positive to the left, as ISO 8855 wants and as the yaw rate says.</summary>
    Agrees,
    /// <summary>Opposite to the yaw rate.</summary>
    Opposite,
}

/// <summary>
/// Signs of angle, driver torque and lateral acceleration against the yaw rate, from turns. Where most signals oppose the yaw rate it is the
/// yaw rate that is turned round, and what rests on it is left out either way.
/// </summary>
/// <remarks>Signs on a J1939 bus differ from maker to maker; angle and yaw rate must rise together (common practice, no source).</remarks>
public sealed record SignCheck(SignVerdict Angle, SignVerdict Torque, SignVerdict LateralAcceleration)
{
    private const double LeastTurnedDeg = 60;
    private const double LeastCorrelation = 0.5;
    private const double StraightDegS = 1;

    internal static SignCheck Of(GatedStream stream) => new(
        Against(stream, SteeringChannel.SteeringWheelAngle, _ => 1),
        Against(stream, SteeringChannel.DriverTorque, i => stream.Blocks.Mean(SteeringChannel.Speed)[i]),
        Against(stream, SteeringChannel.LateralAcceleration, i => stream.Blocks.Mean(SteeringChannel.Speed)[i]));

    /// <summary>Sign of the correlation with the yaw rate (times what the signal grows with) while turning, less the signal's mean straight ahead.</summary>
    private static SignVerdict Against(GatedStream stream, SteeringChannel channel, Func<int, double> growsWith)
    {
        var blocks = stream.Blocks;
        if (!blocks.Has(channel) || !blocks.Has(SteeringChannel.YawRate) || !blocks.Has(SteeringChannel.Speed)) return SignVerdict.NotTold;
        var values = blocks.Mean(channel);
        var speed = blocks.Mean(SteeringChannel.Speed);
        var (level, count) = (0.0, 0);
        var (turned, xy, xx, yy) = (0.0, 0.0, 0.0, 0.0);
        for (var i = 0; i < blocks.Count; i++)
            if (speed[i] > StreamStudy.MovingKmH && Math.Abs(stream.Yaw(i)) < StraightDegS && !float.IsNaN(values[i])) (level, count) = (level + values[i], count + 1);
        level = count > 0 ? level / count : 0;
        for (var i = 0; i < blocks.Count; i++)
        {
            double yaw = stream.Yaw(i), value = values[i];
            if (!(speed[i] > StreamStudy.MovingKmH) || !(Math.Abs(yaw) > StraightGates.TurnDegS) || double.IsNaN(value)) continue;
            turned += Math.Abs(yaw) * blocks.Seconds[i];
            var x = yaw * growsWith(i);
            (xy, xx, yy) = (xy + x * (value - level), xx + x * x, yy + (value - level) * (value - level));
        }
        if (turned < LeastTurnedDeg || !(xx * yy > 0) || Math.Abs(xy) < LeastCorrelation * Math.Sqrt(xx * yy)) return SignVerdict.NotTold;
        return xy > 0 ? SignVerdict.Agrees : SignVerdict.Opposite;
    }

    /// <summary>Over streams: opposite wherever one was, for a sign is wired once.</summary>
    internal static SignCheck Join(IEnumerable<SignCheck> checks)
    {
        var all = checks.ToArray();
        return new(all.Max(c => c.Angle), all.Max(c => c.Torque), all.Max(c => c.LateralAcceleration));
    }
}
