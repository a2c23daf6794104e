using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tread;

/// <summary>Mean over the places measured in one groove.</summary>
public readonly record struct GrooveMean(int Groove, double DepthMm, int Places);

/// <summary>
/// What one survey says of one tyre's tread across and round it. Grooves are taken as evenly spread from the outboard
/// (+1) to the inboard shoulder (−1); a parabola through their means gives mean, edge and shoulder parts. Errors are
/// those of reading and rounding; a technician's bias is not in them, it moves the mean only.
/// </summary>
public sealed record TreadShape
{
    public required Position Position { get; init; }
    /// <summary>Grooves the tyre is taken to have; 1 when one depth stands for the tyre.</summary>
    public required int Grooves { get; init; }
    /// <summary>Mean depth over all grooves, mm.</summary>
    public required Estimate MeanDepthMm { get; init; }
    /// <summary>New depth less mean depth, mm; null without a new depth.</summary>
    public Estimate? MeanLossMm { get; init; }
    /// <summary>Depth at the inboard shoulder less depth at the outboard one, mm: positive when the outboard shoulder has lost more. Null with fewer than two grooves.</summary>
    public Estimate? EdgeMm { get; init; }
    /// <summary>Depth at the centre less depth at the shoulders, mm: positive when the shoulders have lost more. Null with fewer than three grooves.</summary>
    public Estimate? ShoulderMm { get; init; }
    /// <summary>Spread round the circumference beyond gauge noise, standard deviation, mm; null without two places in a groove.</summary>
    public Estimate? RoundVariationMm { get; init; }
    /// <summary>Mean step of the rib edges, mm, positive when the sharp edges stand inboard; null where not measured.</summary>
    public Estimate? FeatherMm { get; init; }
    public HandRub HandRub { get; init; }
    public IReadOnlyList<GrooveMean> ByGroove { get; init; } = [];

    /// <summary>Spread of the new depth of a tyre model about its nominal value, mm; from memory.</summary>
    public const double NewDepthSdMm = 0.2;

    /// <summary>What a mean from fewer grooves than the tyre has may be off by, mm, for want of its profile; from memory.</summary>
    private const double ProfileSdMm = 0.3;

    /// <summary>Place of a groove across the tread: +1 outboard shoulder, −1 inboard shoulder.</summary>
    public static double Across(int groove, int grooves) => grooves <= 1 ? 0 : 1 - 2.0 * (groove - 1) / (grooves - 1);

    /// <summary>Mean square of the place across over all grooves: the centre of the shoulder part.</summary>
    public static double MeanSquareAcross(int grooves) => grooves <= 1 ? 0 : (grooves + 1.0) / (3.0 * (grooves - 1));

    /// <summary>Shape of one tyre; null when it has no usable depth.</summary>
    /// <param name="readings">The tyre's readings; depths that are not finite or negative are left out.</param>
    /// <param name="resolutionMm">Step of the gauge, mm.</param>
    /// <param name="repeatSdMm">Standard deviation of a repeated reading, mm.</param>
    /// <param name="newDepthMm">Depth when new, mm, where known.</param>
    /// <param name="grooves">Grooves the tyre is known to have from other surveys; the highest groove read counts where greater.</param>
    /// <param name="without">Groove to leave out as mistyped.</param>
    public static TreadShape? Of(TyreReadings readings, double resolutionMm, double repeatSdMm = GaugeNoise.RepeatSdMm, double? newDepthMm = null, int grooves = 0, int? without = null)
    {
        var (byGroove, places) = Means(readings.Depths, without);
        if (byGroove.Length == 0) return null;
        var variance = GaugeNoise.ReadingVariance(repeatSdMm, resolutionMm);
        var count = Math.Max(Math.Max(grooves, byGroove[^1].Groove), 1);
        var (mean, edge, shoulder) = Parabola(byGroove, count, variance);
        return new TreadShape
        {
            Position = readings.Position,
            Grooves = byGroove[^1].Groove == 0 ? 1 : count,
            MeanDepthMm = mean,
            MeanLossMm = newDepthMm is { } n ? new Estimate(n, NewDepthSdMm) - mean : null,
            EdgeMm = edge,
            ShoulderMm = shoulder,
            RoundVariationMm = places > byGroove.Length ? RoundVariation(readings.Depths, byGroove, without, variance) : null,
            FeatherMm = Feather(readings.Depths, without, variance),
            HandRub = readings.HandRub,
            ByGroove = byGroove,
        };
    }

