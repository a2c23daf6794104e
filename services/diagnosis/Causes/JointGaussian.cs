namespace WearWatch.Diagnosis.Causes;

/// <summary>What the joint law of observables says at one state.</summary>
/// <param name="LogLikelihood">Natural logarithm, over the readings taken as good.</param>
/// <param name="Worst">The reading that the others predict worst; −1 where there is none.</param>
/// <param name="WorstLogOdds">Log odds that it is wild rather than good.</param>
/// <param name="Mean">Posterior mean of each shared unknown, in its prior SDs: the states first, then the sensitivities.</param>
/// <param name="Variance">Posterior variance of the same.</param>
public readonly record struct JointFit(double LogLikelihood, int Worst, double WorstLogOdds, double[] Mean, double[] Variance);

/// <summary>
/// Law of all observables at one state, with every other quantity (in order) and every sensitivity as Gaussian
/// unknowns of low rank, linearised at that state. One instance per vehicle; not safe for concurrent use.
/// </summary>
/// <remarks>
/// Covariance D + J·Jᵀ by the matrix inversion lemma: cost n·p² + p³ for n observables and p unknowns.
/// Which reading may be wild is told by comparing it with its prediction from all others (leave-one-out of a Gaussian).
/// </remarks>
public sealed class JointGaussian
{
    /// <summary>Shared unknowns beside the states, in this order.</summary>
    private enum Shared { SlipAgainstEdge, CamberEdge, Feather, TorqueGain, Ratio, VehicleRate, RollFront, RollRear, ScrubShare, Count }

    private const int Sensitivity = (int)Shared.Count;

    // Slip scale (one over service slip) and edge share, as logarithms, are turned into the sum that moves every edge
    // (Gain, held fixed at each call) and the difference that moves rates against edges (a Gaussian unknown).
    private static readonly double GainSd = Math.Sqrt(Sq(Sensitivities.ServiceSlipSpread) + Sq(Sensitivities.EdgeSpread));
    private static readonly double SlipPerGain = Sq(Sensitivities.ServiceSlipSpread) / GainSd, EdgePerGain = Sq(Sensitivities.EdgeSpread) / GainSd;
    private static readonly double Difference = Sensitivities.ServiceSlipSpread * Sensitivities.EdgeSpread / GainSd;

    private readonly VehicleModel _model;
    private readonly IReadOnlyList<Observable> _rows;
    private readonly double[] _priorSd;
    private readonly double[] _a; // one row of the Jacobian
    private readonly double[] _upper, _inverse; // U of I + AᵀA = UᵀU and U⁻¹, row by row
    private readonly bool[] _wild;
    private readonly int[] _columns; // nonzero columns of one row
    private readonly (int[] Columns, double[] Values)[] _sparse;
    private double _slipScale = 1, _edgeScale = 1;
    private readonly double[] _forward, _residual, _slip, _duty, _crown, _camber, _shared, _b, _mean, _variance;
    private readonly int[][] _support; // states that reach a tyre at all

    public JointGaussian(VehicleModel model, IReadOnlyList<Observable> rows)
    {
        (_model, _rows) = (model, rows);
        _priorSd = [.. model.Dimensions.Select(d => d.PriorSd)];
        var (n, p, tyres) = (rows.Count, States + Sensitivity, model.Positions.Count);
        (_a, _upper, _inverse, _forward, _wild) = (new double[p], new double[p * p], new double[p * p], new double[p], new bool[n]);
        (_residual, _b, _mean, _variance) = (new double[n], new double[p], new double[p], new double[p]);
        _columns = new int[p];
        _sparse = [.. Enumerable.Range(0, n).Select(_ => (Array.Empty<int>(), Array.Empty<double>()))];
        (_slip, _duty, _crown, _camber, _shared) = (new double[tyres], new double[tyres], new double[tyres], new double[tyres], new double[tyres]);
        _support = [.. Enumerable.Range(0, tyres).Select(i => Enumerable.Range(0, States)
            .Where(d => model.Slip[i, d] != 0 || model.Duty[i, d] != 0 || model.Camber[i, d] != 0).ToArray())];
    }

    public int States => _model.Dimensions.Count;

    /// <summary>Posterior mean and SD of the slip scale's logarithm after <see cref="At"/>: above zero, slip wears more than the class's prior says.</summary>
    public (double Mean, double Sd) LogSlipScale() =>
        (Math.Log(_slipScale) + Difference * _mean[States], Difference * Math.Sqrt(_variance[States]));

    /// <summary>Holds the gain common to all edges at so many prior SDs; it scales everything, so that a Gaussian would miss its tails.</summary>
    public void HoldGain(double standardDeviations) =>
        (_slipScale, _edgeScale) = (Math.Exp(SlipPerGain * standardDeviations), Math.Exp(EdgePerGain * standardDeviations));

