using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// The fit's numbers on their way: Gauss–Newton on the product of gain and bank, Huber weights (Huber 1964) on every observation
/// and on every vehicle's departure from its class, variances beyond the runs' own errors re-estimated in each step.
/// </summary>
internal sealed class RoadSolve
{
    private const int MostIterations = 300;
    private const double Settled = 1e-7;

    private readonly RoadProblem _p;
    private readonly double[] _weight;
    private readonly double[] _prior;
    private readonly double[] _scale;
    private readonly double[] _centre;
    private readonly int[] _byCell;
    private CellSystem _system;

    public RoadSolve(RoadProblem problem)
    {
        _p = problem;
        U = new double[problem.Unknowns];
        Bank = problem.CellList.Select(c => RoadPriors.SignedCrown((TrafficSide)c.Side)).ToArray();
        _weight = Enumerable.Repeat(1.0, problem.Observations.Count).ToArray();
        _prior = Enumerable.Repeat(1.0, problem.Unknowns).ToArray();
        _scale = Enumerable.Repeat(1.0, problem.Unknowns).ToArray();
        PullSpread = problem.Gains.Select(g => RoadPriors.PullSpread(g.Class)).ToArray();
        OffCentreSpread = problem.Gains.Select(_ => RoadPriors.OffCentreSpread).ToArray();
        Start();
        _centre = Enumerable.Range(0, problem.Unknowns).Select(Centre).ToArray();
        _byCell = Enumerable.Range(0, problem.Observations.Count).OrderBy(k => problem.Observations[k].Cell).ToArray();
        _system = new(0, 0, []);
    }

    public double[] U { get; private set; }
    public double[] Bank { get; private set; }
    public double[] PullSpread { get; }
    public double[] OffCentreSpread { get; }
    public (double Run, double Trip)[] Noise { get; } = [RoadPriors.Noise(Witness.Torque), RoadPriors.Noise(Witness.Angle), RoadPriors.Noise(Witness.BankReading)];
    public int Iterations { get; private set; }
    public bool Converged { get; private set; }

    public double[] Variances() => _system.GlobalVariances();
    public double[] BankVariances() => _system.CellVariances();

    /// <summary>Variance an observation is weighed by: its own, the run's, and the trip's times the trip's runs, so that a trip never counts for more than one draw of its own spread.</summary>
    public double VarianceOf(in Observation o)
    {
        var (run, trip) = Noise[(int)o.Witness];
        return o.Variance + run * run + _p.SizeOfTrip[o.Trip] * trip * trip;
    }

    /// <summary>One standard deviation of a single observation about the vehicle and its road.</summary>
    public double SpreadOf(in Observation o)
    {
        var (run, trip) = Noise[(int)o.Witness];
        return Math.Sqrt(o.Variance + run * run + trip * trip);
    }

    public double WeightOf(int observation) => _weight[observation] / VarianceOf(_p.Observations[observation]);

    public void Run()
    {
        Converged = false;
        for (var iteration = 0; iteration < MostIterations && !Converged; iteration++, Iterations++)
        {
            if (Iterations > 0) Reweigh();
            _system = new(_p.Unknowns, Bank.Length, Rows());
            var next = _system.Solve(U);
            var change = 0.0;
            for (var i = 0; i < next.Length; i++) change = Math.Max(change, Math.Abs(next[i] - U[i]) / _scale[i]);
            (U, Bank) = (next, _system.Cells(next));
            Converged = change < Settled && iteration > 0;
        }
    }

    /// <summary>
    /// A vehicle's figure as the others leave it: its own pull towards the class is taken out again, so that it is not shrunk, while
    /// the class still holds the level that all share.
    /// </summary>
    /// <returns>Null where the vehicle's own runs say nothing.</returns>
    public Estimate? Unshrunk(int unknown, double variance)
    {
        if (unknown < 0) return null;
        var own = _prior[unknown] / (_scale[unknown] * _scale[unknown]);
        var left = 1 / variance - own;
        return left > 1e-6 * own ? new(U[unknown] / variance / left, Math.Sqrt(1 / left)) : null;
    }

