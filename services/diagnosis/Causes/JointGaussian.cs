using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Causes;

/// <summary>What the joint law of observables says at one state.</summary>
/// <param name="LogLikelihood">Natural logarithm, over the readings taken as good.</param>
/// <param name="Worst">The row that the others predict worst; −1 where there is none.</param>
/// <param name="WorstLogOdds">Log odds that it is wild rather than good.</param>
/// <param name="Mean">Posterior mean of each shared unknown, in its prior SDs: the states first, then the sensitivities.</param>
/// <param name="Variance">Posterior variance of the same.</param>
public readonly record struct JointFit(double LogLikelihood, int Worst, double WorstLogOdds, double[] Mean, double[] Variance);

/// <summary>
/// Law of all observables at one state that holds since one onset (before it the vehicle was sound), with every other
/// quantity (in order) and every sensitivity as Gaussian unknowns of low rank, linearised at that state. One instance per
/// vehicle and onset; not safe for concurrent use.
/// </summary>
/// <remarks>
/// Covariance D + J·Jᵀ by the matrix inversion lemma: cost n·p² + p³ for n observables and p unknowns.
/// Which reading may be wild is told by comparing it with its prediction from all others (leave-one-out of a Gaussian).
/// </remarks>
public sealed class JointGaussian
{
    private readonly VehicleModel _model;
    private readonly IReadOnlyList<Observable> _single;
    private readonly WearObservable[] _wear;
    private readonly IReadOnlyList<WearObservable>[] _anyOnset;
    private readonly double[] _sharedPrecision; // of the surveys' shared errors
    private readonly int _surveys, _firstAxle, _firstSurvey;
    private readonly TyreResponse _now, _sound;
    private readonly double[] _priorSd;
    private readonly double[] _a; // one row of the Jacobian
    private readonly Place[] _place; // per place: as filled at the state
    private readonly double[] _upper, _inverse; // U of P + AᵀA = UᵀU and U⁻¹, row by row; P the precision of the unknowns before
    private readonly bool[] _wild; // singles first, then places
    private readonly int[] _columns; // nonzero columns of one row
    private readonly (int[] Columns, double[] Values)[] _sparse;
    private readonly double[] _residual;
    private readonly double[] _forward, _b, _mean, _variance;
    private readonly double _shareOfPresent; // of the weeks that the steering figures stand for, the part since the onset

    /// <summary>A place at a state: its evidence with what the place keeps unexplained integrated out, about the prediction.</summary>
    private sealed class Place(int size, int unknowns)
    {
        public double[] K { get; } = new double[size * size];
        public double[] H { get; } = new double[size]; // gradient at the prediction
        public double Log { get; set; } // log likelihood at the prediction
        public double[] Before { get; } = new double[unknowns];
        public double[] After { get; } = new double[unknowns];
    }

    /// <param name="model">The vehicle.</param>
    /// <param name="wear">Its wear around every onset.</param>
    /// <param name="onset">Index into <see cref="Onsets.DaysAgo"/>: since when the state holds.</param>
    public JointGaussian(VehicleModel model, IReadOnlyList<WearObservable>[] wear, int onset)
    {
        (_model, _single, _anyOnset) = (model, Observables.Of(model), wear);
        _wear = [.. wear[onset]];
        (_surveys, _sharedPrecision) = model.Figures.Wear is { } history ? (history.Surveys, history.SharedPrecision) : (0, []);
        (_now, _sound) = (new(model), new(model));
        _priorSd = [.. model.Dimensions.Select(d => d.PriorSd)];
        _firstAxle = States + (int)Shared.Count;
        _firstSurvey = _firstAxle + model.Positions.Max(x => x.Axle);
        var (n, p) = (_single.Count, _firstSurvey + _surveys);
        (_a, _upper, _inverse, _forward, _wild) = (new double[p], new double[p * p], new double[p * p], new double[p], new bool[n + _wear.Length]);
        (_residual, _b, _mean, _variance) = (new double[n], new double[p], new double[p], new double[p]);
        _place = [.. _wear.Select(w => new Place(w.Evidence.Size, _firstSurvey))];
        _columns = new int[p];
        _sparse = [.. Enumerable.Range(0, n).Select(_ => (Array.Empty<int>(), Array.Empty<double>()))];
        _shareOfPresent = Math.Min(1, Onsets.DaysAgo[onset] / Roads.SteeringFigures.PresentDays);
        HoldGain(0);
    }

