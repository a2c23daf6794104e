using System.Globalization;
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
    private const double WorthWeighing = 0.02, PairWorthWeighing = 0.003;

    /// <summary>Share of posterior below which a cell is left out of what the money needs.</summary>
    private const double LeastEffect = 1e-4;

    /// <summary>Probabilities between which it is worth asking each witness alone, and those at which one says yes and the other no.</summary>
    private const double Open = 0.12, Settled = 0.88, SaysYes = 0.5, SaysNo = 0.12;

    public static Verdict Judge(VehicleFigures figures, FaultPriors priors)
    {
        var model = new VehicleModel(figures);
        var mixture = Weigh(model, priors);
        var causes = Causes(mixture, figures.AsOf);
        var alone = mixture.Misaligned is > Open and < Settled ? EachAlone(figures, priors) : null;
        return new Verdict
        {
            MisalignedProbability = mixture.Misaligned,
            Causes = causes,
            Odds = OddsWords.Of(causes, mixture.Misaligned),
            ByWitness = alone,
            CannotTell = [.. Disagreement(alone), .. CannotTellWords.Of(model, mixture.Misaligned)],
            Effects = Effects(model, mixture),
        };
    }

    /// <summary>What the tread says without the steering, and the steering without the tread.</summary>
    private static (double Tread, double Steering)? EachAlone(VehicleFigures figures, FaultPriors priors)
    {
        if (figures.Steering is not { } steering || (steering.SteeringPullNm is null && steering.OffCentreDeg is null) || figures.Tyres.All(t => t.LogRateRatio is null && t.EdgeSlopeMmPer1000Km is null)) return null;
        return (Weigh(new(figures with { Steering = null, DriverReports = [] }), priors).Misaligned, Weigh(new(figures with { Tyres = [], Wear = null }), priors).Misaligned);
    }

    private static IEnumerable<CannotTell> Disagreement((double Tread, double Steering)? alone)
    {
        if (alone is not { } said) yield break;
        if (said is { Tread: >= SaysYes, Steering: <= SaysNo })
            yield return new("Which witness is right", $"the tread says out of alignment with {Share(said.Tread)}, the steering with {Share(said.Steering)}", "another tread survey with hand rubs, taken by someone else");
        if (said is { Tread: <= SaysNo, Steering: >= SaysYes })
            yield return new("Which witness is right", $"the steering says out of alignment with {Share(said.Steering)}, the tread with {Share(said.Tread)}", "the front tyres swapped left to right, and pressures checked: what follows the tyres is no angle");

        static string Share(double p) => p.ToString("0.00", CultureInfo.InvariantCulture);
    }

    private static Mixture Weigh(VehicleModel model, FaultPriors priors)
    {
        var weigher = new StoryWeigher(model);
        var stories = Stories.Of(model, priors);
        var inOrder = weigher.InOrder();
        StoryFit[] alone = [.. stories.Select(s => weigher.Weigh(s))];
        var angles = alone.Where(f => f.Story.IsAngle).ToArray();
        var looks = alone.Where(f => !f.Story.IsAngle).ToArray();
        var mixture = new Mixture(angles, looks, inOrder, priors.MisalignedShare);
        WeighPairs(weigher, mixture);
        return mixture;
    }

    private static void WeighPairs(StoryWeigher weigher, Mixture mixture)
    {
        var likely = Enumerable.Range(0, mixture.Angles.Count).Where(a => mixture.AngleShare(a) >= WorthWeighing)
            .OrderByDescending(mixture.AngleShare).Take(WeighedJointly).ToArray();
        var moving = Enumerable.Range(0, mixture.Looks.Count).Where(l => mixture.Looks[l].Story.Moves.Count > 0).ToArray();
        (int Angle, int Look)[] pairs = [.. likely.SelectMany(a => moving.Where(l => mixture.PairShare(a, l) >= PairWorthWeighing).Select(l => (a, l)))];
        foreach (var (angle, look) in pairs) mixture.Refine(angle, look, weigher.Weigh(mixture.Angles[angle].Story, mixture.Looks[look].Story));
    }

    private static IReadOnlyList<Cause> Causes(Mixture mixture, DateOnly asOf) =>
    [
        .. Enumerable.Range(0, mixture.Angles.Count)
            .GroupBy(a => (mixture.Angles[a].Story.Quantity, mixture.Angles[a].Story.Axle, mixture.Angles[a].Story.Side))
            .Select(ways => Named(mixture.Angles[ways.First()].Story, ways.Sum(mixture.AngleShare), Together(mixture, [.. ways])) with { Since = Began(mixture, [.. ways], asOf) })
            .Concat(Enumerable.Range(0, mixture.Looks.Count).Select(l => Named(mixture.Looks[l].Story, mixture.LookShare(l), mixture.Looks[l].CellShares())))
            .OrderByDescending(c => c.Probability),
    ];

    /// <summary>Shares of the magnitude's cells over all ways in which the same angle came about.</summary>
    private static double[] Together(Mixture mixture, int[] ways)
    {
        var cells = new double[mixture.Angles[ways[0]].Story.Cells.Count];
        foreach (var a in ways)
        {
            var (share, own) = (Math.Max(mixture.AngleShare(a), 1e-12), mixture.AngleCells(a));
            for (var i = 0; i < cells.Length; i++) cells[i] += share * own[i];
        }
        return cells;
    }

    /// <summary>Since when, over all ways in which the same angle came about.</summary>
    private static Since? Began(Mixture mixture, int[] ways, DateOnly asOf)
    {
        var onsets = new double[mixture.Angles[ways[0]].ByOnset.Length];
        if (onsets.Length == 1) return null;
        foreach (var a in ways)
        {
            var (share, own) = (Math.Max(mixture.AngleShare(a), 1e-12), mixture.AngleOnsets(a));
            for (var o = 0; o < onsets.Length; o++) onsets[o] += share * own[o];
        }
        return Since.Of(asOf, onsets);
    }

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
                    effects.Add(StoryEffect.Of(model, fit.Story, fit.Story.Cells[i].Middle, share * cells[i], fit.LogSlipScale[i]));
        }
        return effects;
    }
}
