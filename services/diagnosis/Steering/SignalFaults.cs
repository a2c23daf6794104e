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
        foreach (var channel in Watched.Where(blocks.IsFlatSomewhere))
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

    /// <summary>Distance of a channel's extreme from its median, in its steps, from which standing exactly at it is saturation and not a coarse step (from memory).</summary>
    private const double LeastStepsAway = 20;

    /// <summary>Blanks whole seconds that stand exactly at a channel's largest or least value, far from where it usually is.</summary>
    /// <returns>Seconds blanked for each channel that was saturated.</returns>
    public static IReadOnlyDictionary<SteeringChannel, double> BlankSaturated(Blocks blocks)
    {
        var saturated = new Dictionary<SteeringChannel, double>();
        foreach (var channel in Watched.Where(blocks.IsFlatSomewhere))
            if (BlankSaturated(blocks, channel) is var seconds and > 0) saturated[channel] = seconds;
        return saturated;
    }

    private static double BlankSaturated(Blocks blocks, SteeringChannel channel)
    {
        var min = blocks.Min(channel);
        var max = blocks.Max(channel);
        var mean = blocks.Mean(channel);
        var (least, most, flat) = (float.PositiveInfinity, float.NegativeInfinity, false);
        for (var i = 0; i < blocks.Count; i++)
        {
            if (min[i] < least) least = min[i];
            if (max[i] > most) most = max[i];
        }
        // A saturated second is flat at the extreme.
        for (var i = 0; i < blocks.Count && !flat; i++) flat = Flat(i, min, max, mean);
        if (!flat) return 0;
        var known = mean.ToArray().Where(float.IsFinite).Order().ToArray();
        if (known.Length == 0) return 0;
        var (middle, away) = (known[known.Length / 2], LeastStepsAway * blocks.Resolution(channel));
        var blanked = 0.0;
        for (var i = 0; i < blocks.Count; i++)
        {
            if (!Flat(i, min, max, mean) || Math.Abs(mean[i] - middle) < away) continue;
            blocks.Blank(channel, i, i + 1);
            blanked += blocks.Seconds[i];
        }
        return blanked;

        bool Flat(int i, ReadOnlySpan<float> min, ReadOnlySpan<float> max, ReadOnlySpan<float> mean) =>
            blocks.Samples[i] > 2 && !float.IsNaN(mean[i]) && min[i] == max[i] && (max[i] == most || min[i] == least);
    }

    /// <summary>At more than this speed nobody turns the wheel by more than this within a second, km/h and deg; in a tight bend below it some do.</summary>
    private const float WrapKmH = 30, WrapDeg = 300;

    /// <summary>A wrap moves the angle by a full turn and what the driver turns meanwhile, deg at the most.</summary>
    private const float TurnedMeanwhileDeg = 60;

    /// <summary>Puts a wheel angle that wraps at a full turn together again and blanks the seconds in which it wrapped.</summary>
    /// <returns>Times it wrapped.</returns>
    public static int Unwrap(Blocks blocks)
    {
        if (!blocks.Has(SteeringChannel.SteeringWheelAngle) || !blocks.Has(SteeringChannel.Speed)) return 0;
        var min = blocks.Min(SteeringChannel.SteeringWheelAngle);
        var max = blocks.Max(SteeringChannel.SteeringWheelAngle);
        var mean = blocks.Mean(SteeringChannel.SteeringWheelAngle);
        var speed = blocks.Mean(SteeringChannel.Speed);
        var (times, turns, last, inside) = (0, 0, float.NaN, false);
        for (var i = 0; i < blocks.Count; i++)
        {
            if (!blocks.Joined[i]) (turns, last, inside) = (0, float.NaN, false);
            if (float.IsNaN(mean[i])) continue;
            if (max[i] - min[i] > WrapDeg && speed[i] > WrapKmH)
            {
                if (!inside) times++;
                inside = true;
                blocks.Blank(SteeringChannel.SteeringWheelAngle, i, i + 1);
                continue;
            }
            var by = float.IsNaN(last) ? 0 : mean[i] + 360 * turns - last;
            var step = (int)MathF.Round(by / 360);
            if (step != 0 && speed[i] > WrapKmH && MathF.Abs(by - 360 * step) < TurnedMeanwhileDeg)
            {
                if (!inside) times++;
                turns -= step;
            }
            if (turns != 0) blocks.Shift(SteeringChannel.SteeringWheelAngle, i, 360 * turns);
            (last, inside) = (mean[i], false);
        }
        return times;
    }

    /// <summary>A position older than this is no position, s: receivers fix once a second, loggers hold what they last had.</summary>
    private const double LongestHeldS = 5;

    /// <summary>Blanks positions that stay exactly the same for more than 5 s of driving.</summary>
    /// <returns>Seconds blanked.</returns>
    public static double BlankHeldPositions(Blocks blocks)
    {
        if (!blocks.Has(SteeringChannel.Speed)) return 0;
        var speed = blocks.Mean(SteeringChannel.Speed);
        var (blanked, from, held) = (0.0, 0, 0.0);
        for (var i = 1; i <= blocks.Count; i++)
        {
            if (i < blocks.Count && blocks.Latitude[i] == blocks.Latitude[from] && blocks.Longitude[i] == blocks.Longitude[from] && blocks.Joined[i])
            {
                if (speed[i] > MovingKmH) held += blocks.Seconds[i];
                continue;
            }
            if (held > LongestHeldS)
            {
                blanked += held;
                blocks.Latitude.AsSpan(from + 1, i - from - 1).Fill(double.NaN);
            }
            (from, held) = (i, 0);
        }
        return blanked;
    }

    /// <summary>Ratio of the torque's liveliness before and after a place from which its unit must have changed (from memory).</summary>
    private const double UnitRatio = 8;

    /// <summary>Seconds on either side, and seconds looked at over a whole stream: a sample of them suffices.</summary>
    private const int LeastLively = 20, MostLively = 300;

    /// <summary>
    /// Whether the torque's numbers change their scale once, without a word: the usual range within a second of driving differs eightfold
    /// between the two parts of the stream at the best cut. Which part is in N·m cannot be known.
    /// </summary>
    public static bool ScaleChanges(Blocks blocks)
    {
        if (!blocks.Has(SteeringChannel.DriverTorque) || !blocks.Has(SteeringChannel.Speed)) return false;
        var min = blocks.Min(SteeringChannel.DriverTorque);
        var max = blocks.Max(SteeringChannel.DriverTorque);
        var speed = blocks.Mean(SteeringChannel.Speed);
        var logs = new List<double>();
        for (var i = 0; i < blocks.Count; i += 1 + blocks.Count / MostLively)
            if (speed[i] > StraightGates.SpeedKmH && max[i] > min[i]) logs.Add(Math.Log(max[i] - min[i]));
        if (logs.Count < 2 * LeastLively) return false;
        var (step, gain, sum, total) = (0.0, 0.0, 0.0, logs.Sum());
        for (var i = 1; i < logs.Count; i++)
        {
            sum += logs[i - 1];
            if (i < LeastLively || logs.Count - i < LeastLively) continue;
            var away = sum / i - (total - sum) / (logs.Count - i);
            if (away * away * i * (logs.Count - i) is var between && between > gain) (step, gain) = (Math.Abs(away), between);
        }
        return step > Math.Log(UnitRatio);
    }
}