    /// <summary>Spread of a class: the median size of its vehicles' figures less their errors, drawn to the prior by four vehicles' worth.</summary>
    public void UpdateSpreads()
    {
        var variance = Variances();
        for (var g = 0; g < _p.Gains.Length; g++)
        {
            PullSpread[g] = Spread(_p.Pull, g, variance, RoadPriors.PullSpread(_p.Gains[g].Class));
            OffCentreSpread[g] = Spread(_p.OffCentre, g, variance, RoadPriors.OffCentreSpread);
        }
        Scale();
    }

    private double Spread(int[] unknowns, int gain, double[] variance, double prior)
    {
        var figures = Enumerable.Range(0, unknowns.Length)
            .Where(v => unknowns[v] >= 0 && !_p.Vehicles[v].FoundInOrder && _p.GainOf(_p.Vehicles[v]) == gain)
            .Select(v => Unshrunk(unknowns[v], variance[unknowns[v]])).OfType<Estimate>().ToArray();
        if (figures.Length == 0) return prior;
        var size = 1.4826 * RobustMean.Median(figures.Select(e => Math.Abs(e.Value)).Order().ToArray());
        var error = RobustMean.Median(figures.Select(e => e.StandardError).Order().ToArray());
        var found = Math.Max(0, size * size - error * error);
        return Math.Sqrt((RoadPriors.PriorCount * prior * prior + figures.Length * found) / (RoadPriors.PriorCount + figures.Length));
    }

    private void Start()
    {
        for (var g = 0; g < _p.Gains.Length; g++)
        {
            if (_p.TorqueGain[g] >= 0) U[_p.TorqueGain[g]] = RoadPriors.TorqueGain(_p.Gains[g].Class, _p.Gains[g].Torque);
            if (_p.AngleGain[g] >= 0) U[_p.AngleGain[g]] = RoadPriors.AngleGain(_p.Gains[g].Class);
        }
        for (var s = 0; s < 2; s++) if (_p.Crown[s] >= 0) U[_p.Crown[s]] = RoadPriors.SignedCrown((TrafficSide)s);
        Scale();
    }

    /// <summary>Prior standard deviation of each unknown, by which change is measured too.</summary>
    private void Scale()
    {
        for (var v = 0; v < _p.Vehicles.Length; v++)
        {
            var (g, anchored) = (_p.GainOf(_p.Vehicles[v]), _p.Vehicles[v].FoundInOrder);
            if (_p.Pull[v] >= 0) _scale[_p.Pull[v]] = anchored ? RoadPriors.AnchoredPull : PullSpread[g];
            if (_p.OffCentre[v] >= 0) _scale[_p.OffCentre[v]] = anchored ? RoadPriors.AnchoredOffCentre : OffCentreSpread[g];
            if (_p.Bias[v] >= 0) _scale[_p.Bias[v]] = RoadPriors.AccelerometerBias;
        }
        for (var g = 0; g < _p.Gains.Length; g++)
        {
            if (_p.TorqueGain[g] >= 0) _scale[_p.TorqueGain[g]] = RoadPriors.GainSpread * RoadPriors.TorqueGain(_p.Gains[g].Class, _p.Gains[g].Torque);
            if (_p.AngleGain[g] >= 0) _scale[_p.AngleGain[g]] = RoadPriors.GainSpread * RoadPriors.AngleGain(_p.Gains[g].Class);
        }
        foreach (var c in _p.Crown) if (c >= 0) _scale[c] = RoadPriors.CrownError;
        foreach (var c in _p.Component) if (c >= 0) _scale[c] = RoadPriors.NetworkError;
    }