    /// <summary>The same tread belonging to another position, every length times <paramref name="factor"/>; reversed where its grooves were counted from the inboard side.</summary>
    public TreadShape As(Position position, double factor, bool reversed = false) => reversed ? Reversed().As(position, factor) : this with
    {
        Position = position,
        MeanDepthMm = MeanDepthMm * factor,
        EdgeMm = EdgeMm is { } e ? e * factor : null,
        ShoulderMm = ShoulderMm is { } s ? s * factor : null,
        RoundVariationMm = RoundVariationMm is { } r ? r * factor : null,
        ByGroove = factor == 1 ? ByGroove : [.. ByGroove.Select(g => g with { DepthMm = g.DepthMm * factor })],
    };

    /// <summary>Counted from the other shoulder.</summary>
    private TreadShape Reversed() => Grooves <= 1 ? this : this with
    {
        EdgeMm = -EdgeMm,
        FeatherMm = -FeatherMm,
        ByGroove = [.. ByGroove.Reverse().Select(g => g with { Groove = Grooves + 1 - g.Groove })],
    };

    /// <summary>
    /// With the error that a tread uneven round its circumference gives: one place may lie anywhere on the wave. What the places of
    /// a groove have in common with those of the next, standing side by side, moves the mean; across the tread it cancels.
    /// </summary>
    /// <param name="sdMm">Spread round the circumference beyond gauge noise, standard deviation, mm.</param>
    public TreadShape Uneven(double sdMm) => sdMm <= 0 || ByGroove.Count == 0 ? this : this with
    {
        MeanDepthMm = MeanDepthMm with { StandardError = Root(MeanDepthMm.StandardError * MeanDepthMm.StandardError, sdMm / Math.Sqrt(ByGroove.Max(g => g.Places))) },
    };

    private static (Estimate Mean, Estimate? Edge, Estimate? Shoulder) Parabola(GrooveMean[] byGroove, int count, double variance)
    {
        var columns = Math.Min(byGroove.Length, 3);
        var partial = byGroove.Length < count && columns < 3 ? ProfileSdMm : 0;
        if (columns == 1) return (new(byGroove[0].DepthMm, Root(variance / byGroove[0].Places, byGroove[0].Groove == 0 ? 0 : partial)), null, null);
        Span<double> normal = stackalloc double[9];
        Span<double> right = stackalloc double[3];
        var centre = MeanSquareAcross(count);
        foreach (var groove in byGroove)
        {
            var u = Across(groove.Groove, count);
            ReadOnlySpan<double> row = [1, u, u * u - centre];
            for (var i = 0; i < columns; i++)
            {
                right[i] += groove.Places * row[i] * groove.DepthMm;
                for (var j = 0; j < columns; j++) normal[i * 3 + j] += groove.Places * row[i] * row[j];
            }
        }
        Span<double> inverse = stackalloc double[9];
        if (!Invert(normal, columns, inverse)) return (new(byGroove.Average(g => g.DepthMm), Root(variance, ProfileSdMm)), null, null);
        Span<double> beta = stackalloc double[3];
        for (var i = 0; i < columns; i++)
            for (var j = 0; j < columns; j++) beta[i] += inverse[i * 3 + j] * right[j];
        Estimate? shoulder = columns == 3 ? new Estimate(-beta[2], Math.Sqrt(variance * inverse[8])) : null;
        return (new(beta[0], Root(variance * inverse[0], partial)), new Estimate(-2 * beta[1], 2 * Math.Sqrt(variance * inverse[4])), shoulder);
    }

