using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Causes;

/// <summary>What the joint law of observables says at one state.</summary>
/// <param name="LogLikelihood">Natural logarithm, over the readings taken as good and those taken as wild.</param>
/// <param name="Mean">Posterior mean of each shared unknown, in its prior SDs: the states first, then the sensitivities.</param>
/// <param name="Variance">Posterior variance of the same.</param>
public readonly record struct JointFit(double LogLikelihood, double[] Mean, double[] Variance);

/// <summary>
/// Law of all observables at one state that holds since one onset (before it the vehicle was sound), with every other
/// quantity (in order) and every sensitivity as Gaussian unknowns, linearised at that state. One instance per vehicle and
/// onset; not safe for concurrent use.
/// </summary>
/// <remarks>
/// Normal equations (P + JᵀKJ)u = Jᵀh of n places and p unknowns. A state moves the predictions of a few places only, so those
/// of a sound vehicle are kept and only what the state reaches is replaced: cost p³/6 for the factor and little else.
/// Which reading may be wild is told by comparing it with where all together put it.
/// </remarks>
public sealed partial class JointGaussian
{
    private const int MostWild = 3;

    /// <summary>Log odds of a reading being wild below which none is worth taking as wild.</summary>
    private const double WorthTrying = -1.5;

    /// <summary>SD of a wild slope about a sound tyre's, share of the normal rate.</summary>
    private const double WildSlopeSd = 2;

    private static readonly double LogGood = Math.Log(1 - Sensitivities.WildShare), LogWildShare = Math.Log(Sensitivities.WildShare), LogWildPlaceShare = Math.Log(Sensitivities.WildPlaceShare);

    private readonly VehicleModel _model;
    private readonly IReadOnlyList<Observable> _single;
    private readonly WearObservable[] _wear;
    private readonly IReadOnlyList<WearObservable>[] _anyOnset;
    private readonly double[] _sharedPrecision; // of the surveys' shared errors
    private readonly int _surveys, _firstAxle, _firstSurvey, _unknowns;
    private readonly TyreResponse _now, _sound;
    private readonly double[] _ordinarySd;
    private readonly double _shareOfPresent; // of the weeks that the steering figures stand for, the part since the onset
    private readonly Sound?[] _sounds = new Sound?[3]; // by gain

    // The system being worked on: information and its product with the best values, before the unknowns' own precision.
    private readonly double[] _data, _dataB;
    private readonly NormalEquations _equations;
    private readonly double[] _mean, _variance, _row;
    private readonly int[] _columns;
    private readonly Place[] _moved; // places as the state has them; only those it reaches are filled
    private readonly Row[] _rows; // single readings as the state has them
    private readonly bool[] _reached;
    private readonly List<int> _wild = [];
    private Sound _at = null!;
    private double _log;

    /// <summary>A place at a state: its evidence with what the place keeps unexplained integrated out, about the prediction.</summary>
    private sealed class Place(int size, int unknowns)
    {
        public double[] K { get; } = new double[size * size];
        public double[] H { get; } = new double[size]; // gradient at the prediction
        public double Log { get; set; } // log likelihood at the prediction
        public double[] Before { get; } = new double[unknowns];
        public double[] After { get; } = new double[unknowns];
    }

    /// <summary>A single reading at a state, whitened.</summary>
    private sealed class Row(int unknowns)
    {
        public double[] Jacobian { get; } = new double[unknowns];
        public double Residual { get; set; }
    }

    /// <summary>Everything of a sound vehicle at one gain: the places' part of the system, and what is wild there.</summary>
    private sealed class Sound
    {
        public required double Gain { get; init; }
        public required Place[] Places { get; init; }
        public required double[] Data { get; init; }
        public required double[] DataB { get; init; }
        public required double Log { get; init; }
        public double[] LogWild { get; set; } = [];
        public double[] Variance { get; set; } = [];
        public double[] Mean { get; set; } = [];
        /// <summary>Readings taken as wild one after the other.</summary>
        public int[] Wild { get; set; } = [];
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
        _ordinarySd = [.. model.Dimensions.Select(d => d.PriorSd)];
        _firstAxle = States + (int)Shared.Count;
        _firstSurvey = _firstAxle + model.Positions.Max(x => x.Axle);
        _unknowns = _firstSurvey + _surveys;
        var p = _unknowns;
        (_data, _dataB, _equations) = (new double[p * p], new double[p], new(p));
        (_mean, _variance, _row, _columns) = (new double[p], new double[p], new double[p], new int[p]);
        _moved = [.. _wear.Select(w => new Place(w.Evidence.Size, _firstSurvey))];
        _rows = [.. _single.Select(_ => new Row(_firstSurvey))];
        _reached = new bool[model.Positions.Count];
        _shareOfPresent = Math.Min(1, Onsets.DaysAgo[onset] / Roads.SteeringFigures.PresentDays);
    }

