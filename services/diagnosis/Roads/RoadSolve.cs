using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// The fit's numbers on their way: Gauss–Newton on the product of gain and bank, Huber weights (Huber 1964) on every observation
/// and on every vehicle's departure from its class, variances beyond the runs' own errors re-estimated in each step. Each step is
/// solved only as far as the weights deserve; the next one starts where it ended.
/// </summary>
internal sealed class RoadSolve
{
    private const int Lanes = RoadProblem.Lanes;
    private const int MostIterations = 300;
    private const double Settled = 5e-5, Roughly = 2e-2; // of the prior standard deviations
    private const double Fall = 0.03;
    private const int Renewed = 6; // steps a preconditioner serves once the weights hardly change

    private readonly RoadProblem _p;
    private readonly RoadWeighing _weighing;
    private readonly TripSpread _spread;
    private readonly RoadEarlier? _earlier;
    private readonly double[] _scale;
    private readonly double[] _centre;
    private readonly bool[] _held; // by an earlier fit: neither robust nor taken out again

    public RoadSolve(RoadProblem problem, RoadEarlier? earlier = null)
    {
        (_p, _earlier) = (problem, earlier);
        var sides = Enumerable.Range(0, problem.Cells).Select(problem.SideOf).ToArray();
        System = new(problem.Graph, problem.GainOf, problem.Gains.Length, problem.ComponentOfVehicle, problem.CellComponent, problem.Components, sides);
        _spread = new(problem);
        _weighing = new(problem, System, _spread);
        (_scale, _centre, _held) = (new double[System.Size], new double[System.Size], new bool[System.Size]);
        PullSpread = problem.Gains.Select(g => RoadPriors.PullSpread(g.Class)).ToArray();
        OffCentreSpread = problem.Gains.Select(_ => RoadPriors.OffCentreSpread).ToArray();
        Array.Fill(_scale, 1);
        Roads();
        Scale();
        earlier?.Hold(problem, this, _centre, _scale, _held);
        earlier?.TakeOwnGains(problem, this, _centre);
        _centre.CopyTo(System.U, 0);
    }

    public RoadSystem System { get; }
    public double[] PullSpread { get; }
    public double[] OffCentreSpread { get; }
    /// <summary>One standard deviation of the zeros of the bank readings.</summary>
    public double ReadingSpread { get; private set; } = RoadPriors.AccelerometerBias;
    public (double Run, double Trip)[] Noise { get; } = [RoadPriors.Noise(Witness.Torque), RoadPriors.Noise(Witness.Angle), RoadPriors.Noise(Witness.BankReading)];
    public int Iterations { get; private set; }
    public bool Converged { get; private set; }

    /// <summary>Solves until nothing moves by more than 1/20 000 of its prior, hundreds of times less than its error; or roughly, by a fiftieth.</summary>
    public void Run(bool roughly)
    {
        Converged = false;
        for (var iteration = 0; iteration < MostIterations && !Converged; iteration++)
        {
            Weigh();
            System.Prepare(afresh: Iterations < 2 || Iterations == 3 || iteration % Renewed == 0);
            var moved = Spreads();
            var change = System.Step(Fall);
            for (var i = 0; i < change.Length; i++) moved = Math.Max(moved, Math.Abs(change[i]) / _scale[i]);
            Converged = moved < (roughly ? Roughly : Settled) && iteration > 0;
            Iterations++;
        }
    }

    /// <summary>Takes the system as it stands at the solution, for its errors.</summary>
    public void Settle()
    {
        Weigh();
        System.Prepare();
    }

    /// <summary>
    /// A vehicle's figure as the others leave it: its own pull towards the class is taken out again, so that it is not shrunk, while
    /// the class still holds the level that all share. What an earlier fit found stays in.
    /// </summary>
    /// <returns>Null where the vehicle's own runs say nothing.</returns>
    public Estimate? Unshrunk(int vehicle, Witness witness, double variance)
    {
        var unknown = Lanes * vehicle + (int)witness;
        if (!_p.Present[unknown]) return null;
        if (_held[unknown]) return new(System.U[unknown], Math.Sqrt(variance));
        var own = System.PriorWeight[unknown];
        var left = 1 / variance - own;
        return left > 1e-6 * own ? new(System.U[unknown] / variance / left, Math.Sqrt(1 / left)) : null;
    }

    /// <summary>Whether an earlier fit holds the figure.</summary>
    public bool Held(int vehicle, Witness witness) => _held[Lanes * vehicle + (int)witness];

    /// <summary>Spread of a class: the median size of its vehicles' figures less their errors, drawn to the prior by four vehicles' worth.</summary>
    public void UpdateSpreads(double[] variance)
    {
        for (var g = 0; g < _p.Gains.Length; g++)
        {
            PullSpread[g] = Spread(Witness.Torque, v => _p.GainOf[v] == g && !_p.Vehicles[v].FoundInOrder, variance, RoadPriors.PullSpread(_p.Gains[g].Class));
            OffCentreSpread[g] = Spread(Witness.Angle, v => _p.GainOf[v] == g && !_p.Vehicles[v].FoundInOrder, variance, RoadPriors.OffCentreSpread);
        }
        ReadingSpread = Spread(Witness.BankReading, v => _p.Vehicles[v].SameAs is null, variance, RoadPriors.AccelerometerBias);
        Scale();
    }