    /// <summary>Evaluates at a state; the priors of the story's own dimensions are replaced by <paramref name="priorSd"/>.</summary>
    /// <param name="state">Departures from target, one per dimension.</param>
    /// <param name="priorSd">SD of what each dimension may depart further; null for the ordinary ones.</param>
    /// <returns>No reading is taken as wild yet. Arrays in the result are reused by the next call.</returns>
    public JointFit At(ReadOnlySpan<double> state, ReadOnlySpan<double> priorSd = default)
    {
        var sd = priorSd.IsEmpty ? _priorSd : priorSd;
        TyreStates(state);
        Array.Clear(_wild);
        for (var r = 0; r < _rows.Count; r++)
        {
            Array.Clear(_a);
            var row = _rows[r];
            var predicted = row.Tyre < 0 ? FillSteering(row.Kind, state, sd) : FillTyre(row.Kind, row.Tyre, sd);
            var white = 1 / Math.Sqrt(row.Variance);
            Compress(r, white);
            _residual[r] = (row.Value - predicted) * white;
        }
        return Solve();
    }

    /// <summary>The same state with one more reading taken as wild: it no longer informs anything.</summary>
    public JointFit Without(int row)
    {
        _wild[row] = true;
        return Solve();
    }

    /// <summary>Log density of a reading taken as wild, with the share of such readings.</summary>
    public double LogWild(int row) => Math.Log(Sensitivities.WildShare) + LogNormal(_rows[row].Value, _rows[row].WildSd * _rows[row].WildSd);

    /// <summary>Slip of a tyre that shapes its tread, after the last <see cref="At"/>: mean and SD, over RMS service slip.</summary>
    public (double Mean, double Sd) ShapeSlip(int tyre, ReadOnlySpan<double> priorSd)
    {
        var (mean, variance) = (_slip[tyre] + _duty[tyre], 0.0);
        foreach (var d in _support[tyre])
        {
            var reach = (_slipScale * _model.Slip[tyre, d] + _model.Duty[tyre, d]) * priorSd[d];
            mean += reach * _mean[d];
            variance += reach * reach * _variance[d];
        }
        return (mean, Math.Sqrt(variance));
    }

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

    private void TyreStates(ReadOnlySpan<double> state)
    {
        for (var i = 0; i < _support.Length; i++)
        {
            (_slip[i], _duty[i], _camber[i], _shared[i]) = (0, 0, 0, 0);
            var axle = _model.Positions[i].Axle;
            var turn = _model.Positions[i].Side == Facts.Side.Right ? 1 : -1;
            _crown[i] = _model.CrownSlip * turn;
            _duty[i] = _crown[i] + _model.DutyMean * turn * (axle == 1 || _model.IsTrailer ? 1 : 0.7);
            foreach (var d in _support[i])
            {
                if (state[d] == 0) continue;
                var slip = _slipScale * _model.Slip[i, d] * state[d];
                _slip[i] += slip;
                _duty[i] += _model.Duty[i, d] * state[d];
                _camber[i] += _model.Camber[i, d] * state[d];
                if (_model.ShareUncertain[d]) _shared[i] += slip;
            }
        }
    }

    private double FillSteering(ObservableKind kind, ReadOnlySpan<double> state, ReadOnlySpan<double> sd)
    {
        var map = kind == ObservableKind.SteeringPull ? _model.Torque : _model.WheelAngle;
        double predicted = 0, gained = 0;
        for (var d = 0; d < States; d++)
        {
            predicted += map[d] * state[d];
            // The sensor's own zero is not scaled by the steering ratio.
            if (_model.Dimensions[d].Quantity != Facts.Quantity.SensorZeroOrFrontToeSplit) gained += map[d] * state[d];
            _a[d] = map[d] * sd[d];
        }
        if (kind == ObservableKind.SteeringPull)
            _a[Column(Shared.TorqueGain)] = gained * Math.Sqrt(Sq(Sensitivities.TorqueGainSpread) + Sq(_model.AssistSpread));
        else
            _a[Column(Shared.Ratio)] = gained * (_model.Figures.Vehicle.SteeringRatio is null ? Sensitivities.RatioSpreadClass : Sensitivities.RatioSpreadKnown);
        return predicted;
    }