    public int States => _model.Dimensions.Count;

    /// <summary>Gains of all edges that are weighed, in prior SDs, with the logarithm of their share: three-point Gauss–Hermite rule (Abramowitz &amp; Stegun 25.10, rescaled).</summary>
    public static IReadOnlyList<(double Node, double LogWeight)> Gains { get; } =
        [(-Math.Sqrt(3), Math.Log(1 / 6.0)), (0, Math.Log(2 / 3.0)), (Math.Sqrt(3), Math.Log(1 / 6.0))];

    /// <summary>Index of the middle gain.</summary>
    public const int MiddleGain = 1;

    /// <summary>Posterior mean and SD of the slip scale's logarithm after <see cref="At"/>: above zero, slip wears more than the class's prior says.</summary>
    public (double Mean, double Sd) LogSlipScale() =>
        (Math.Log(_now.SlipScale) + TyreResponse.Difference * _mean[States], TyreResponse.Difference * Math.Sqrt(_variance[States]));

    /// <summary>Weighs a state at a gain, once for every choice of wild readings along the worst ones.</summary>
    /// <param name="state">Departures from target since the onset, one per dimension.</param>
    /// <param name="priorSd">SD of what each dimension may depart further.</param>
    /// <param name="gain">Index into <see cref="Gains"/>.</param>
    /// <param name="each">Called with every fit, which it must not keep.</param>
    public void At(ReadOnlySpan<double> state, ReadOnlySpan<double> priorSd, int gain, Action<JointFit> each)
    {
        Assemble(state, gain);
        _wild.Clear();
        while (true)
        {
            var log = Solve(priorSd, inFull: true);
            each(new(log, _mean, _variance));
            if (_wild.Count == MostWild) return;
            var (worst, odds) = Worst(priorSd);
            if (odds < WorthTrying) return;
            Drop(worst);
        }
    }

    /// <summary>
    /// The same at the middle gain with the readings wild that are so on a sound vehicle, and with its variances: a fraction
    /// of the work.
    /// </summary>
    public void Near(ReadOnlySpan<double> state, ReadOnlySpan<double> priorSd, Action<JointFit> each)
    {
        Assemble(state, MiddleGain);
        _wild.Clear();
        for (var next = 0; ; next++)
        {
            var log = Solve(priorSd, inFull: false);
            each(new(log, _mean, _at.Variance));
            if (next == _at.Wild.Length) return;
            Drop(_at.Wild[next]);
        }
    }

    /// <summary>Slip that shapes a tyre's tread since the onset, at the state last weighed: mean and SD, over RMS service slip.</summary>
    public (double Mean, double Sd) ShapeSlip(int tyre, ReadOnlySpan<double> priorSd, in JointFit fit) => _now.ShapeSlip(tyre, priorSd, fit.Mean, fit.Variance);

    /// <summary>The same before the onset.</summary>
    public (double Mean, double Sd) ShapeSlipBefore(int tyre, ReadOnlySpan<double> priorSd, in JointFit fit) => _sound.ShapeSlip(tyre, priorSd, fit.Mean, fit.Variance);

    /// <summary>Steering torque (N·m) or wheel angle (deg) at the state last weighed: mean and SD.</summary>
    public (double Mean, double Sd) Steering(ReadOnlySpan<double> map, ReadOnlySpan<double> state, ReadOnlySpan<double> priorSd, in JointFit fit)
    {
        double mean = 0, variance = 0;
        for (var d = 0; d < States; d++)
        {
            mean += map[d] * (state[d] + priorSd[d] * fit.Mean[d]);
            variance += map[d] * map[d] * priorSd[d] * priorSd[d] * fit.Variance[d];
        }
        return (mean, Math.Sqrt(variance));
    }

