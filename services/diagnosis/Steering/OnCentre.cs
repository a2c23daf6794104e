using MathNet.Numerics.LinearAlgebra;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Steering;

/// <summary>
/// On-centre figures from weave-like stretches: the wheel swings gently to and fro at speed, and torque and angle against lateral
/// acceleration draw a loop. Its two branches, taken in |ay| ≤ 1 m/s², give the figures.
/// </summary>
/// <remarks>
/// In the manner of ISO 13674-1 (scope seen, names from memory): about 100 km/h, 0.2 Hz, ±2 m/s². Pull is the mean of the branches'
/// torque at ay = 0, friction half their gap. Ordinary driving is no test: what deviates from it widens the error.
/// </remarks>
public sealed record OnCentre
{
    /// <summary>Swings, each one way and back.</summary>
    public required int Cycles { get; init; }
    /// <summary>Torque at no lateral acceleration, mean of the branches, N·m, + left.</summary>
    public Estimate? TorqueAtZeroNm { get; init; }
    /// <summary>Half the gap between the branches, N·m: friction.</summary>
    public Estimate? FrictionNm { get; init; }
    /// <summary>Torque per lateral acceleration at ay = 0, N·m per m/s².</summary>
    public Estimate? TorqueGradient { get; init; }
    /// <summary>Lateral acceleration per 100 deg of steering wheel, m/s²: steering sensitivity.</summary>
    public Estimate? SensitivityPer100Deg { get; init; }

    private const double LeastKmH = 60, LeastPeak = 0.4, MostPeak = 2.5;  // km/h, m/s²
    private const double LeastHalfS = 1.5, MostHalfS = 6;                 // 0.08 to 0.33 Hz
    private const int LeastHalves = 6;
    private const double FittedTo = 1;                                    // m/s²
    private const int LeastPoints = 12;

    internal static OnCentre? Of(GatedStream stream, float[]? torque)
    {
        var blocks = stream.Blocks;
        if (!blocks.Has(SteeringChannel.YawRate) || !blocks.Has(SteeringChannel.Speed)) return null;
        var halves = 0;
        var (points, torques, angles) = (new List<(double Lateral, double Way)>(), new List<double>(), new List<double>());
        foreach (var (from, to, swings) in Weaves(stream))
        {
            halves += swings;
            for (var i = from + 1; i < to - 1; i++)
            {
                var lateral = Lateral(stream, i);
                if (!(Math.Abs(lateral) <= FittedTo)) continue;
                points.Add((lateral, Math.Sign(Lateral(stream, i + 1) - Lateral(stream, i - 1))));
                torques.Add(torque?[i] ?? double.NaN);
                angles.Add(blocks.Has(SteeringChannel.SteeringWheelAngle) ? blocks.Mean(SteeringChannel.SteeringWheelAngle)[i] : double.NaN);
            }
        }
        if (halves == 0) return null;
        var (t, a) = (Loop(points, torques), Loop(points, angles));
        return new()
        {
            Cycles = halves / 2,
            TorqueAtZeroNm = t?[0],
            TorqueGradient = t?[1],
            FrictionNm = t?[2],
            SensitivityPer100Deg = a?[1] is { Value: > 0 } g && g.StandardError < g.Value / 2 ? new(100 / g.Value, 100 * g.StandardError / (g.Value * g.Value)) : null,
        };
    }

    private static double Lateral(GatedStream stream, int i) => stream.Blocks.Mean(SteeringChannel.Speed)[i] / 3.6 * stream.Yaw(i) * Math.PI / 180;

    /// <summary>Stretches at speed in which the lateral acceleration swings to and fro, peak after peak within bounds.</summary>
    private static IEnumerable<(int From, int To, int Halves)> Weaves(GatedStream stream)
    {
        var blocks = stream.Blocks;
        var speed = blocks.Mean(SteeringChannel.Speed).ToArray();
        var (start, begun, halves) = (0, 0, 0);
        var (seconds, peak, side) = (0.0, 0.0, 0);
        for (var i = 0; i <= blocks.Count; i++)
        {
            var lateral = i < blocks.Count ? Lateral(stream, i) : double.NaN;
            var goes = i < blocks.Count && speed[i] >= LeastKmH && !double.IsNaN(lateral) && Math.Abs(lateral) <= MostPeak && (blocks.Joined[i] || i == start);
            if (goes && (side == 0 || Math.Sign(lateral) == side))
            {
                if (side == 0) (side, begun, start) = (Math.Sign(lateral), i, halves == 0 ? i : start);
                (seconds, peak) = (seconds + blocks.Seconds[i], Math.Max(peak, Math.Abs(lateral)));
                continue;
            }
            // A half swing has ended: it counts when it was one, else what came before it is closed.
            var swing = side != 0 && seconds is >= LeastHalfS and <= MostHalfS && peak >= LeastPeak;
            if (swing) halves++;
            if (!swing || !goes)
            {
                if (halves >= LeastHalves) yield return (start, swing ? i : begun, halves);
                (halves, start) = (0, i);
            }
            (begun, seconds, peak, side) = (i, goes ? blocks.Seconds[i] : 0, goes ? Math.Abs(lateral) : 0, goes ? Math.Sign(lateral) : 0);
        }
    }

    /// <summary>Level, gradient and half gap of a loop by least squares; errors allow for neighbouring seconds being alike.</summary>
    private static Estimate[]? Loop(List<(double Lateral, double Way)> points, List<double> values)
    {
        var used = Enumerable.Range(0, points.Count).Where(i => double.IsFinite(values[i]) && points[i].Way != 0).ToArray();
        if (used.Length < LeastPoints) return null;
        var x = Matrix<double>.Build.Dense(used.Length, 3, (r, c) => c switch { 0 => 1, 1 => points[used[r]].Lateral, _ => points[used[r]].Way });
        var y = Vector<double>.Build.Dense(used.Length, r => values[used[r]]);
        var inverse = (x.Transpose() * x).Inverse();
        var b = inverse * (x.Transpose() * y);
        var rest = y - x * b;
        var (square, lagged) = (rest * rest, 0.0);
        for (var i = 1; i < rest.Count; i++) lagged += rest[i] * rest[i - 1];
        var rho = square > 0 ? Math.Clamp(lagged / square, 0, 0.9) : 0;
        var variance = square / (used.Length - 3) * (1 + rho) / (1 - rho);
        return !double.IsFinite(b[0] + b[1] + b[2]) ? null : [.. Enumerable.Range(0, 3).Select(k => new Estimate(b[k], Math.Sqrt(Math.Max(1e-18, variance * inverse[k, k]))))];
    }

    internal static OnCentre? Join(IEnumerable<OnCentre?> parts)
    {
        var known = parts.OfType<OnCentre>().ToArray();
        return known.Length == 0 ? null : new()
        {
            Cycles = known.Sum(k => k.Cycles),
            TorqueAtZeroNm = MeanOfTrips.Join(known.Select(k => k.TorqueAtZeroNm)),
            FrictionNm = MeanOfTrips.Join(known.Select(k => k.FrictionNm)),
            TorqueGradient = MeanOfTrips.Join(known.Select(k => k.TorqueGradient)),
            SensitivityPer100Deg = MeanOfTrips.Join(known.Select(k => k.SensitivityPer100Deg)),
        };
    }
}