    public int States => _model.Dimensions.Count;

    /// <summary>Posterior mean and SD of the slip scale's logarithm after <see cref="At"/>: above zero, slip wears more than the class's prior says.</summary>
    public (double Mean, double Sd) LogSlipScale() =>
        (Math.Log(_now.SlipScale) + TyreResponse.Difference * _mean[States], TyreResponse.Difference * Math.Sqrt(_variance[States]));

    /// <summary>Holds the gain common to all edges at so many prior SDs.</summary>
    public void HoldGain(double standardDeviations)
    {
        _now.HoldGain(standardDeviations);
        _sound.HoldGain(standardDeviations);
        Span<double> nothing = stackalloc double[States];
        nothing.Clear();
        _sound.Look(nothing);
    }

    /// <summary>Evaluates at a state; the priors of the story's own dimensions are replaced by <paramref name="priorSd"/>.</summary>
    /// <param name="state">Departures from target since the onset, one per dimension.</param>
    /// <param name="priorSd">SD of what each dimension may depart further; null for the ordinary ones.</param>
    /// <returns>No reading is taken as wild yet. Arrays in the result are reused by the next call.</returns>
    public JointFit At(ReadOnlySpan<double> state, ReadOnlySpan<double> priorSd = default)
    {
        Fill(state, priorSd.IsEmpty ? _priorSd : priorSd);
        return Solve();
    }

    /// <summary>Log likelihood alone, no reading taken as wild: a fraction of the work of <see cref="At"/>.</summary>
    public double Scan(ReadOnlySpan<double> state, ReadOnlySpan<double> priorSd)
    {
        Fill(state, priorSd);
        var p = _b.Length;
        var (log, quad) = Normal(p);
        log -= 0.5 * Factor(p);
        for (var k = 0; k < p; k++)
        {
            var f = _b[k] / _upper[k * p + k];
            quad -= f * f;
            if (f != 0) Subtract(_b.AsSpan(k + 1, p - k - 1), _upper.AsSpan(k * p + k + 1, p - k - 1), f);
        }
        return log - 0.5 * quad;
    }

    /// <summary>The same state with one more reading taken as wild: it no longer informs anything.</summary>
    public JointFit Without(int row)
    {
        _wild[row] = true;
        return Solve();
    }

    /// <summary>Log density of a reading taken as wild, with the share of such readings.</summary>
    public double LogWild(int row) => Math.Log(Sensitivities.WildShare) + (row < _single.Count ? LogNormal(_single[row].Value, _single[row].WildSd * _single[row].WildSd) : LogWildPlace(row - _single.Count));

    /// <summary>Slip that shapes a tyre's tread since the onset, after the last <see cref="At"/>: mean and SD, over RMS service slip.</summary>
    public (double Mean, double Sd) ShapeSlip(int tyre, ReadOnlySpan<double> priorSd) => _now.ShapeSlip(tyre, priorSd, _mean, _variance);

    /// <summary>The same before the onset.</summary>
    public (double Mean, double Sd) ShapeSlipBefore(int tyre, ReadOnlySpan<double> priorSd) => _sound.ShapeSlip(tyre, priorSd, _mean, _variance);

    /// <summary>Slip from the state alone, after <see cref="Scan"/>.</summary>
    public double ShapeSlip(int tyre) => _now.ShapeSlip(tyre);

    /// <summary>Steering torque (N·m) or wheel angle (deg) after the last <see cref="At"/>: mean and SD.</summary>
    public (double Mean, double Sd) Steering(ReadOnlySpan<double> map, ReadOnlySpan<double> state, ReadOnlySpan<double> priorSd)
    {
        double mean = 0, variance = 0;
        for (var d = 0; d < States; d++)
        {
            mean += map[d] * (state[d] + priorSd[d] * _mean[d]);
            variance += map[d] * map[d] * priorSd[d] * priorSd[d] * _variance[d];
        }
        return (mean, Math.Sqrt(variance));
    }

    private void Fill(ReadOnlySpan<double> state, ReadOnlySpan<double> sd)
    {
        Array.Clear(_wild);
        _now.Look(state);
        for (var r = 0; r < _single.Count; r++)
        {
            var row = _single[r];
            Array.Clear(_a);
            var predicted = row.Tyre < 0 ? FillSteering(row.Kind, state, sd) : _now.Fill(row.Kind, row.Tyre, 0, 0, sd, _a).Predicted;
            var white = 1 / Math.Sqrt(row.Variance);
            Compress(r, white);
            _residual[r] = (row.Value - predicted) * white;
        }
        for (var w = 0; w < _wear.Length; w++) FillPlace(_wear[w], _place[w], sd);
    }