    private Sound Prepared(int gain)
    {
        if (_sounds[gain] is { } ready) return ready;
        Span<double> nothing = stackalloc double[States];
        nothing.Clear();
        Hold(Gains[gain].Node, nothing);
        _now.Look(nothing);
        Place[] places = [.. _wear.Select(w => new Place(w.Evidence.Size, _firstSurvey))];
        for (var w = 0; w < places.Length; w++) FillPlace(_wear[w], places[w]);
        Array.Clear(_data);
        Array.Clear(_dataB);
        double log = 0;
        foreach (var place in places) log += AddPlace(place, 1);
        var sound = new Sound { Gain = Gains[gain].Node, Places = places, Data = [.. _data], DataB = [.. _dataB], Log = log };
        _sounds[gain] = sound;
        Assemble(nothing, gain);
        _wild.Clear();
        Solve(_ordinarySd, inFull: true);
        // What a wild reading is worth hangs on the rest of the vehicle by the surveys' shared errors alone.
        sound.LogWild = [.. _single.Select(s => LogWildShare + LogNormal(s.Value, s.WildSd * s.WildSd)), .. Enumerable.Range(0, _wear.Length).Select(w => LogWildPlaceShare + LogWildPlace(w))];
        (sound.Mean, sound.Variance) = ([.. _mean], [.. _variance]);
        At(nothing, _ordinarySd, gain, _ => { });
        sound.Wild = [.. _wild];
        return sound;
    }

    private void Hold(double gain, ReadOnlySpan<double> nothing)
    {
        _now.HoldGain(gain);
        _sound.HoldGain(gain);
        _sound.Look(nothing);
    }

    /// <summary>The system at a state: a sound vehicle's, with what the state reaches put in its place.</summary>
    private void Assemble(ReadOnlySpan<double> state, int gain)
    {
        var at = Prepared(gain);
        _at = at;
        if (_now.Gain != at.Gain)
        {
            Span<double> nothing = stackalloc double[States];
            nothing.Clear();
            Hold(at.Gain, nothing);
        }
        _now.Look(state);
        at.Data.CopyTo(_data, 0);
        at.DataB.CopyTo(_dataB, 0);
        _log = at.Log;
        for (var i = 0; i < _reached.Length; i++) _reached[i] = _now.Reached(i, state);
        for (var w = 0; w < _wear.Length; w++)
        {
            if (!_reached[_wear[w].Tyre]) continue;
            _log -= AddPlace(at.Places[w], -1);
            FillPlace(_wear[w], _moved[w]);
            _log += AddPlace(_moved[w], 1);
        }
        for (var r = 0; r < _single.Count; r++)
        {
            FillRow(_single[r], _rows[r], state);
            _log += AddRow(r, 1);
        }
    }

    private Place PlaceNow(int w) => _reached[_wear[w].Tyre] ? _moved[w] : _at.Places[w];

    /// <summary>Takes a reading as wild: it no longer informs anything.</summary>
    private void Drop(int row)
    {
        _wild.Add(row);
        _log -= row < _single.Count ? AddRow(row, -1) : AddPlace(PlaceNow(row - _single.Count), -1);
        _log += _at.LogWild[row];
    }

