using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>What is believed of a fitting before its readings: mean, edge and shoulder part as lines of distance, mm and mm per km, each about the place asked for.</summary>
internal readonly record struct FittingPrior(Estimate Mean, Estimate MeanSlope, Estimate Edge, Estimate EdgeSlope, Estimate Shoulder, Estimate ShoulderSlope);

/// <summary>
/// Running sums over the points of one fitting. The evidence of any stretch of them, and what all but one of them expect
/// at that one, then cost the same however many points there are.
/// </summary>
internal sealed class FittingEvidence
{
    private readonly FittingPrior _prior;
    private readonly double _origin;
    // Each holds the sums of the points before it; the means twice, without and with what a technician adds.
    private readonly LineSums[] _mean, _meanByHand;
    private readonly LineSums[]? _edge, _shoulder;

    public IReadOnlyList<FittingPoint> Points { get; }

    /// <summary>The start of the fitting is known and stands first among the points.</summary>
    public bool Started { get; }

    public FittingEvidence(IReadOnlyList<FittingPoint> points, FittingPrior prior, double wanderVariance, double technicianVariance)
    {
        (Points, _prior, Started) = (points, prior, points.Count > 0 && points[0].Survey < 0);
        var n = points.Count;
        (_mean, _meanByHand) = (new LineSums[n + 1], new LineSums[n + 1]);
        // Where one depth stands for every tyre there is no shape to follow.
        (_edge, _shoulder) = (points.Any(p => p.Edge is not null) ? new LineSums[n + 1] : null, points.Any(p => p.Shoulder is not null) ? new LineSums[n + 1] : null);
        _origin = n > 0 ? points[0].Km : 0;
        for (var i = 0; i < n; i++)
        {
            var p = points[i];
            var x = p.Km - _origin;
            (_mean[i + 1], _meanByHand[i + 1]) = (_mean[i], _meanByHand[i]);
            var mean = p.Mean.StandardError * p.Mean.StandardError + wanderVariance;
            _mean[i + 1].Add(x, p.Mean.Value, mean / p.Weight);
            _meanByHand[i + 1].Add(x, p.Mean.Value, (mean + technicianVariance) / p.Weight);
            Add(_edge, i, x, p.Edge, p.Weight, wanderVariance);
            Add(_shoulder, i, x, p.Shoulder, p.Weight, wanderVariance);
        }
    }

    /// <summary>Mean, edge and shoulder part at a distance from all points but one (−1 for all).</summary>
    public (Estimate Mean, Estimate Edge, Estimate Shoulder) Expected(double km, int without)
    {
        var x = km - _origin;
        return (Rest(_mean, without).At(x, _prior.Mean, _prior.MeanSlope), Rest(_edge, without).At(x, _prior.Edge, _prior.EdgeSlope), Rest(_shoulder, without).At(x, _prior.Shoulder, _prior.ShoulderSlope));
    }

    /// <summary>Log evidence of the points from one to before another, technicians' errors allowed for.</summary>
    public double Of(int from, int to) => Log(_meanByHand[to] - _meanByHand[from], Between(_edge, from, to), Between(_shoulder, from, to), Points[from].Km, _prior);

    /// <summary>Log evidence of the points from one to before another as those of a tyre put on without a record, mostly a new one.</summary>
    /// <param name="from">First of the points.</param>
    /// <param name="to">The one after the last.</param>
    /// <param name="newMm">Mean depth that a new one would have at the first of them, mm.</param>
    public double OfChanged(int from, int to, in Estimate newMm)
    {
        var fresh = _prior with { Mean = newMm, Edge = new(0, SurveyExplanation.NewShapeSd), Shoulder = new(0, SurveyExplanation.NewShapeSd) };
        var (mean, edge, shoulder) = (_meanByHand[to] - _meanByHand[from], Between(_edge, from, to), Between(_shoulder, from, to));
        return SurveyExplanation.LogMix(s_changedForNew, Log(mean, edge, shoulder, Points[from].Km, _prior), Log(mean, edge, shoulder, Points[from].Km, fresh));
    }

    private static readonly (double, double) s_changedForNew = (Math.Log(1 - SurveyExplanation.ChangedForNew), Math.Log(SurveyExplanation.ChangedForNew));

    /// <summary>Log evidence of all points but one.</summary>
    public double Without(int one) => Log(Rest(_meanByHand, one), Rest(_edge, one), Rest(_shoulder, one), Points[one == 0 ? 1 : 0].Km, _prior);

    private double Log(in LineSums mean, in LineSums edge, in LineSums shoulder, double km, in FittingPrior prior)
    {
        var x = km - _origin;
        return mean.Evidence(x, prior.Mean, prior.MeanSlope) + edge.Evidence(x, prior.Edge, prior.EdgeSlope) + shoulder.Evidence(x, prior.Shoulder, prior.ShoulderSlope);
    }

    private static void Add(LineSums[]? sums, int i, double x, Estimate? part, double weight, double wanderVariance)
    {
        if (sums is null) return;
        sums[i + 1] = sums[i];
        if (part is { } e) sums[i + 1].Add(x, e.Value, (e.StandardError * e.StandardError + wanderVariance) / weight);
    }

    private static LineSums Between(LineSums[]? sums, int from, int to) => sums is null ? default : sums[to] - sums[from];

    private static LineSums Rest(LineSums[]? sums, int without) => sums is null ? default : without < 0 ? sums[^1] : sums[^1] - (sums[without + 1] - sums[without]);
}
