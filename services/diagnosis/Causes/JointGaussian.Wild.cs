using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Causes;

// Which readings tell of something else: each is compared with where all others put it.
public sealed partial class JointGaussian
{
    /// <summary>The reading, or the place's wear, that the rest predicts worst.</summary>
    private (int Row, double LogOdds) Worst(ReadOnlySpan<double> priorSd)
    {
        var (worst, worstOdds) = (-1, double.NegativeInfinity);
        for (var r = 0; r < _single.Count + _wear.Length; r++)
        {
            if (_wild.Contains(r)) continue;
            var odds = _at.LogWild[r] - LogGood - (r < _single.Count ? SingleFits(r, priorSd) : PlaceFits(r - _single.Count, priorSd));
            if (odds > worstOdds) (worst, worstOdds) = (r, odds);
        }
        return (worst, worstOdds);
    }

    /// <summary>Log density of a reading given all others (leave-one-out of a Gaussian).</summary>
    private double SingleFits(int r, ReadOnlySpan<double> priorSd)
    {
        double reach, fitted = 0;
        Array.Clear(_row);
        for (var c = 0; c < _firstSurvey; c++)
        {
            var value = _rows[r].Jacobian[c];
            if (value == 0) continue;
            if (c < States) value *= priorSd[c] / _ordinarySd[c];
            _row[c] = value;
            fitted += value * _mean[c];
        }
        var left = _rows[r].Residual - fitted;
        if (left * left < 1) return double.PositiveInfinity; // a reading that fits this well is not wild
        reach = _equations.Reach(_row);
        var variance = _single[r].Variance / Math.Max(1e-9, 1 - reach);
        return LogNormal(left / Math.Sqrt(_single[r].Variance) * variance, variance);
    }

    /// <summary>Log likelihood of a place where all together put it; one that pulls hard looks better than it is.</summary>
    private double PlaceFits(int w, ReadOnlySpan<double> priorSd)
    {
        var place = PlaceNow(w);
        var size = place.H.Length;
        Span<double> step = stackalloc double[size];
        step.Clear();
        for (var c = 0; c < _firstSurvey; c++)
        {
            var mean = c < States ? _mean[c] * priorSd[c] / _ordinarySd[c] : _mean[c];
            step[0] += place.Before[c] * mean;
            step[1] += place.After[c] * mean;
        }
        for (var s = 2; s < size; s++) step[s] = _mean[_firstSurvey + s - 2];
        var log = place.Log;
        for (var i = 0; i < size; i++)
        {
            log += place.H[i] * step[i];
            for (var j = 0; j < size; j++) log -= 0.5 * step[i] * place.K[i * size + j] * step[j];
        }
        return log;
    }

    /// <summary>
    /// A place that tells of something else (another wheel's readings, a cupped tread): its slopes lie anywhere about a sound
    /// one's and may have changed at any onset, the surveys' shared errors are as the rest of the vehicle has them.
    /// </summary>
    private double LogWildPlace(int w)
    {
        var usual = _wear[w].Kind == ObservableKind.Rate ? 1 : _wear[w].NormalEdge;
        return StoryFit.LogSum([.. _anyOnset.Select((wear, o) => (_anyOnset.Length > 1 ? Math.Log(Onsets.Shares[o]) : 0) + LogWildSlopes(wear[w].Evidence, usual))]);
    }

    private double LogWildSlopes(SlopeEvidence evidence, double usual)
    {
        var (k, h, size) = (evidence.K, evidence.H, evidence.Size);
        var (hb, ha, log) = (h[0] - usual * (k[0] + k[1]), h[1] - usual * (k[1] + k[size + 1]), usual * (h[0] + h[1] - 0.5 * usual * (k[0] + 2 * k[1] + k[size + 1])));
        for (var s = 2; s < size; s++)
        {
            var c = _mean[_firstSurvey + s - 2];
            hb -= c * k[s];
            ha -= c * k[size + s];
            log += c * (h[s] - usual * (k[s] + k[size + s]));
            for (var t = 2; t < size; t++) log -= 0.5 * c * _mean[_firstSurvey + t - 2] * k[s * size + t];
        }
        // ½ gᵀ(K + I/W²)⁻¹g − ½ ln|I + W²K| for the two slopes.
        var wide = WildSlopeSd * WildSlopeSd;
        var (bb, ba, aa) = (1 + wide * k[0], wide * k[1], 1 + wide * k[size + 1]);
        var determinant = bb * aa - ba * ba;
        return log + 0.5 * wide * (aa * hb * hb - 2 * ba * hb * ha + bb * ha * ha) / determinant - 0.5 * Math.Log(determinant);
    }
}