    /// <summary>
    /// Both slopes of a place: a sound vehicle's before the onset, the state's after it. What the place keeps unexplained, in
    /// proportion to its wear in both, is integrated out at once: it takes from the evidence along that one direction.
    /// </summary>
    private void FillPlace(in WearObservable wear, Place place)
    {
        var (evidence, size) = (wear.Evidence, wear.Evidence.Size);
        var (after, worn) = _now.Fill(wear.Kind, wear.Tyre, wear.NormalEdge, wear.VehicleSd, _ordinarySd, place.After);
        var (before, soundly) = evidence.K[0] > 0 ? _sound.Fill(wear.Kind, wear.Tyre, wear.NormalEdge, wear.VehicleSd, _ordinarySd, place.Before) : (0, 0);
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

    private void FillRow(in Observable single, Row row, ReadOnlySpan<double> state)
    {
        Array.Clear(row.Jacobian);
        var predicted = single.Tyre < 0 ? FillSteering(single.Kind, state, row.Jacobian) : _now.Fill(single.Kind, single.Tyre, 0, 0, _ordinarySd, row.Jacobian).Predicted;
        var white = 1 / Math.Sqrt(single.Variance);
        row.Residual = (single.Value - predicted) * white;
        for (var k = 0; k < row.Jacobian.Length; k++) row.Jacobian[k] *= white;
    }

    private double FillSteering(ObservableKind kind, ReadOnlySpan<double> state, Span<double> row)
    {
        var map = kind == ObservableKind.SteeringPull ? _model.Torque : _model.WheelAngle;
        double predicted = 0, gained = 0;
        for (var d = 0; d < States; d++)
        {
            var there = map[d] * state[d] * _shareOfPresent;
            predicted += there;
            // The sensor's own zero is not scaled by the steering ratio.
            if (_model.Dimensions[d].Quantity != Facts.Quantity.SensorZeroOrFrontToeSplit) gained += there;
            row[d] = map[d] * _ordinarySd[d];
        }
        if (kind == ObservableKind.SteeringPull)
            row[_now.At(Shared.TorqueGain)] = gained * Math.Sqrt(Sq(Sensitivities.TorqueGainSpread) + Sq(_model.AssistSpread));
        else
            row[_now.At(Shared.Ratio)] = gained * (_model.Figures.Vehicle.SteeringRatio is null ? Sensitivities.RatioSpreadClass : Sensitivities.RatioSpreadKnown);
        return predicted;
    }

    private static double Sq(double x) => x * x;

    /// <summary>Adds a single reading to the system, or takes it off; returns what of its log likelihood needs no solving.</summary>
    private double AddRow(int r, int sign)
    {
        var (row, residual) = (_rows[r].Jacobian, _rows[r].Residual);
        for (var c = 0; c < row.Length; c++)
        {
            if (row[c] == 0) continue;
            var weight = sign * row[c];
            _dataB[c] += weight * residual;
            var into = _data.AsSpan(c * _unknowns, _unknowns);
            for (var e = c; e < row.Length; e++) into[e] += weight * row[e];
        }
        return LogGood - 0.5 * (Math.Log(2 * Math.PI * _single[r].Variance) + residual * residual);
    }

    /// <summary>A place in the unknowns, or taken off: slopes through the two rows of its Jacobian, shared errors as they are.</summary>
    private double AddPlace(Place place, int sign)
    {
        var (size, k, p) = (place.H.Length, place.K, _unknowns);
        var count = 0;
        for (var c = 0; c < _firstSurvey; c++)
            if (place.Before[c] != 0 || place.After[c] != 0) _columns[count++] = c;
        for (var x = 0; x < count; x++)
        {
            var (before, after) = (sign * place.Before[_columns[x]], sign * place.After[_columns[x]]);
            var row = _data.AsSpan(_columns[x] * p, p);
            _dataB[_columns[x]] += before * place.H[0] + after * place.H[1];
            var (kb, ka) = (k[0] * before + k[1] * after, k[1] * before + k[size + 1] * after);
            for (var y = x; y < count; y++) row[_columns[y]] += kb * place.Before[_columns[y]] + ka * place.After[_columns[y]];
            for (var s = 2; s < size; s++) row[_firstSurvey + s - 2] += before * k[s] + after * k[size + s];
        }
        for (var s = 2; s < size; s++)
        {
            _dataB[_firstSurvey + s - 2] += sign * place.H[s];
            var row = _data.AsSpan((_firstSurvey + s - 2) * p + _firstSurvey, size - 2);
            for (var t = s; t < size; t++) row[t - 2] += sign * k[s * size + t];
        }
        return LogGood + place.Log;
    }

    /// <summary>Solves for the unknowns; the columns of dimensions whose latitude differs from the ordinary are scaled to it.</summary>
    private double Solve(ReadOnlySpan<double> priorSd, bool inFull)
    {
        var p = _unknowns;
        var (upper, b) = _equations.Start(_data, _dataB);
        for (var d = 0; d < States; d++)
        {
            if (priorSd[d] == _ordinarySd[d]) continue;
            var factor = priorSd[d] / _ordinarySd[d];
            b[d] *= factor;
            for (var k = 0; k < d; k++) upper[k * p + d] *= factor;
            upper[d * p + d] *= factor;
            for (var k = d; k < p; k++) upper[d * p + k] *= factor;
        }
        for (var j = 0; j < _firstSurvey; j++) upper[j * p + j] += 1;
        for (var s = 0; s < _surveys; s++)
            for (var t = s; t < _surveys; t++) upper[(_firstSurvey + s) * p + _firstSurvey + t] += _sharedPrecision[s * _surveys + t];
        var log = _log - 0.5 * _equations.Factor();
        return log + 0.5 * (inFull ? _equations.Posterior(_mean, _variance) : _equations.Means(_mean));
    }

    private static double LogNormal(double departure, double variance) => -0.5 * (departure * departure / variance + Math.Log(2 * Math.PI * variance));
}
