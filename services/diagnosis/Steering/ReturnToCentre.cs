using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Steering;

/// <summary>
/// Where the wheel comes to rest after turns. With friction it stops short of the middle on the side it came from: half the gap between
/// coming from the left and from the right is half the width of the friction loop, and their mean is the middle itself. A caster split or
/// a bent arm makes the two sides differ in how far they stop short.
/// </summary>
/// <remarks>
/// Half gap of the two branches as in ISO 13674-1's loops (handed down, text not seen); return after turns in the manner of ISO 7401's
/// release is common practice, no source.
/// </remarks>
public sealed record ReturnToCentre
{
    /// <summary>Turns to the left and to the right that ended in straight driving.</summary>
    public required int AfterLeft { get; init; }
    public required int AfterRight { get; init; }
    /// <summary>Wheel angle just after left turns less that of settled straight driving, deg, curvature removed, + left.</summary>
    public Estimate? RestAfterLeftDeg { get; init; }
    /// <summary>The same after right turns.</summary>
    public Estimate? RestAfterRightDeg { get; init; }
    /// <summary>Torque just after left turns less that after right ones, halved, N·m: half the friction loop.</summary>
    public Estimate? HalfLoopNm { get; init; }

    /// <summary>Sum of the two rests, deg: how much more the wheel stops short on one side; 0 for a steering that releases alike.</summary>
    public Estimate? ReleaseAsymmetryDeg =>
        RestAfterLeftDeg is { } l && RestAfterRightDeg is { } r ? new(l.Value + r.Value, Math.Sqrt(l.StandardError * l.StandardError + r.StandardError * r.StandardError)) : null;

    private const double EarlyS = 5, SettledS = 8, EndS = 25; // from memory
    private const int LeastSettled = 5, LeastTurns = 3;

    /// <param name="stream">Gated.</param>
    /// <param name="straightAngle">Wheel angle of a block less what the curvature takes, deg.</param>
    /// <param name="torque">Torque at the wheel by block, null without.</param>
    internal static ReturnToCentre? Of(GatedStream stream, Func<int, double> straightAngle, float[]? torque)
    {
        var blocks = stream.Blocks;
        if (!blocks.Has(SteeringChannel.YawRate) || !blocks.Has(SteeringChannel.SteeringWheelAngle)) return null;
        var (left, right, torqueLeft, torqueRight) = (new List<double>(), new List<double>(), new List<double>(), new List<double>());
        foreach (var end in PullCompensation.TurnEnds(stream))
        {
            var turnedLeft = stream.Yaw(end - 1) > 0;
            var (early, late) = (Mean(stream, end, 0, EarlyS, straightAngle), Mean(stream, end, SettledS, EndS, straightAngle));
            if (early is { } e && late is { } l) (turnedLeft ? left : right).Add(e - l);
            if (torque is null) continue;
            var (held, settled) = (Mean(stream, end, 0, EarlyS, i => torque[i]), Mean(stream, end, SettledS, EndS, i => torque[i]));
            if (held is { } h && settled is { } s) (turnedLeft ? torqueLeft : torqueRight).Add(h - s);
        }
        if (left.Count + right.Count == 0) return null;
        var (a, b) = (MeanOfTrips.Of(torqueLeft, LeastTurns), MeanOfTrips.Of(torqueRight, LeastTurns));
        return new()
        {
            AfterLeft = left.Count,
            AfterRight = right.Count,
            RestAfterLeftDeg = MeanOfTrips.Of(left, LeastTurns),
            RestAfterRightDeg = MeanOfTrips.Of(right, LeastTurns),
            HalfLoopNm = a is { } x && b is { } y ? new((x.Value - y.Value) / 2, Math.Sqrt(x.StandardError * x.StandardError + y.StandardError * y.StandardError) / 2) : null,
        };
    }

    /// <summary>Mean over the straight blocks of a time after the turn; null with too few.</summary>
    private static double? Mean(GatedStream stream, int end, double from, double to, Func<int, double> value)
    {
        var (sum, count) = (0.0, 0);
        for (var i = end; i < stream.Blocks.Count && (i == end || stream.Blocks.Joined[i]); i++)
        {
            var seconds = (stream.Blocks.StartTicks[i] - stream.Blocks.StartTicks[end]) / (double)TimeSpan.TicksPerSecond;
            if (seconds >= to || PullCompensation.Turning(stream, i)) break;
            if (seconds < from || stream.Mode(i) is null || value(i) is var v && double.IsNaN(v)) continue;
            sum += value(i);
            count++;
        }
        return count >= (from > 0 ? LeastSettled : 2) ? sum / count : null;
    }

    internal static ReturnToCentre? Join(IEnumerable<ReturnToCentre?> parts)
    {
        var known = parts.OfType<ReturnToCentre>().ToArray();
        return known.Length == 0 ? null : new()
        {
            AfterLeft = known.Sum(k => k.AfterLeft),
            AfterRight = known.Sum(k => k.AfterRight),
            RestAfterLeftDeg = MeanOfTrips.Join(known.Select(k => k.RestAfterLeftDeg)),
            RestAfterRightDeg = MeanOfTrips.Join(known.Select(k => k.RestAfterRightDeg)),
            HalfLoopNm = MeanOfTrips.Join(known.Select(k => k.HalfLoopNm)),
        };
    }
}
