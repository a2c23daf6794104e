namespace WearWatch.Diagnosis.Steering;

/// <summary>Stretches in which a channel cannot be believed.</summary>
internal static class SignalFaults
{
    private const float MovingKmH = 5; // from memory

    private static readonly SteeringChannel[] Watched =
        [SteeringChannel.SteeringWheelAngle, SteeringChannel.DriverTorque, SteeringChannel.AssistTorque, SteeringChannel.YawRate, SteeringChannel.LateralAcceleration];

    /// <summary>Blanks every channel that stays exactly the same for more than 30 s of driving.</summary>
    /// <returns>Seconds blanked for each channel that froze.</returns>
    public static IReadOnlyDictionary<SteeringChannel, double> BlankFrozen(Blocks blocks)
    {
        var frozen = new Dictionary<SteeringChannel, double>();
        foreach (var channel in Watched.Where(blocks.Has))
            if (BlankFrozen(blocks, channel) is var seconds and > 0) frozen[channel] = seconds;
        return frozen;
    }

    private static double BlankFrozen(Blocks blocks, SteeringChannel channel)
    {
        var speed = blocks.Mean(SteeringChannel.Speed);
        var min = blocks.Min(channel);
        var max = blocks.Max(channel);
        var blanked = 0.0;
        for (var from = 0; from < blocks.Count;)
        {
            var to = from;
            var seconds = 0.0;
            while (to < blocks.Count && max[to] == min[from] && min[to] == min[from] && (to == from || blocks.Joined[to]))
            {
                if (!speed.IsEmpty && speed[to] > MovingKmH) seconds += blocks.Seconds[to];
                to++;
            }
            if (seconds > StraightGates.FrozenS)
            {
                blocks.Blank(channel, from, to);
                blanked += seconds;
            }
            from = Math.Max(to, from + 1);
        }
        return blanked;
    }
}
