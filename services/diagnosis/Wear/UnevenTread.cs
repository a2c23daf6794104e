using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// How uneven one tyre is round its circumference, from all surveys of its fitting that read more than one place of a groove.
/// A cupped tyre keeps its waves from walk to walk, and a walk that reads one place reads anywhere on them.
/// </summary>
internal static class UnevenTread
{
    /// <summary>Spread round a tyre seen to be cupped or flat-spotted that nobody has measured at several places, standard deviation, mm; from memory.</summary>
    private const double SeenSdMm = 0.5;

    /// <summary>Standard errors by which the spread must stand out before it counts.</summary>
    private const double Clear = 2.5;

    /// <summary>Standard deviation round the circumference beyond gauge noise, mm; 0 where nothing shows it.</summary>
    public static double SdMm(IReadOnlyList<TyreReadings> readings, IReadOnlyList<double> resolutionMm, double repeatSdMm)
    {
        double squares = 0, expected = 0;
        var (freedom, seen) = (0, false);
        for (var i = 0; i < readings.Count; i++)
        {
            for (var j = 0; j < readings[i].Seen.Count; j++) seen |= readings[i].Seen[j] is Seen.Cupped or Seen.FlatSpot;
            var (within, count) = Within(readings[i].Depths);
            squares += within;
            expected += count * GaugeNoise.ReadingVariance(repeatSdMm, resolutionMm[i]);
            freedom += count;
        }
        if (freedom == 0) return seen ? SeenSdMm : 0;
        var noise = expected / freedom;
        var beyond = squares / freedom - noise;
        // A variance on so many degrees of freedom has this error where nothing but noise is in it.
        return beyond > Clear * noise * Math.Sqrt(2.0 / freedom) || (seen && beyond > 0) ? Math.Sqrt(beyond) : 0;
    }

    /// <summary>Squares about each groove's own mean with their degrees of freedom; the one groove that is most uneven is left out, for one place mistyped or on a wear bar makes no cupped tyre.</summary>
    private static (double Squares, int Freedom) Within(IReadOnlyList<GrooveDepth> depths)
    {
        double squares = 0, worst = 0;
        int freedom = 0, worstFreedom = 0;
        for (var j = 0; j < depths.Count; j++)
        {
            var groove = depths[j].Groove;
            var first = true;
            for (var k = 0; k < j && first; k++) first = depths[k].Groove != groove;
            if (!first || groove <= 0) continue;
            double sum = 0, square = 0;
            var count = 0;
            for (var k = j; k < depths.Count; k++)
            {
                if (depths[k].Groove != groove || !double.IsFinite(depths[k].DepthMm) || depths[k].DepthMm < 0) continue;
                sum += depths[k].DepthMm;
                square += depths[k].DepthMm * depths[k].DepthMm;
                count++;
            }
            if (count < 2) continue;
            var here = Math.Max(0, square - sum * sum / count);
            squares += here;
            freedom += count - 1;
            if (here > worst) (worst, worstFreedom) = (here, count - 1);
        }
        return freedom > worstFreedom ? (squares - worst, freedom - worstFreedom) : (0, 0);
    }
}
