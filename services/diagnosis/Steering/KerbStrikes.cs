namespace WearWatch.Diagnosis.Steering;

/// <summary>A second in which the vehicle was jolted sideways as by a kerb or a deep hole: a candidate, not proof.</summary>
/// <param name="At">UTC, start of the second.</param>
/// <param name="Rests">Stream and sequence of the chunk, "stream/sequence".</param>
/// <param name="LateralRange">Range of the lateral acceleration within the second, m/s²; null without the channel.</param>
/// <param name="TorqueRange">Range of the driver's torque, N·m; null without the channel.</param>
/// <param name="AngleRange">Range of the steering-wheel angle, deg; null without the channel.</param>
public sealed record KerbStrikeCandidate(DateTimeOffset At, string Rests, double? LateralRange, double? TorqueRange, double? AngleRange);

/// <summary>
/// Finds jolts that several signals felt in the same second. Each signal's range within a second is held against what is usual for the
/// stream, so that rough roads and noisy sensors raise their own bar.
/// </summary>
internal static class KerbStrikes
{
    /// <summary>Times the usual range within a second that a jolt exceeds (from memory).</summary>
    private const double TimesUsual = 6;

    /// <summary>Least ranges within a second: m/s², N·m, deg (from memory; a lane change at speed stays within 3 m/s² and takes longer).</summary>
    private const double LeastLateral = 4, LeastTorque = 3, LeastAngle = 6;

    /// <summary>Signals that must agree.</summary>
    private const int LeastWitnesses = 2;

    /// <summary>Samples a second below which a jolt of a tenth of a second passes unseen.</summary>
    public const double LeastRateHz = 5;

    private const float MovingKmH = 5;
    private const int LeastBlocks = 20;
    /// <summary>Seconds from all over the stream that tell what is usual.</summary>
    private const int UsualFrom = 250;
    private const double SameStrikeS = 3;

    private readonly record struct Witness(SteeringChannel Channel, double Bar);

    public static IReadOnlyList<KerbStrikeCandidate> Find(string streamId, GatedStream stream)
    {
        var blocks = stream.Blocks;
        if (!blocks.Has(SteeringChannel.Speed)) return [];
        Witness[] witnesses =
        [
            .. Bar(blocks, SteeringChannel.LateralAcceleration, LeastLateral),
            .. Bar(blocks, SteeringChannel.DriverTorque, LeastTorque),
            .. Bar(blocks, SteeringChannel.SteeringWheelAngle, LeastAngle),
        ];
        if (witnesses.Length < LeastWitnesses) return [];
        var found = new List<KerbStrikeCandidate>();
        var speed = blocks.Mean(SteeringChannel.Speed);
        var (first, second) = (witnesses[0], witnesses[1]);
        var firstMin = blocks.Min(first.Channel);
        var firstMax = blocks.Max(first.Channel);
        var secondMin = blocks.Min(second.Channel);
        var secondMax = blocks.Max(second.Channel);
        for (var i = 0; i < speed.Length; i++)
        {
            // Two of at most three witnesses: the first or the second is among them.
            if (!(firstMax[i] - firstMin[i] > first.Bar) && !(secondMax[i] - secondMin[i] > second.Bar)) continue;
            if (!(speed[i] > MovingKmH) || blocks.Samples[i] < LeastRateHz * blocks.Seconds[i]) continue;
            if (witnesses.Count(w => Range(blocks, w.Channel, i) > w.Bar) < LeastWitnesses) continue;
            var at = new DateTimeOffset(blocks.StartTicks[i], TimeSpan.Zero);
            if (found.Count > 0 && (at - found[^1].At).TotalSeconds < SameStrikeS) continue;
            found.Add(new(at, $"{streamId}/{blocks.Sequence[i]}", Known(blocks, SteeringChannel.LateralAcceleration, i), Known(blocks, SteeringChannel.DriverTorque, i), Known(blocks, SteeringChannel.SteeringWheelAngle, i)));
        }
        return found;
    }

    private static IEnumerable<Witness> Bar(Blocks blocks, SteeringChannel channel, double least)
    {
        if (!blocks.Has(channel)) yield break;
        var speed = blocks.Mean(SteeringChannel.Speed);
        var ranges = new List<float>();
        for (var i = 0; i < blocks.Count; i += 1 + blocks.Count / UsualFrom)
            if (speed[i] > MovingKmH && Range(blocks, channel, i) is var range && !float.IsNaN(range)) ranges.Add(range);
        if (ranges.Count < LeastBlocks) yield break;
        ranges.Sort();
        yield return new(channel, Math.Max(least, TimesUsual * ranges[ranges.Count / 2]));
    }

    private static float Range(Blocks blocks, SteeringChannel channel, int i) => blocks.Max(channel)[i] - blocks.Min(channel)[i];

    private static double? Known(Blocks blocks, SteeringChannel channel, int i) =>
        blocks.Has(channel) && Range(blocks, channel, i) is var range && !float.IsNaN(range) ? range : null;
}
