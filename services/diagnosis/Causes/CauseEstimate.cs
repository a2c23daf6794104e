using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Causes;

/// <summary>
/// The joint cause estimate: explicit stories (in order, one angle out, a look-alike, an angle and a look-alike),
/// each weighed against both witnesses at once; posterior shares of the stories are the verdict.
/// </summary>
public static class CauseEstimate
{
    /// <summary>Angle stories that are weighed jointly with each look-alike; the rest are combined by a bound.</summary>
    private const int WeighedJointly = 3;

    /// <summary>Share of posterior below which a cell is left out of what the money needs.</summary>
    private const double LeastEffect = 1e-4;

    public static Verdict Judge(VehicleFigures figures, FaultPriors priors)
    {
        var model = new VehicleModel(figures);
        var weigher = new StoryWeigher(model);
        var stories = Stories.Of(model, priors);
        var angles = stories.Where(s => s.IsAngle).Select(s => weigher.Weigh(s)).ToArray();
        var looks = stories.Where(s => !s.IsAngle).Select(s => weigher.Weigh(s)).ToArray();
        var mixture = new Mixture(angles, looks, weigher.InOrder(), priors.MisalignedShare);
        foreach (var angle in Enumerable.Range(0, angles.Length).OrderByDescending(a => mixture.AngleShare(a)).Take(WeighedJointly).ToArray())
            for (var look = 0; look < looks.Length; look++)
                if (looks[look].Story.Moves.Count > 0) mixture.Refine(angle, look, weigher.Weigh(angles[angle].Story, looks[look].Story));
        return new Verdict
        {
            MisalignedProbability = mixture.Misaligned,
            Causes = Causes(mixture),
            CannotTell = CannotTellWords.Of(model, mixture.Misaligned),
            Effects = Effects(model, mixture),
        };
    }

    private static IReadOnlyList<Cause> Causes(Mixture mixture) =>
    [
        .. Enumerable.Range(0, mixture.Angles.Count).Select(a => Named(mixture.Angles[a].Story, mixture.AngleShare(a), mixture.AngleCells(a)))
            .Concat(Enumerable.Range(0, mixture.Looks.Count).Select(l => Named(mixture.Looks[l].Story, mixture.LookShare(l), mixture.Looks[l].CellShares())))
            .OrderByDescending(c => c.Probability),
    ];

    private static Cause Named(Story story, double probability, double[] shares)
    {
        double Quantile(double p)
        {
            var total = shares.Sum();
            double before = 0;
            for (var i = 0; i < shares.Length; i++)
            {
                var share = shares[i] / total;
                if (before + share >= p && share > 0) return story.Cells[i].Low + (p - before) / share * (story.Cells[i].High - story.Cells[i].Low);
                before += share;
            }
            return story.Cells[^1].High;
        }
        var mean = story.Cells.Select((c, i) => c.Middle * shares[i]).Sum() / shares.Sum();
        return new Cause(story.Quantity, story.Axle, story.Side, new Interval(story.Target + mean, story.Target + Quantile(0.05), story.Target + Quantile(0.95)),
            story.IsAngle, probability, story.Tolerance);
    }

    private static List<StoryEffect> Effects(VehicleModel model, Mixture mixture)
    {
        var effects = new List<StoryEffect>();
        for (var a = 0; a < mixture.Angles.Count; a++)
        {
            var (fit, share, cells) = (mixture.Angles[a], mixture.AngleShare(a), mixture.AngleCells(a));
            for (var i = 0; i < cells.Length; i++)
                if (share * cells[i] >= LeastEffect)
                    effects.Add(StoryEffect.Of(model, fit.Story, fit.Story.Cells[i].Middle, share * cells[i], fit.LogServiceSlip[i]));
        }
        return effects;
    }
}