    /// <summary>Gauss–Jordan on the leading block of a 3×3 symmetric positive matrix.</summary>
    private static bool Invert(Span<double> a, int size, Span<double> inverse)
    {
        inverse.Clear();
        for (var i = 0; i < size; i++) inverse[i * 3 + i] = 1;
        for (var p = 0; p < size; p++)
        {
            var pivot = a[p * 3 + p];
            if (pivot < 1e-9) return false;
            for (var j = 0; j < size; j++) { a[p * 3 + j] /= pivot; inverse[p * 3 + j] /= pivot; }
            for (var i = 0; i < size; i++)
            {
                if (i == p) continue;
                var f = a[i * 3 + p];
                for (var j = 0; j < size; j++) { a[i * 3 + j] -= f * a[p * 3 + j]; inverse[i * 3 + j] -= f * inverse[p * 3 + j]; }
            }
        }
        return true;
    }

    private static bool Usable(GrooveDepth d, int? without) => double.IsFinite(d.DepthMm) && d.DepthMm >= 0 && d.Groove != without;

    /// <summary>Mean depth of each groove, by number; the depth that stands for the whole tyre only where no groove was read. With the count of depths used.</summary>
    private static (GrooveMean[] ByGroove, int Places) Means(IReadOnlyList<GrooveDepth> depths, int? without)
    {
        Span<GrooveMean> found = depths.Count <= 32 ? stackalloc GrooveMean[depths.Count] : new GrooveMean[depths.Count];
        int count = 0, places = 0;
        var numbered = false;
        for (var i = 0; i < depths.Count; i++) numbered |= depths[i].Groove > 0 && Usable(depths[i], without);
        for (var i = 0; i < depths.Count; i++)
        {
            var d = depths[i];
            if (!Usable(d, without) || (numbered && d.Groove <= 0)) continue;
            var at = 0;
            while (at < count && found[at].Groove < d.Groove) at++;
            if (at == count || found[at].Groove != d.Groove)
            {
                found[at..count].CopyTo(found[(at + 1)..]);
                found[at] = new(d.Groove, 0, 0);
                count++;
            }
            found[at] = new(d.Groove, found[at].DepthMm + d.DepthMm, found[at].Places + 1);
            places++;
        }
        for (var i = 0; i < count; i++) found[i] = found[i] with { DepthMm = found[i].DepthMm / found[i].Places };
        return (found[..count].ToArray(), places);
    }

    /// <summary>Pooled variance within grooves less that of reading; the standard error is that of a variance on its degrees of freedom.</summary>
    private static Estimate? RoundVariation(IReadOnlyList<GrooveDepth> depths, GrooveMean[] byGroove, int? without, double readingVariance)
    {
        double squares = 0;
        var freedom = -byGroove.Length;
        foreach (var d in depths)
        {
            if (!Usable(d, without) || Array.FindIndex(byGroove, g => g.Groove == d.Groove) is not (>= 0 and var at)) continue;
            squares += (d.DepthMm - byGroove[at].DepthMm) * (d.DepthMm - byGroove[at].DepthMm);
            freedom++;
        }
        if (freedom <= 0) return null;
        var within = squares / freedom;
        var beyond = Math.Sqrt(Math.Max(0, within - readingVariance));
        var varianceError = Math.Max(within, readingVariance) * Math.Sqrt(2.0 / freedom);
        return new Estimate(beyond, varianceError / (2 * Math.Sqrt(Math.Max(beyond * beyond, varianceError / 2))));
    }

    /// <summary>
    /// Outboard of a groove lies the inboard edge of the next rib: it stands higher where the fins are inboard, so the
    /// recorded difference already has the sign of the feather.
    /// </summary>
    private static Estimate? Feather(IReadOnlyList<GrooveDepth> depths, int? without, double readingVariance)
    {
        double sum = 0, squares = 0;
        var count = 0;
        for (var i = 0; i < depths.Count; i++)
        {
            if (depths[i].OutboardEdgeMm is not { } edge || !double.IsFinite(edge) || depths[i].Groove <= 0 || !Usable(depths[i], without)) continue;
            sum += edge;
            squares += edge * edge;
            count++;
        }
        if (count == 0) return null;
        var mean = sum / count;
        var spread = count > 2 ? Math.Max(0, squares - count * mean * mean) / (count - 1) : 0;
        return new Estimate(mean, Math.Sqrt(Math.Max(2 * readingVariance, spread) / count));
    }

    private static double Root(double variance, double extraSd) => Math.Sqrt(variance + extraSd * extraSd);
}
