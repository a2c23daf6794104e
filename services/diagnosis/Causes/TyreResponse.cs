namespace WearWatch.Diagnosis.Causes;

/// <summary>Unknowns that all figures of a vehicle share, beside its state; each in its prior SDs.</summary>
internal enum Shared { SlipAgainstEdge, CamberEdge, Feather, TorqueGain, Ratio, VehicleRate, RollFront, RollRear, ScrubShare, RouteCrown, Count }

/// <summary>
/// What wears and shapes each tyre at one state, and how that answers to every unknown: predicted figures with their rows
/// of the Jacobian. Not safe for concurrent use.
/// </summary>
internal sealed class TyreResponse
{
    // Slip scale (one over service slip) and edge share, as logarithms, are turned into the sum that moves every edge
    // (Gain, held fixed at each call) and the difference that moves rates against edges (a Gaussian unknown).
    private static readonly double GainSd = Math.Sqrt(Sq(Sensitivities.ServiceSlipSpread) + Sq(Sensitivities.EdgeSpread));
    private static readonly double SlipPerGain = Sq(Sensitivities.ServiceSlipSpread) / GainSd, EdgePerGain = Sq(Sensitivities.EdgeSpread) / GainSd;

    /// <summary>SD of what moves rates against edges, in ln(slip scale).</summary>
    public static readonly double Difference = Sensitivities.ServiceSlipSpread * Sensitivities.EdgeSpread / GainSd;

    private readonly VehicleModel _model;
    private readonly int[][] _support; // states that reach a tyre at all
    private readonly double[] _slip, _duty, _crown, _crownEdge, _camber, _shared;
    private double _edgeScale = 1;

    public TyreResponse(VehicleModel model)
    {
        _model = model;
        var tyres = model.Positions.Count;
        (_slip, _duty, _crown, _camber, _shared) = (new double[tyres], new double[tyres], new double[tyres], new double[tyres], new double[tyres]);
        _support = [.. Enumerable.Range(0, tyres).Select(i => Enumerable.Range(0, model.Dimensions.Count)
            .Where(d => model.Slip[i, d] != 0 || model.Duty[i, d] != 0 || model.Camber[i, d] != 0).ToArray())];
        for (var i = 0; i < tyres; i++) _crown[i] = model.CrownSlip * (model.Positions[i].Side == Facts.Side.Right ? 1 : -1);
        _crownEdge = [.. _crown.Select(c => Observables.EdgeOfSlip(c).Value)];
    }

    /// <summary>Slip over service slip against the class's prior.</summary>
    public double SlipScale { get; private set; } = 1;

    /// <summary>Gain held, in prior SDs.</summary>
    public double Gain { get; private set; }

    /// <summary>Holds the gain common to all edges at so many prior SDs; it scales everything, so that a Gaussian would miss its tails.</summary>
    public void HoldGain(double standardDeviations) =>
        (Gain, SlipScale, _edgeScale) = (standardDeviations, Math.Exp(SlipPerGain * standardDeviations), Math.Exp(EdgePerGain * standardDeviations));

    /// <summary>Looks at a state: departures from target, one per dimension.</summary>
    public void Look(ReadOnlySpan<double> state)
    {
        for (var i = 0; i < _support.Length; i++)
        {
            (_slip[i], _camber[i], _shared[i]) = (0, 0, 0);
            var axle = _model.Positions[i].Axle;
            var turn = _model.Positions[i].Side == Facts.Side.Right ? 1 : -1;
            _duty[i] = _crown[i] + _model.DutyMean * turn * (axle == 1 || _model.IsTrailer ? 1 : 0.7);
            foreach (var d in _support[i])
            {
                if (state[d] == 0) continue;
                var slip = SlipScale * _model.Slip[i, d] * state[d];
                _slip[i] += slip;
                _duty[i] += _model.Duty[i, d] * state[d];
                _camber[i] += _model.Camber[i, d] * state[d];
                if (_model.ShareUncertain[d]) _shared[i] += slip;
            }
        }
    }