    private double Spread(Witness witness, Func<int, bool> counts, double[] variance, double prior)
    {
        var figures = new List<Estimate>();
        for (var v = 0; v < _p.Vehicles.Length; v++)
            if (counts(v) && Unshrunk(v, witness, variance[Lanes * v + (int)witness]) is { } figure) figures.Add(figure);
        if (figures.Count == 0) return prior;
        var size = 1.4826 * RobustMean.Median(figures.Select(e => Math.Abs(e.Value)).Order().ToArray());
        var error = RobustMean.Median(figures.Select(e => e.StandardError).Order().ToArray());
        var found = Math.Max(0, size * size - error * error);
        return Math.Sqrt((RoadPriors.PriorCount * prior * prior + figures.Count * found) / (RoadPriors.PriorCount + figures.Count));
    }

    /// <summary>Every cell starts at the usual crown of its side and is drawn to its component's level.</summary>
    private void Roads()
    {
        for (var c = 0; c < _p.Cells; c++)
        {
            System.Bank[c] = RoadPriors.SignedCrown((TrafficSide)System.CellSide[c]);
            System.Priors[c] = new(0, 1 / (RoadPriors.CellWidth * RoadPriors.CellWidth), OnLevel: true);
        }
    }

    /// <summary>Prior mean and standard deviation of each unknown; change is measured by the latter too.</summary>
    private void Scale()
    {
        for (var v = 0; v < _p.Vehicles.Length; v++)
        {
            var (g, anchored) = (_p.GainOf[v], _p.Vehicles[v].FoundInOrder);
            _scale[Lanes * v] = anchored ? RoadPriors.AnchoredPull : PullSpread[g];
            _scale[Lanes * v + 1] = anchored ? RoadPriors.AnchoredOffCentre : OffCentreSpread[g];
            _scale[Lanes * v + 2] = ReadingSpread;
        }
        for (var k = 0; k < _p.Components; k++) _scale[System.LevelAt + k] = RoadPriors.LevelError(_p.VehiclesOf[k]);
        for (var g = 0; g < _p.Gains.Length; g++)
        {
            var at = System.GainAt + Lanes * g;
            (_centre[at], _centre[at + 1]) = (RoadPriors.TorqueGain(_p.Gains[g].Class, _p.Gains[g].Torque), RoadPriors.AngleGain(_p.Gains[g].Class));
            (_scale[at], _scale[at + 1]) = (RoadPriors.GainSpread * _centre[at], RoadPriors.GainSpread * _centre[at + 1]);
        }
        for (var side = 0; side < 2; side++)
            (_centre[System.CrownAt + side], _scale[System.CrownAt + side]) = (RoadPriors.SignedCrown((TrafficSide)side), RoadPriors.CrownError);
    }

    /// <summary>Observations and priors weighed about the present values; the first time all alike, being far from any answer.</summary>
    private void Weigh()
    {
        for (var g = 0; g < _p.Gains.Length; g++)
        {
            var at = System.GainAt + Lanes * g;
            (System.Gain[Lanes * g], System.Gain[Lanes * g + 1], System.Gain[Lanes * g + 2]) = (System.U[at], System.U[at + 1], 1 + SteeringEquations.RollGain);
        }
        Array.Clear(System.Force);
        _weighing.Pass(Noise, robust: Iterations > 0 || _earlier is not null);
        for (var i = 0; i < System.Size; i++)
        {
            var away = (_centre[i] - System.U[i]) / _scale[i];
            var robust = i < System.LevelAt && i % Lanes < 2 && !_held[i];
            System.PriorWeight[i] = (robust ? Math.Min(1, RobustMean.HuberK / Math.Abs(away)) : 1) / (_scale[i] * _scale[i]);
            System.Force[i] += System.PriorWeight[i] * (_centre[i] - System.U[i]);
        }
    }

    /// <summary>Spreads for the next step from this step's residuals.</summary>
    /// <returns>Largest relative change.</returns>
    private double Spreads()
    {
        if (Iterations == 0 || _earlier is not null) return 0;
        var moved = 0.0;
        for (var w = 0; w < Noise.Length; w++)
        {
            var next = _spread.Of((Witness)w, _weighing.Within[w], _weighing.Between[w], System.Taken[w]);
            // A trip's spread counts only as far as it adds to the run's.
            moved = Math.Max(moved, (Math.Abs(next.Run - Noise[w].Run) + Math.Abs(next.Trip - Noise[w].Trip)) / (Noise[w].Run + Noise[w].Trip));
            Noise[w] = next;
        }
        return moved;
    }
}