    /// <summary>
    /// Both slopes of a place: a sound vehicle's before the onset, the state's after it. What the place keeps unexplained, in
    /// proportion to its wear in both, is integrated out at once: it takes from the evidence along that one direction.
    /// </summary>
    private void FillPlace(in WearObservable wear, Place place, ReadOnlySpan<double> sd)
    {
        var (evidence, size) = (wear.Evidence, wear.Evidence.Size);
        var (after, worn) = _now.Fill(wear.Kind, wear.Tyre, wear.NormalEdge, wear.VehicleSd, sd, place.After);
        var (before, soundly) = evidence.K[0] > 0 ? _sound.Fill(wear.Kind, wear.Tyre, wear.NormalEdge, wear.VehicleSd, sd, place.Before) : (0, 0);
        var axle = _firstAxle + _model.Positions[wear.Tyre].Axle - 1;
        var ofAxle = wear.AxleSd * (wear.Kind == ObservableKind.Rate ? 1 : wear.NormalEdge);
        (place.After[axle], place.Before[axle]) = (ofAxle * worn, ofAxle * soundly);
        Span<double> kp = stackalloc double[size], kg = stackalloc double[size];
        double gKg = 0, gh = 0, log = 0;
        for (var i = 0; i < size; i++)
        {
            kp[i] = evidence.K[i * size] * before + evidence.K[i * size + 1] * after;
            kg[i] = evidence.K[i * size] * soundly + evidence.K[i * size + 1] * worn;
            place.H[i] = evidence.H[i] - kp[i];
        }
        for (var i = 0; i < 2; i++)
        {
            var (p, g) = i == 0 ? (before, soundly) : (after, worn);
            log += p * (evidence.H[i] - 0.5 * kp[i]);
            gKg += g * kg[i];
            gh += g * place.H[i];
        }
        var rest = wear.RestSd * wear.RestSd;
        var taken = rest / (1 + rest * gKg);
        place.Log = log + 0.5 * taken * gh * gh - 0.5 * Math.Log(1 + rest * gKg);
        for (var i = 0; i < size; i++)
        {
            for (var j = i; j < size; j++) place.K[i * size + j] = place.K[j * size + i] = evidence.K[i * size + j] - taken * kg[i] * kg[j];
            place.H[i] -= taken * kg[i] * gh;
        }
    }

