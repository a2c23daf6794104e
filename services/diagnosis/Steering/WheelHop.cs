namespace WearWatch.Diagnosis.Steering;

/// <summary>
/// Energy of the steering torque (else of the lateral acceleration) in the band where wheels hop and where an unbalanced wheel turns at
/// road speed: it asks for balance, damper and bearing to be looked at and names no angle.
/// </summary>
/// <param name="Channel">What was filtered.</param>
/// <param name="Rms">Root mean square in the band over straight driving, in the channel's unit.</param>
/// <param name="Share">Band's variance as a share of all variance faster than about a second.</param>
/// <param name="Seconds">Straight driving behind it, s.</param>
/// <remarks>
/// Wheel hop lies at 10 to 15 Hz: Gillespie, Fundamentals of Vehicle Dynamics (1992). The band is 8 to 16 Hz: one second-order band-pass
/// about 11.3 Hz with Q = √2, by the bilinear transform (Oppenheim and Schafer, Discrete-Time Signal Processing).
/// </remarks>
public sealed record WheelHop(SteeringChannel Channel, double Rms, double Share, double Seconds)
{
    /// <summary>Least rate: the band's upper edge is well below half of it, Hz.</summary>
    public const double LeastRateHz = 40;

    private const double CentreHz = 11.314, Q = 1.414;
    private const double LeastSeconds = 20;
    private const int SettleSamples = 25;

    /// <summary>Samples filtered at the most, so that a day at 100 Hz costs no more than a trip.</summary>
    private const int MostSamples = 60_000;

    internal static WheelHop? Of(IReadOnlyList<(long Sequence, SteeringColumns Columns)> ordered, IReadOnlyList<StraightRun> runs)
    {
        var bySequence = ordered.ToDictionary(c => c.Sequence, c => c.Columns);
        SteeringChannel? channel = null;
        var (band, all, seconds, count) = (0.0, 0.0, 0.0, 0);
        foreach (var run in runs)
        {
            if (count >= MostSamples) break;
            if (!bySequence.TryGetValue(run.Sequence, out var columns) || columns.RateHz < LeastRateHz) continue;
            channel ??= columns[SteeringChannel.DriverTorque].Length > 0 ? SteeringChannel.DriverTorque : SteeringChannel.LateralAcceleration;
            var samples = columns[channel.Value];
            var from = (int)Math.Round((run.Start - columns.Start).TotalSeconds * columns.RateHz);
            var to = Math.Min(samples.Length, from + (int)(run.Seconds * columns.RateHz));
            if (from < 0 || to - from < 2 * SettleSamples) continue;
            var (inBand, whole, n) = Filter(samples[from..to], columns.RateHz);
            (band, all, count, seconds) = (band + inBand, all + whole, count + n, seconds + n / columns.RateHz);
        }
        return channel is null || seconds < LeastSeconds ? null : new(channel.Value, Math.Sqrt(band / count), all > 0 ? band / all : 0, seconds);
    }

    private static (double Band, double All, int Count) Filter(ReadOnlySpan<float> samples, double rateHz)
    {
        var w = 2 * Math.PI * CentreHz / rateHz;
        var alpha = Math.Sin(w) / (2 * Q);
        var (b0, a1, a2) = (alpha / (1 + alpha), -2 * Math.Cos(w) / (1 + alpha), (1 - alpha) / (1 + alpha));
        var slow = 1 / rateHz;
        var (x1, x2, y1, y2, level) = (0.0, 0.0, 0.0, 0.0, float.IsNaN(samples[0]) ? 0 : samples[0]);
        var (band, all, count) = (0.0, 0.0, 0);
        for (var i = 0; i < samples.Length; i++)
        {
            // A missing sample is taken to be where the level is.
            var x = float.IsNaN(samples[i]) ? 0 : samples[i] - level;
            level += (float)(slow * x);
            var y = b0 * (x - x2) - a1 * y1 - a2 * y2;
            (x2, x1, y2, y1) = (x1, x, y1, y);
            if (i < SettleSamples) continue;
            (band, all, count) = (band + y * y, all + x * x, count + 1);
        }
        return (band, all, count);
    }

    internal static WheelHop? Join(IEnumerable<WheelHop?> parts)
    {
        // One channel only: torque where any stream had it.
        var known = parts.OfType<WheelHop>().GroupBy(h => h.Channel).OrderBy(g => g.Key).FirstOrDefault()?.OrderBy(h => h.Rms).ThenBy(h => h.Seconds).ToArray();
        if (known is null) return null;
        var seconds = known.Sum(h => h.Seconds);
        return new(known[0].Channel, Math.Sqrt(known.Sum(h => h.Rms * h.Rms * h.Seconds) / seconds), known.Sum(h => h.Share * h.Seconds) / seconds, seconds);
    }
}
