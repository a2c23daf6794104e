using MathNet.Numerics.Distributions;

namespace WearWatch.Diagnosis.Causes;

/// <summary>Weighs one story, alone or beside a look-alike, against all evidence of one vehicle. Not safe for concurrent use.</summary>
public sealed class StoryWeigher
{
    /// <summary>Readings of one vehicle that may be wild at once; below these log odds none is worth taking as wild.</summary>
    private const int MostWild = 3;
    private const double WorthTrying = -1.5;

    /// <summary>Log likelihood below the best at which a magnitude no longer matters.</summary>
    private const double FarBelow = 8;

    /// <summary>Three-point Gauss–Hermite rule for the gain common to all edges, in prior SDs (Abramowitz &amp; Stegun 25.10, rescaled).</summary>
    private static readonly (double Node, double LogWeight)[] Gains =
        [(-Math.Sqrt(3), Math.Log(1 / 6.0)), (0, Math.Log(2 / 3.0)), (Math.Sqrt(3), Math.Log(1 / 6.0))];

    private static readonly double LogPriorInside = Math.Log(1 - 2 * Normal.CDF(0, 1, -1 / Sensitivities.InOrderSd));

    private readonly VehicleModel _model;
    private readonly JointGaussian _joint;
    private readonly SingleReadings _single;
    private readonly BenchEvidence _bench;
    private readonly double[] _state, _priorSd, _ordinarySd;
    private readonly List<Branch>[] _inOrder;

    /// <summary>One choice of which readings are wild: log likelihood of the joint law, and the state as single readings see it.</summary>
    private sealed record Branch(double Log, StateSeen Seen, (double Mean, double Sd) LogSlipScale);

    public StoryWeigher(VehicleModel model)
    {
        _model = model;
        _joint = new JointGaussian(model, Observables.Of(model));
        _single = new SingleReadings(model);
        _bench = new BenchEvidence(model);
        _ordinarySd = [.. model.Dimensions.Select(d => d.PriorSd)];
        (_state, _priorSd) = (new double[_ordinarySd.Length], [.. _ordinarySd]);
        _inOrder = [.. Gains.Select(g => Branches(g.Node))];
    }

    /// <summary>Log likelihood of a vehicle with every angle in order and no look-alike worth naming.</summary>
    public double InOrder()
    {
        Place(null, 0, null);
        return At(null, 0, everyGain: true).LogLikelihood;
    }

    /// <summary>Stories over all their magnitudes.</summary>
    /// <param name="stories">What, each with the look-alike there at the same time (or null), whose magnitude is integrated as Gaussian.</param>
    /// <param name="best">Log likelihood known to be reached; what stays far below is weighed at the middle gain only.</param>
    public IReadOnlyList<StoryFit> Weigh(IReadOnlyList<(Story Story, Story? Beside)> stories, double best)
    {
        var fits = stories.Select(s => new StoryFit(s.Story, new double[s.Story.Cells.Count], new (double, double)[s.Story.Cells.Count])).ToArray();
        for (var k = 0; k < fits.Length; k++)
            for (var i = 0; i < fits[k].LogLikelihood.Length; i++)
                best = Math.Max(best, Fill(fits[k], i, stories[k].Beside, everyGain: false));
        for (var k = 0; k < fits.Length; k++)
            for (var i = 0; i < fits[k].LogLikelihood.Length; i++)
                if (fits[k].LogLikelihood[i] > best - FarBelow) Fill(fits[k], i, stories[k].Beside, everyGain: true);
        return fits;
    }

    private double Fill(StoryFit fit, int cell, Story? beside, bool everyGain)
    {
        var magnitude = fit.Story.Cells[cell].Middle;
        Place(fit.Story, magnitude, beside);
        (fit.LogLikelihood[cell], fit.LogSlipScale[cell]) = At(fit.Story, magnitude, everyGain);
        return fit.LogLikelihood[cell];
    }

