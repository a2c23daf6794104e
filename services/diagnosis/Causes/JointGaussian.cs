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
    private const int Sensitivity = 10; // service slip, edge, camber edge, feather, torque gain, ratio, vehicle rate, roll front, roll rear, scrub share
    private readonly VehicleModel _model;
    private readonly IReadOnlyList<Observable> _rows;
    private readonly double[] _priorSd;
    private readonly double[,] _a; // whitened Jacobian
    private readonly double[,] _lower; // Cholesky factor of I + AᵀA, then its inverse
    private readonly bool[] _wild;
    private readonly double[] _residual, _slip, _duty, _camber, _shared, _b, _mean, _variance;
    private readonly int[][] _support; // states that reach a tyre at all

    public JointGaussian(VehicleModel model, IReadOnlyList<Observable> rows)
    {
        (_model, _rows) = (model, rows);
        _priorSd = [.. model.Dimensions.Select(d => d.PriorSd)];
        var (n, p, tyres) = (rows.Count, States + Sensitivity, model.Positions.Count);
        (_a, _lower, _wild) = (new double[n, p], new double[p, p], new bool[n]);
        (_residual, _b, _mean, _variance) = (new double[n], new double[p], new double[p], new double[p]);
        (_slip, _duty, _camber, _shared) = (new double[tyres], new double[tyres], new double[tyres], new double[tyres]);
        _support = [.. Enumerable.Range(0, tyres).Select(i => Enumerable.Range(0, States)
            .Where(d => model.Slip[i, d] != 0 || model.Duty[i, d] != 0 || model.Camber[i, d] != 0).ToArray())];
    }

    public int States => _model.Dimensions.Count;

    /// <summary>Index of the service slip's logarithm among the unknowns.</summary>
    public int ServiceSlip => States;

    /// <summary>Evaluates at a state; the priors of the story's own dimensions are replaced by <paramref name="priorSd"/>.</summary>
    /// <param name="state">Departures from target, one per dimension.</param>
    /// <param name="priorSd">SD of what each dimension may depart further; null for the ordinary ones.</param>
    /// <returns>No reading is taken as wild yet. Arrays in the result are reused by the next call.</returns>
    public JointFit At(ReadOnlySpan<double> state, ReadOnlySpan<double> priorSd = default)
    {
        var sd = priorSd.IsEmpty ? _priorSd : priorSd;
        TyreStates(state);
        Array.Clear(_a);
        Array.Clear(_wild);
        for (var r = 0; r < _rows.Count; r++)
        {
            var row = _rows[r];
            var predicted = row.Tyre < 0 ? FillSteering(r, row.Kind, state, sd) : FillTyre(r, row.Kind, row.Tyre, sd);
            var white = 1 / Math.Sqrt(row.Variance);
            for (var k = 0; k < States + Sensitivity; k++) _a[r, k] *= white;
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
            var reach = (_model.Slip[tyre, d] + _model.Duty[tyre, d]) * priorSd[d];
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
            _duty[i] = _model.DutyMean * turn * (axle == 1 || _model.IsTrailer ? 1 : 0.7);
            foreach (var d in _support[i])
            {
                if (state[d] == 0) continue;
                _slip[i] += _model.Slip[i, d] * state[d];
                _duty[i] += _model.Duty[i, d] * state[d];
                _camber[i] += _model.Camber[i, d] * state[d];
                if (_model.ShareUncertain[d]) _shared[i] += _model.Slip[i, d] * state[d];
            }
        }
    }

    private double FillSteering(int r, ObservableKind kind, ReadOnlySpan<double> state, ReadOnlySpan<double> sd)
    {
        var map = kind == ObservableKind.SteeringPull ? _model.Torque : _model.WheelAngle;
        double predicted = 0, gained = 0;
        for (var d = 0; d < States; d++)
        {
            predicted += map[d] * state[d];
            // The sensor's own zero is not scaled by the steering ratio.
            if (_model.Dimensions[d].Quantity != Facts.Quantity.SensorZeroOrFrontToeSplit) gained += map[d] * state[d];
            _a[r, d] = map[d] * sd[d];
        }
        if (kind == ObservableKind.SteeringPull)
            _a[r, States + 4] = gained * Math.Sqrt(Math.Pow(Sensitivities.TorqueGainSpread, 2) + Math.Pow(_model.AssistSpread, 2));
        else
            _a[r, States + 5] = gained * (_model.Figures.Vehicle.SteeringRatio is null ? Sensitivities.RatioSpreadClass : Sensitivities.RatioSpreadKnown);
        return predicted;
    }

    private double FillTyre(int r, ObservableKind kind, int i, ReadOnlySpan<double> sd)
    {
        var z = _slip[i];
        var shape = z + _duty[i]; // one-way turning shapes the tread but wears no faster than service
        double predicted, bySlip, byCamber = 0;
        switch (kind)
        {
            case ObservableKind.LogRate:
                predicted = Math.Log(1 + z * z);
                bySlip = 2 * z / (1 + z * z);
                _a[r, States + 6] = Sensitivities.LogRateVehicle;
                break;
            case ObservableKind.EdgeSlope:
                var (slipEdge, slope) = Observables.EdgeOfSlip(shape);
                var camberEdge = Sensitivities.CamberEdgeShare * _camber[i];
                (predicted, bySlip, byCamber) = (slipEdge + camberEdge, slope, Sensitivities.CamberEdgeShare);
                _a[r, States + 1] = slipEdge * Sensitivities.EdgeSpread;
                _a[r, States + 2] = camberEdge * Sensitivities.CamberEdgeSpread;
                _a[r, States + (_model.Positions[i].Axle == 1 ? 7 : 8)] = _model.Class.RollShare;
                break;
            default:
                var tanh = Math.Tanh(shape);
                (predicted, bySlip) = (Sensitivities.FeatherMm * tanh, Sensitivities.FeatherMm * (1 - tanh * tanh));
                _a[r, States + 3] = predicted * Sensitivities.FeatherSpread;
                break;
        }
        foreach (var d in _support[i])
        {
            var duty = kind == ObservableKind.LogRate ? 0 : _model.Duty[i, d];
            _a[r, d] = (bySlip * (_model.Slip[i, d] + duty) + byCamber * _model.Camber[i, d]) * sd[d];
        }
        _a[r, States] = -bySlip * z * Sensitivities.ServiceSlipSpread; // more service slip: fewer of it per degree
        _a[r, States + 9] = bySlip * _shared[i] * Sensitivities.ShareSpread;
        return predicted;
    }

    private JointFit Solve()
    {
        var (n, p) = (_rows.Count, States + Sensitivity);
        for (var j = 0; j < p; j++)
            for (var k = 0; k <= j; k++) _lower[j, k] = j == k ? 1 : 0;
        Array.Clear(_b);
        double log = 0, quad = 0;
        for (var r = 0; r < n; r++)
        {
            if (_wild[r]) continue;
            quad += _residual[r] * _residual[r];
            log += LogGood - 0.5 * Math.Log(2 * Math.PI * _rows[r].Variance);
            for (var j = 0; j < p; j++)
            {
                var aj = _a[r, j];
                if (aj == 0) continue;
                _b[j] += aj * _residual[r];
                for (var k = 0; k <= j; k++) _lower[j, k] += aj * _a[r, k];
            }
        }
        log -= 0.5 * FactorAndInvert(p);
        Posterior(p);
        for (var j = 0; j < p; j++) quad -= _b[j] * _mean[j];
        var (worst, odds) = Worst(p);
        return new(log - 0.5 * quad, worst, odds, _mean, _variance);
    }

    /// <summary>Cholesky factor in place, then its inverse in place; returns the logarithm of the determinant.</summary>
    private double FactorAndInvert(int p)
    {
        double logDet = 0;
        for (var j = 0; j < p; j++)
        {
            for (var k = 0; k <= j; k++)
            {
                var sum = _lower[j, k];
                for (var m = 0; m < k; m++) sum -= _lower[j, m] * _lower[k, m];
                _lower[j, k] = j == k ? Math.Sqrt(sum) : sum / _lower[k, k];
            }
            logDet += 2 * Math.Log(_lower[j, j]);
        }
        for (var j = 0; j < p; j++)
        {
            var diagonal = 1 / _lower[j, j];
            for (var k = 0; k < j; k++)
            {
                double sum = 0;
                for (var m = k; m < j; m++) sum += _lower[j, m] * _lower[m, k];
                _lower[j, k] = -sum * diagonal;
            }
            _lower[j, j] = diagonal;
        }
        return logDet;
    }

    private void Posterior(int p)
    {
        Array.Clear(_mean);
        Array.Clear(_variance);
        for (var j = 0; j < p; j++)
        {
            double t = 0;
            for (var k = 0; k <= j; k++) t += _lower[j, k] * _b[k];
            for (var k = 0; k <= j; k++)
            {
                _mean[k] += _lower[j, k] * t;
                _variance[k] += _lower[j, k] * _lower[j, k];
            }
        }
    }

    private (int Row, double LogOdds) Worst(int p)
    {
        var (worst, worstOdds) = (-1, double.NegativeInfinity);
        for (var r = 0; r < _rows.Count; r++)
        {
            if (_wild[r]) continue;
            double reach = 0, fitted = 0;
            for (var j = 0; j < p; j++) fitted += _a[r, j] * _mean[j];
            var left = _residual[r] - fitted;
            if (left * left < 1 && worst >= 0) continue; // a reading that fits this well is not the one
            for (var j = 0; j < p; j++)
            {
                double t = 0;
                for (var k = 0; k <= j; k++) t += _lower[j, k] * _a[r, k];
                reach += t * t;
            }
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
