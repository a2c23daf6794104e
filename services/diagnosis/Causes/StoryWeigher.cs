using MathNet.Numerics.Distributions;

namespace WearWatch.Diagnosis.Causes;

/// <summary>Weighs one story, alone or beside a look-alike, against all evidence of one vehicle.</summary>
public sealed class StoryWeigher
{
    /// <summary>Readings of one vehicle that may be wild at once; below these log odds none is worth taking as wild.</summary>
    private const int MostWild = 3;
    private const double WorthTrying = -1.5;

    private static readonly double LogPriorInside = Math.Log(1 - 2 * Normal.CDF(0, 1, -1 / Sensitivities.InOrderSd));

    private readonly VehicleModel _model;
    private readonly JointGaussian _joint;
    private readonly SingleReadings _single;
    private readonly BenchEvidence _bench;
    private readonly double[] _state, _priorSd, _ordinarySd;

    public StoryWeigher(VehicleModel model)
    {
        _model = model;
        _joint = new JointGaussian(model, Observables.Of(model));
        _single = new SingleReadings(model);
        _bench = new BenchEvidence(model);
        _ordinarySd = [.. model.Dimensions.Select(d => d.PriorSd)];
        (_state, _priorSd) = (new double[_ordinarySd.Length], new double[_ordinarySd.Length]);
    }

    /// <summary>Log likelihood of a vehicle with every angle in order and no look-alike worth naming.</summary>
    public double InOrder() => At(null, 0, null).LogLikelihood;

    /// <summary>A story over all its magnitudes.</summary>
    /// <param name="story">What.</param>
    /// <param name="beside">A look-alike there at the same time, its magnitude integrated as Gaussian.</param>
    public StoryFit Weigh(Story story, Story? beside = null)
    {
        var logs = new double[story.Cells.Count];
        var service = new (double, double)[story.Cells.Count];
        for (var i = 0; i < logs.Length; i++)
            (logs[i], service[i]) = At(story, story.Cells[i].Middle, beside);
        return new StoryFit(story, logs, service);
    }

    private (double LogLikelihood, (double, double) Service) At(Story? story, double magnitude, Story? beside)
    {
        Array.Clear(_state);
        _ordinarySd.CopyTo(_priorSd, 0);
        foreach (var (state, weight) in story?.Moves ?? [])
        {
            _state[state] = magnitude * weight;
            // A wheel that shares a split keeps part of its own latitude; a quantity told in full keeps none.
            _priorSd[state] *= Math.Abs(weight) < 1 ? Math.Sqrt(0.5) : 0;
        }
        foreach (var (state, _) in beside?.Moves ?? []) _priorSd[state] = beside!.Spread;
        var fit = _joint.At(_state, _priorSd);
        var spread = Sensitivities.ServiceSlipSpread;
        var service = (spread * fit.Mean[_joint.ServiceSlip], spread * Math.Sqrt(fit.Variance[_joint.ServiceSlip]));
        return (Readings(fit, story, magnitude) + _bench.LogLikelihood(story, _state), service);
    }

    /// <summary>
    /// Sum over which readings are wild, along the worst ones: taking a reading as wild costs its small prior share, so
    /// that no single figure decides, and takes back what it had made of all other unknowns.
    /// </summary>
    private double Readings(JointFit fit, Story? story, double magnitude)
    {
        double before = 0, sum = double.NegativeInfinity;
        for (var wild = 0; ; wild++)
        {
            var log = before + fit.LogLikelihood + Inside(fit) + _single.LogLikelihood(story, magnitude, _joint, _state, _priorSd);
            sum = StoryFit.LogSum([sum, log]);
            if (wild == MostWild || fit.WorstLogOdds < WorthTrying) return sum;
            before += _joint.LogWild(fit.Worst);
            fit = _joint.Without(fit.Worst);
        }
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