    /// <summary>
    /// A place that tells of something else (another wheel's readings, a cupped tread): its slopes lie anywhere about a sound
    /// one's and may have changed at any onset, the surveys' shared errors are as the rest of the vehicle has them.
    /// </summary>
    private double LogWildPlace(int w)
    {
        var usual = _wear[w].Kind == ObservableKind.Rate ? 1 : _wear[w].NormalEdge;
        Span<double> logs = stackalloc double[_anyOnset.Length];
        for (var o = 0; o < logs.Length; o++) logs[o] = Math.Log(logs.Length > 1 ? Onsets.Shares[o] : 1) + LogWildSlopes(_anyOnset[o][w].Evidence, usual);
        var top = double.NegativeInfinity;
        foreach (var log in logs) top = Math.Max(top, log);
        double sum = 0;
        foreach (var log in logs) sum += Math.Exp(log - top);
        return top + Math.Log(sum);
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

    private double FillSteering(ObservableKind kind, ReadOnlySpan<double> state, ReadOnlySpan<double> sd)
    {
        var map = kind == ObservableKind.SteeringPull ? _model.Torque : _model.WheelAngle;
        double predicted = 0, gained = 0;
        for (var d = 0; d < States; d++)
        {
            predicted += map[d] * state[d] * _shareOfPresent;
            // The sensor's own zero is not scaled by the steering ratio.
            if (_model.Dimensions[d].Quantity != Facts.Quantity.SensorZeroOrFrontToeSplit) gained += map[d] * state[d] * _shareOfPresent;
            _a[d] = map[d] * sd[d];
        }
        if (kind == ObservableKind.SteeringPull)
            _a[_now.At(Shared.TorqueGain)] = gained * Math.Sqrt(Sq(Sensitivities.TorqueGainSpread) + Sq(_model.AssistSpread));
        else
            _a[_now.At(Shared.Ratio)] = gained * (_model.Figures.Vehicle.SteeringRatio is null ? Sensitivities.RatioSpreadClass : Sensitivities.RatioSpreadKnown);
        return predicted;
    }

    private static double Sq(double x) => x * x;

    /// <summary>Whitens a row of the Jacobian and keeps its nonzero columns: a tyre hears of few states.</summary>
    private void Compress(int r, double white)
    {
        var count = 0;
        for (var k = 0; k < _a.Length; k++)
            if (_a[k] != 0) _columns[count++] = k;
        var (columns, values) = _sparse[r];
        if (columns.Length != count) _sparse[r] = (columns, values) = (new int[count], new double[count]);
        for (var c = 0; c < count; c++) (columns[c], values[c]) = (_columns[c], _a[_columns[c]] * white);
    }

    private JointFit Solve()
    {
        var p = _b.Length;
        var (log, quad) = Normal(p);
        log -= 0.5 * Factor(p);
        Invert(p);
        Posterior(p);
        for (var j = 0; j < p; j++) quad -= _b[j] * _mean[j];
        var (worst, odds) = Worst(p);
        return new(log - 0.5 * quad, worst, odds, _mean, _variance);
    }

    /// <summary>Normal equations of what is taken as good: P + AᵀA above the diagonal, Aᵀr, and what of the log density needs no solving.</summary>
    private (double Log, double Square) Normal(int p)
    {
        Array.Clear(_upper);
        Array.Clear(_b);
        for (var j = 0; j < _firstSurvey; j++) _upper[j * p + j] = 1;
        for (var s = 0; s < _surveys; s++)
            for (var t = s; t < _surveys; t++) _upper[(_firstSurvey + s) * p + _firstSurvey + t] = _sharedPrecision[s * _surveys + t];
        double log = 0, quad = 0;
        for (var r = 0; r < _single.Count; r++)
        {
            if (_wild[r]) continue;
            quad += _residual[r] * _residual[r];
            log += LogGood - 0.5 * Math.Log(2 * Math.PI * _single[r].Variance);
            var (columns, values) = _sparse[r];
            for (var c = 0; c < columns.Length; c++)
            {
                _b[columns[c]] += values[c] * _residual[r];
                var row = _upper.AsSpan(columns[c] * p, p);
                for (var e = c; e < columns.Length; e++) row[columns[e]] += values[c] * values[e];
            }
        }
        for (var w = 0; w < _wear.Length; w++)
            if (!_wild[_single.Count + w])
            {
                log += LogGood + _place[w].Log;
                AddPlace(_place[w], p);
            }
        return (log, quad);
    }

    /// <summary>A place in the unknowns: slopes through the two rows of its Jacobian, shared errors as they are.</summary>
    private void AddPlace(Place place, int p)
    {
        var (size, k) = (place.H.Length, place.K);
        var count = 0;
        for (var c = 0; c < _firstSurvey; c++)
            if (place.Before[c] != 0 || place.After[c] != 0) _columns[count++] = c;
        for (var x = 0; x < count; x++)
        {
            var (before, after) = (place.Before[_columns[x]], place.After[_columns[x]]);
            var row = _upper.AsSpan(_columns[x] * p, p);
            _b[_columns[x]] += before * place.H[0] + after * place.H[1];
            var (kb, ka) = (k[0] * before + k[1] * after, k[1] * before + k[size + 1] * after);
            for (var y = x; y < count; y++) row[_columns[y]] += kb * place.Before[_columns[y]] + ka * place.After[_columns[y]];
            for (var s = 2; s < size; s++) row[_firstSurvey + s - 2] += before * k[s] + after * k[size + s];
        }
        for (var s = 2; s < size; s++)
        {
            _b[_firstSurvey + s - 2] += place.H[s];
            var row = _upper.AsSpan((_firstSurvey + s - 2) * p + _firstSurvey, size - 2);
            for (var t = s; t < size; t++) row[t - 2] += k[s * size + t];
        }
    }

    /// <summary>Cholesky factor in place, by rows, passing over zeros: tyres of different axles meet only in the last columns. Returns the log determinant.</summary>
    private double Factor(int p)
    {
        double logDet = 0;
        for (var m = 0; m < p; m++)
        {
            var pivot = _upper.AsSpan(m * p, p);
            var root = Math.Sqrt(pivot[m]);
            logDet += 2 * Math.Log(root);
            for (var k = m; k < p; k++) pivot[k] /= root;
            for (var j = m + 1; j < p; j++)
                if (pivot[j] != 0) Subtract(_upper.AsSpan(j * p + j, p - j), pivot[j..], pivot[j]);
        }
        return logDet;
    }

    private void Invert(int p)
    {
        Array.Clear(_inverse);
        for (var k = 0; k < p; k++)
        {
            var row = _inverse.AsSpan(k * p, p);
            row[k] = 1;
            for (var m = k; m < p; m++)
            {
                if (row[m] == 0) continue;
                row[m] /= _upper[m * p + m];
                Subtract(row[(m + 1)..], _upper.AsSpan(m * p + m + 1, p - m - 1), row[m]);
            }
        }
    }

    private void Posterior(int p)
    {
        Forward(p, _b);
        for (var k = 0; k < p; k++)
        {
            double mean = 0, variance = 0;
            for (var j = k; j < p; j++)
            {
                var w = _inverse[k * p + j];
                mean += w * _forward[j];
                variance += w * w;
            }
            (_mean[k], _variance[k]) = (mean, variance);
        }
    }

    /// <summary>U⁻ᵀ times a column.</summary>
    private void Forward(int p, ReadOnlySpan<double> column)
    {
        Array.Clear(_forward);
        for (var k = 0; k < p; k++)
            if (column[k] != 0) Subtract(_forward.AsSpan(k), _inverse.AsSpan(k * p + k, p - k), -column[k]);
    }

    private static void Subtract(Span<double> from, ReadOnlySpan<double> row, double factor)
    {
        row = row[..from.Length];
        for (var i = 0; i < from.Length; i++) from[i] -= factor * row[i];
    }

    /// <summary>The reading, or the place's wear, that the rest predicts worst.</summary>
    private (int Row, double LogOdds) Worst(int p)
    {
        var (worst, worstOdds) = (-1, double.NegativeInfinity);
        for (var r = 0; r < _wild.Length; r++)
        {
            if (_wild[r]) continue;
            var odds = r < _single.Count ? SingleOdds(r, p) : PlaceOdds(r - _single.Count);
            if (odds > worstOdds) (worst, worstOdds) = (r, odds);
        }
        return (worst, worstOdds);
    }

    private double SingleOdds(int r, int p)
    {
        double reach = 0, fitted = 0;
        var (columns, values) = _sparse[r];
        for (var c = 0; c < columns.Length; c++) fitted += values[c] * _mean[columns[c]];
        var left = _residual[r] - fitted;
        if (left * left < 1) return double.NegativeInfinity; // a reading that fits this well is not wild
        Array.Clear(_a);
        for (var c = 0; c < columns.Length; c++) _a[columns[c]] = values[c];
        Forward(p, _a);
        foreach (var f in _forward) reach += f * f;
        var variance = _single[r].Variance / Math.Max(1e-9, 1 - reach); // of this reading given the others
        var departure = left / Math.Sqrt(_single[r].Variance) * variance;
        return LogWild(r) - LogGood - LogNormal(departure, variance);
    }

    /// <summary>Against how well the place fits where all together put it; a place that pulls hard looks better than it is.</summary>
    private double PlaceOdds(int w)
    {
        var place = _place[w];
        var size = place.H.Length;
        Span<double> step = stackalloc double[size];
        step.Clear();
        for (var c = 0; c < _firstSurvey; c++)
        {
            step[0] += place.Before[c] * _mean[c];
            step[1] += place.After[c] * _mean[c];
        }
        for (var s = 2; s < size; s++) step[s] = _mean[_firstSurvey + s - 2];
        var log = place.Log;
        for (var i = 0; i < size; i++)
        {
            log += place.H[i] * step[i];
            for (var j = 0; j < size; j++) log -= 0.5 * step[i] * place.K[i * size + j] * step[j];
        }
        return LogWild(_single.Count + w) - LogGood - log;
    }

    private static readonly double LogGood = Math.Log(1 - Sensitivities.WildShare);

    /// <summary>SD of a wild slope about a sound tyre's, share of the normal rate.</summary>
    private const double WildSlopeSd = 2;

    private static double LogNormal(double departure, double variance) => -0.5 * (departure * departure / variance + Math.Log(2 * Math.PI * variance));
}