    /// <summary>Priors of the unknowns first, then each cell's prior followed by its observations.</summary>
    private CellRow[] Rows()
    {
        var rows = new CellRow[_p.Unknowns + Bank.Length + _p.Observations.Count];
        var at = 0;
        for (var i = 0; i < _p.Unknowns; i++) rows[at++] = new(-1, 0, i, 1, -1, 0, -1, 0, _centre[i], _prior[i] / (_scale[i] * _scale[i]));
        var next = 0;
        for (var c = 0; c < Bank.Length; c++)
        {
            var (side, vehicle, _) = _p.CellList[c];
            rows[at++] = new(c, 1, _p.Crown[side], -1, _p.Component[_p.ComponentOfVehicle[vehicle]], -1, -1, 0, 0, 1 / (RoadPriors.CellWidth * RoadPriors.CellWidth));
            for (; next < _byCell.Length && _p.Observations[_byCell[next]].Cell == c; next++)
                rows[at++] = Row(_p.Observations[_byCell[next]], WeightOf(_byCell[next]));
        }
        return rows;
    }

    private double Centre(int unknown)
    {
        for (var s = 0; s < 2; s++) if (_p.Crown[s] == unknown) return RoadPriors.SignedCrown((TrafficSide)s);
        for (var g = 0; g < _p.Gains.Length; g++)
        {
            if (_p.TorqueGain[g] == unknown) return RoadPriors.TorqueGain(_p.Gains[g].Class, _p.Gains[g].Torque);
            if (_p.AngleGain[g] == unknown) return RoadPriors.AngleGain(_p.Gains[g].Class);
        }
        return 0;
    }

    /// <summary>The observation, the product gain × bank taken linear about the present values.</summary>
    private CellRow Row(in Observation o, double weight)
    {
        if (o.Witness == Witness.BankReading)
            return new(o.Cell, 1 + SteeringEquations.RollGain, _p.Bias[o.Vehicle], 1, -1, 0, -1, 0, o.Value, weight);
        var (own, gain) = o.Witness == Witness.Torque ? (_p.Pull[o.Vehicle], _p.TorqueGain[o.Gain]) : (_p.OffCentre[o.Vehicle], _p.AngleGain[o.Gain]);
        var (g, b) = (U[gain], Bank[o.Cell]);
        return new(o.Cell, g, own, 1, gain, b, -1, 0, o.Value + g * b, weight);
    }

    private double Residual(in Observation o) => o.Witness switch
    {
        Witness.BankReading => o.Value - U[_p.Bias[o.Vehicle]] - (1 + SteeringEquations.RollGain) * Bank[o.Cell],
        Witness.Torque => o.Value - U[_p.Pull[o.Vehicle]] - U[_p.TorqueGain[o.Gain]] * Bank[o.Cell],
        _ => o.Value - U[_p.OffCentre[o.Vehicle]] - U[_p.AngleGain[o.Gain]] * Bank[o.Cell],
    };

    private void Reweigh()
    {
        var residuals = new double[_p.Observations.Count];
        for (var k = 0; k < residuals.Length; k++) residuals[k] = Residual(_p.Observations[k]);
        (double, double)[] noise = [.. Enum.GetValues<Witness>().Select(w => TripSpread.Of(w, _p, residuals, this))];
        noise.CopyTo(Noise, 0);
        for (var k = 0; k < residuals.Length; k++)
        {
            _weight[k] = Huber(residuals[k] / SpreadOf(_p.Observations[k]));
        }
        for (var v = 0; v < _p.Vehicles.Length; v++)
        {
            if (_p.Pull[v] is var i and >= 0) _prior[i] = Huber(U[i] / _scale[i]);
            if (_p.OffCentre[v] is var j and >= 0) _prior[j] = Huber(U[j] / _scale[j]);
        }
    }

    private static double Huber(double standardised) => Math.Min(1, RobustMean.HuberK / Math.Max(Math.Abs(standardised), 1e-12));
}
