namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// Scatter of one tyre's readings about straight lines of distance. Where several grooves were read, each groove's depth against the
/// mean of its survey is followed, so that neither the hand's bias nor the wandering of the tyre is in it; a single depth a tyre is
/// followed itself, biases taken off, and what a tyre wanders is allowed for.
/// </summary>
/// <param name="Squares">By point: sum of squared residuals, mm²; NaN where the point was not used.</param>
/// <param name="Dimension">Degrees of freedom of each before the line takes its part.</param>
/// <param name="Wander">Variance in each that is not the reading's, mm².</param>
internal sealed record TyreScatter(float[] Squares, int Dimension, double Wander)
{
    private readonly int _count;
    private readonly double _middle, _width;

    private TyreScatter(float[] squares, int dimension, double wander, int count, double middle, double width) : this(squares, dimension, wander) =>
        (_count, _middle, _width) = (count, middle, width);

    /// <summary>Parts of the projection on the line at a distance of so many 1000 km: by level and by slope.</summary>
    public (double Level, double Slope) Parts(double x) => (1 / Math.Sqrt(_count), (x - _middle) / Math.Sqrt(_width));

    /// <summary>Null where the grooves read differ or too few points have any.</summary>
    /// <param name="points">As read.</param>
    /// <param name="kept">The same points as kept.</param>
    public static TyreScatter? OfGrooves(IReadOnlyList<FittingPoint> points, ReadOnlySpan<LinePoint> kept)
    {
        if (points[^1].Shape?.ByGroove is not { Count: > 1 } grooves) return null;
        var places = new double[points.Count];
        for (var i = 0; i < places.Length; i++)
        {
            if (points[i].Survey < 0 || points[i].Weight < 0.5 || points[i].Shape?.ByGroove is not { } read || read.Count != grooves.Count) continue;
            var same = true;
            double shares = 0;
            for (var g = 0; g < grooves.Count; g++) (same, shares) = (same && read[g].Groove == grooves[g].Groove, shares + 1.0 / read[g].Places);
            if (same) places[i] = grooves.Count / shares;
        }
        if (Empty(kept, places, grooves.Count - 1, 0) is not { } scatter) return null;
        var y = new double[points.Count];
        for (var g = 0; g < grooves.Count; g++)
        {
            for (var i = 0; i < y.Length; i++)
            {
                if (places[i] == 0) continue;
                double mean = 0;
                foreach (var read in points[i].Shape!.ByGroove) mean += read.DepthMm / grooves.Count;
                y[i] = points[i].Shape!.ByGroove[g].DepthMm - mean;
            }
            scatter.AddResiduals(kept, y);
        }
        // A mean of several places scatters less than one reading.
        for (var i = 0; i < y.Length; i++) scatter.Squares[i] *= (float)places[i];
        return scatter;
    }

    /// <summary>Of the tyres' mean depths; null with fewer than three points.</summary>
    /// <param name="kept">Points of the fitting.</param>
    /// <param name="biasMm">By how much each reads too deep, mm.</param>
    public static TyreScatter? OfMeans(ReadOnlySpan<LinePoint> kept, ReadOnlySpan<double> biasMm)
    {
        var (used, y) = (new double[kept.Length], new double[kept.Length]);
        for (var i = 0; i < y.Length; i++)
        {
            used[i] = kept[i].Measured && kept[i].Weight >= 0.5 ? 1 : 0;
            y[i] = kept[i].Mean.Value - biasMm[i];
        }
        var scatter = Empty(kept, used, 1, FittingLines.WanderSdMm * FittingLines.WanderSdMm);
        scatter?.AddResiduals(kept, y);
        return scatter;
    }

    private static TyreScatter? Empty(ReadOnlySpan<LinePoint> kept, double[] used, int dimension, double wander)
    {
        var squares = new float[kept.Length];
        var count = 0;
        double middle = 0, width = 0;
        for (var i = 0; i < used.Length; i++)
        {
            if (used[i] > 0) (count, middle) = (count + 1, middle + kept[i].X);
            else squares[i] = float.NaN;
        }
        if (count < 3) return null;
        middle /= count;
        for (var i = 0; i < used.Length; i++)
            if (used[i] > 0) width += (kept[i].X - middle) * (kept[i].X - middle);
        return width > 1e-6 ? new(squares, dimension, wander, count, middle, width) : null;
    }

    /// <summary>Adds the squared residuals of a least-squares line.</summary>
    private void AddResiduals(ReadOnlySpan<LinePoint> kept, double[] y)
    {
        double level = 0, slope = 0;
        for (var i = 0; i < y.Length; i++)
        {
            if (float.IsNaN(Squares[i])) continue;
            level += y[i] / _count;
            slope += y[i] * (kept[i].X - _middle) / _width;
        }
        for (var i = 0; i < y.Length; i++)
        {
            var rest = y[i] - level - slope * (kept[i].X - _middle);
            Squares[i] += (float)(rest * rest);
        }
    }
}