    /// <summary>Slip of a tyre that shapes its tread, over RMS service slip: mean, and SD given the posterior of the states.</summary>
    public (double Mean, double Sd) ShapeSlip(int tyre, ReadOnlySpan<double> priorSd, double[] mean, double[] variance)
    {
        var (slip, square) = (_slip[tyre] + _duty[tyre], 0.0);
        foreach (var d in _support[tyre])
        {
            var reach = (SlipScale * _model.Slip[tyre, d] + _model.Duty[tyre, d]) * priorSd[d];
            slip += reach * mean[d];
            square += reach * reach * variance[d];
        }
        return (slip, Math.Sqrt(square));
    }

    /// <summary>Whether a state other than sound changes anything at a tyre.</summary>
    public bool Reached(int tyre, ReadOnlySpan<double> state)
    {
        foreach (var d in _support[tyre])
            if (state[d] != 0) return true;
        return false;
    }

    /// <summary>Predicts a figure and fills its row of the Jacobian.</summary>
    /// <param name="kind">Rate and edge slope as share of the place's normal rate; feather in mm.</param>
    /// <param name="i">Tyre.</param>
    /// <param name="normalEdge">Normal edge slope per unit of wear that the figure still contains.</param>
    /// <param name="vehicleSd">SD of ln(rate) that the whole vehicle shares.</param>
    /// <param name="sd">Prior SD of each dimension.</param>
    /// <param name="row">Cleared and filled; in prior SDs.</param>
    /// <returns>The figure, and the tyre's wear over normal.</returns>
    public (double Predicted, double Wear) Fill(ObservableKind kind, int i, double normalEdge, double vehicleSd, ReadOnlySpan<double> sd, Span<double> row)
    {
        row.Clear();
        var z = _slip[i];
        var shape = z + _duty[i]; // one-way turning shapes the tread but wears no faster than service
        var held = z + _crown[i]; // slip adds to what holds the vehicle on the crown, on one side, and takes from it on the other
        var normal = 1 + _crown[i] * _crown[i];
        var (wear, wearBySlip) = ((1 + held * held) / normal, 2 * held / normal);
        double predicted, bySlip, byCamber = 0, byEdge = 0;
        switch (kind)
        {
            case ObservableKind.Rate:
                (predicted, bySlip) = (wear, wearBySlip);
                row[At(Shared.VehicleRate)] = predicted * vehicleSd;
                break;
            case ObservableKind.EdgeSlope:
                var (edge, slope) = Observables.EdgeOfSlip(shape);
                var camberEdge = Sensitivities.CamberEdgeShare * _camber[i];
                // Beyond normal, and normal is what the crown makes of a sound tyre.
                byEdge = _edgeScale * (edge - _crownEdge[i]) / normal;
                predicted = byEdge + camberEdge + normalEdge * wear;
                (bySlip, byCamber) = (_edgeScale * slope / normal + normalEdge * wearBySlip, Sensitivities.CamberEdgeShare);
                row[At(Shared.VehicleRate)] = predicted * vehicleSd;
                row[At(Shared.CamberEdge)] = camberEdge * Sensitivities.CamberEdgeSpread;
                row[At(_model.Positions[i].Axle == 1 ? Shared.RollFront : Shared.RollRear)] = _model.Class.RollShare;
                break;
            default:
                var tanh = Math.Tanh(shape);
                (predicted, bySlip) = (Sensitivities.FeatherMm * (tanh - Math.Tanh(_crown[i])), Sensitivities.FeatherMm * (1 - tanh * tanh));
                row[At(Shared.Feather)] = predicted * Sensitivities.FeatherSpread;
                break;
        }
        foreach (var d in _support[i])
        {
            var duty = kind == ObservableKind.Rate ? 0 : _model.Duty[i, d];
            row[d] = (bySlip * (SlipScale * _model.Slip[i, d] + duty) + byCamber * _model.Camber[i, d]) * sd[d];
        }
        row[At(Shared.SlipAgainstEdge)] = (bySlip * z - byEdge) * Difference;
        row[At(Shared.ScrubShare)] = bySlip * _shared[i] * Sensitivities.ShareSpread;
        row[At(Shared.RouteCrown)] = bySlip * _crown[i] * Sensitivities.CrownSlipSpread;
        return (predicted, wear);
    }

    public int At(Shared unknown) => _model.Dimensions.Count + (int)unknown;

    private static double Sq(double x) => x * x;
}