    private void Place(Story? story, double magnitude, Story? beside)
    {
        Array.Clear(_state);
        _ordinarySd.CopyTo(_priorSd, 0);
        foreach (var (state, weight) in story?.Moves ?? [])
        {
            _state[state] = magnitude * weight;
            // A wheel that shares a split keeps part of its own latitude; a quantity told in full keeps none; a sensor's
            // zero that a bent arm adds to keeps all of it.
            if (story!.IsAngle && _model.Dimensions[state].Tolerance is null) continue;
            _priorSd[state] *= Math.Abs(weight) < 1 ? Math.Sqrt(0.5) : 0;
        }
        foreach (var (state, _) in beside?.Moves ?? []) _priorSd[state] = beside!.Spread;
    }

    /// <summary>Sums over the gain and over which readings are wild.</summary>
    private (double LogLikelihood, (double Mean, double Sd) LogSlipScale) At(Story? story, double magnitude, bool everyGain)
    {
        var ordinary = story is null || story.Moves.Count == 0;
        var (logs, scales) = (new List<double>(), new List<(double Mean, double Sd)>());
        for (var g = everyGain ? 0 : 1; g < (everyGain ? Gains.Length : 2); g++)
            foreach (var branch in ordinary ? _inOrder[g] : Branches(Gains[g].Node))
            {
                logs.Add((everyGain ? Gains[g].LogWeight : 0) + branch.Log + _single.LogLikelihood(story, magnitude, branch.Seen));
                scales.Add(branch.LogSlipScale);
            }
        var total = StoryFit.LogSum(logs);
        double mean = 0, square = 0;
        for (var i = 0; i < logs.Count; i++)
        {
            var share = Math.Exp(logs[i] - total);
            mean += share * scales[i].Mean;
            square += share * (scales[i].Mean * scales[i].Mean + scales[i].Sd * scales[i].Sd);
        }
        return (total + _bench.LogLikelihood(story, _state), (mean, Math.Sqrt(Math.Max(0, square - mean * mean))));
    }

    /// <summary>
    /// Choices of wild readings along the worst ones: taking a reading as wild costs its small prior share, so that no
    /// single figure decides, and takes back what it had made of all other unknowns.
    /// </summary>
    private List<Branch> Branches(double gain)
    {
        var branches = new List<Branch>(1);
        _joint.HoldGain(gain);
        var fit = _joint.At(_state, _priorSd);
        double before = 0;
        for (var wild = 0; ; wild++)
        {
            branches.Add(new Branch(before + fit.LogLikelihood + Inside(fit), See(), _joint.LogSlipScale()));
            if (wild == MostWild || fit.WorstLogOdds < WorthTrying) return branches;
            before += _joint.LogWild(fit.Worst);
            fit = _joint.Without(fit.Worst);
        }
    }

    private StateSeen See()
    {
        var slip = new (double, double)[_model.Positions.Count];
        for (var i = 0; i < slip.Length; i++) slip[i] = _joint.ShapeSlip(i, _priorSd);
        return new StateSeen(slip, _joint.Steering(_model.Torque, _state, _priorSd), _joint.Steering(_model.WheelAngle, _state, _priorSd));
    }

    /// <summary>
    /// The Gaussian stands in for "within tolerance"; what of its posterior lies beyond belongs to another story and is
    /// taken off here, so that a story in order never explains an angle that is out.
    /// </summary>
    private double Inside(JointFit fit)
    {
        double sum = 0;
        for (var d = 0; d < _ordinarySd.Length; d++)
        {
            if (_model.Dimensions[d].Tolerance is not { } tolerance || _state[d] != 0) continue;
            var sd = Math.Sqrt(fit.Variance[d]);
            var bound = tolerance / _priorSd[d];
            var inside = Normal.CDF(0, 1, (bound - fit.Mean[d]) / sd) - Normal.CDF(0, 1, (-bound - fit.Mean[d]) / sd);
            sum += Math.Log(Math.Max(inside, 1e-12)) - LogPriorInside;
        }
        return sum;
    }
}