    private double FillTyre(ObservableKind kind, int i, ReadOnlySpan<double> sd)
    {
        var z = _slip[i];
        var shape = z + _duty[i]; // one-way turning shapes the tread but wears no faster than service
        var held = z + _crown[i]; // slip adds to what holds the vehicle on the crown, on one side, and takes from it on the other
        var normal = 1 + _crown[i] * _crown[i];
        double predicted, bySlip, byCamber = 0, byEdge = 0;
        switch (kind)
        {
            case ObservableKind.LogRate:
                predicted = Math.Log((1 + held * held) / normal);
                bySlip = 2 * held / (1 + held * held);
                _a[Column(Shared.VehicleRate)] = Sensitivities.LogRateVehicle;
                break;
            case ObservableKind.EdgeSlope:
                var (edge, slope) = Observables.EdgeOfSlip(shape);
                var camberEdge = Sensitivities.CamberEdgeShare * _camber[i];
                // The figure is beyond normal, and normal is what the crown makes of a sound tyre.
                byEdge = _edgeScale * (edge - Observables.EdgeOfSlip(_crown[i]).Value) / normal;
                (predicted, bySlip, byCamber) = (byEdge + camberEdge, _edgeScale * slope / normal, Sensitivities.CamberEdgeShare);
                _a[Column(Shared.CamberEdge)] = camberEdge * Sensitivities.CamberEdgeSpread;
                _a[Column(_model.Positions[i].Axle == 1 ? Shared.RollFront : Shared.RollRear)] = _model.Class.RollShare;
                break;
            default:
                var tanh = Math.Tanh(shape);
                (predicted, bySlip) = (Sensitivities.FeatherMm * (tanh - Math.Tanh(_crown[i])), Sensitivities.FeatherMm * (1 - tanh * tanh));
                _a[Column(Shared.Feather)] = predicted * Sensitivities.FeatherSpread;
                break;
        }
        foreach (var d in _support[i])
        {
            var duty = kind == ObservableKind.LogRate ? 0 : _model.Duty[i, d];
            _a[d] = (bySlip * (_slipScale * _model.Slip[i, d] + duty) + byCamber * _model.Camber[i, d]) * sd[d];
        }
        _a[Column(Shared.SlipAgainstEdge)] = (bySlip * z - byEdge) * Difference;
        _a[Column(Shared.ScrubShare)] = bySlip * _shared[i] * Sensitivities.ShareSpread;
        return predicted;
    }

    private int Column(Shared unknown) => States + (int)unknown;

    private static double Sq(double x) => x * x;

    /// <summary>Whitens a row of the Jacobian and keeps its nonzero columns: a tyre hears of few states.</summary>
    private void Compress(int r, double white)
    {
        var count = 0;
        for (var k = 0; k < States + Sensitivity; k++)
            if (_a[k] != 0) _columns[count++] = k;
        var (columns, values) = _sparse[r];
        if (columns.Length != count) _sparse[r] = (columns, values) = (new int[count], new double[count]);
        for (var c = 0; c < count; c++) (columns[c], values[c]) = (_columns[c], _a[_columns[c]] *= white);
    }

    private JointFit Solve()
    {
        var (n, p) = (_rows.Count, States + Sensitivity);
        Array.Clear(_upper);
        Array.Clear(_b);
        for (var j = 0; j < p; j++) _upper[j * p + j] = 1;
        double log = 0, quad = 0;
        for (var r = 0; r < n; r++)
        {
            if (_wild[r]) continue;
            quad += _residual[r] * _residual[r];
            log += LogGood - 0.5 * Math.Log(2 * Math.PI * _rows[r].Variance);
            var (columns, values) = _sparse[r];
            for (var c = 0; c < columns.Length; c++)
            {
                _b[columns[c]] += values[c] * _residual[r];
                for (var e = c; e < columns.Length; e++) _upper[columns[c] * p + columns[e]] += values[c] * values[e];
            }
        }
        log -= 0.5 * Factor(p);
        Invert(p);
        Posterior(p);
        for (var j = 0; j < p; j++) quad -= _b[j] * _mean[j];
        var (worst, odds) = Worst(p);
        return new(log - 0.5 * quad, worst, odds, _mean, _variance);
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

    private (int Row, double LogOdds) Worst(int p)
    {
        var (worst, worstOdds) = (-1, double.NegativeInfinity);
        for (var r = 0; r < _rows.Count; r++)
        {
            if (_wild[r]) continue;
            double reach = 0, fitted = 0;
            var (columns, values) = _sparse[r];
            for (var c = 0; c < columns.Length; c++) fitted += values[c] * _mean[columns[c]];
            var left = _residual[r] - fitted;
            if (left * left < 1) continue; // a reading that fits this well is not wild
            Array.Clear(_a);
            for (var c = 0; c < columns.Length; c++) _a[columns[c]] = values[c];
            Forward(p, _a);
            foreach (var f in _forward) reach += f * f;
            var variance = _rows[r].Variance / Math.Max(1e-9, 1 - reach); // of this reading given the others
            var departure = left / Math.Sqrt(_rows[r].Variance) * variance;
            var odds = LogWild(r) - LogGood - LogNormal(departure, variance);
            if (odds > worstOdds) (worst, worstOdds) = (r, odds);
        }
        return (worst, worstOdds);
    }

    private static readonly double LogGood = Math.Log(1 - Sensitivities.WildShare);

    private static double LogNormal(double departure, double variance) => -0.5 * (departure * departure / variance + Math.Log(2 * Math.PI * variance));
}
