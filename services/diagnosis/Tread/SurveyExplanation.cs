using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Tread;

/// <summary>
/// Weighs competing explanations of one survey by their likelihood given the vehicle's own history. Any single tyre may
/// be off for its own reason (misread, changed), so each tyre's density is a mixture; what all tyres share (the
/// technician's hand) is taken out first, shrunk to its prior.
/// </summary>
public static class SurveyExplanation
{
    /// <summary>Share of changed tyres that are put on new, and how flat a new tread is across, mm; from memory.</summary>
    internal const double ChangedForNew = 0.7;
    internal const double NewShapeSd = 0.3;
    /// <summary>Half a χ² by which two tyres or all edges must miss as written before the rarer exchanges are weighed: below it none could gain its prior.</summary>
    private const double WorthWeighing = 4;

    /// <summary>Weight from which an explanation is acted on.</summary>
    public const double Clear = 0.9;

    /// <summary>Explanations with their weights, the likeliest first; ties fall to the earlier kind.</summary>
    /// <param name="vehicle">The vehicle surveyed.</param>
    /// <param name="written">Shapes at the positions as written, in any order.</param>
    /// <param name="expected">What history expects, for every position of the vehicle.</param>
    /// <param name="technicianSdMm">Standard deviation of what all tyres of a survey share, mm.</param>
    /// <param name="resolutionMm">Step of the gauge as stored, mm.</param>
    public static IReadOnlyList<WeighedExplanation> Weigh(Vehicle vehicle, IReadOnlyList<TreadShape> written, IReadOnlyDictionary<Position, TyreExpectation> expected, double technicianSdMm, double resolutionMm = 0.1)
    {
        var positions = vehicle.Positions().ToArray();
        var shapes = new TreadShape?[positions.Length];
        foreach (var shape in written) shapes[Array.IndexOf(positions, shape.Position)] = shape;
        var set = ExplanationSet.Of(vehicle, positions, [.. written.Select(w => w.Position.Axle).Distinct()]);
        return Weigh(set, shapes, [.. positions.Select(p => expected[p])], technicianSdMm, resolutionMm);
    }

    /// <summary>The same for positions in the vehicle's order; a tyre that was not read is null.</summary>
    internal static WeighedExplanation[] Weigh(ExplanationSet set, ReadOnlySpan<TreadShape?> written, ReadOnlySpan<TyreExpectation> expected, double technicianSdMm, double resolutionMm)
    {
        var candidates = set.Candidates;
        Span<double> weights = stackalloc double[candidates.Length];
        var (pairs, top) = (set.Pairs, double.NegativeInfinity);
        Array.Clear(pairs);
        var count = 0;
        for (var i = 0; i < weights.Length; i++)
        {
            weights[i] = double.NegativeInfinity;
            if (i > 0 && !set.WorthWeighing(candidates[i], WorthWeighing)) continue;
            weights[i] = candidates[i].LogPriorAt(resolutionMm) + SurveyLikelihood.Of(candidates[i], set, written, expected, pairs, technicianSdMm, i == 0);
            top = Math.Max(top, weights[i]);
            count++;
        }
        double total = 0;
        foreach (ref var w in weights) total += w = Math.Exp(w - top);
        // Two surveys that contradict each other accuse one another equally.
        var mutual = weights[0] < 1 && OneSurveyBehind(written, expected);
        var list = new WeighedExplanation[count + (mutual ? 1 : 0)];
        double doubt = 0;
        count = 0;
        for (var i = 0; i < candidates.Length; i++)
        {
            if (i > 0 && !set.WorthWeighing(candidates[i], WorthWeighing)) continue;
            var weight = weights[i] / total;
            if (mutual && i > 0) doubt += weight /= 2;
            list[count++] = new(candidates[i].Explanation, weight);
        }
        if (mutual) list[^1] = new(s_comparedSurveyWrong, doubt);
        Order(list);
        return list;
    }

    private static readonly Explanation s_comparedSurveyWrong = new(ExplanationKind.ComparedSurveyWrong);

    /// <summary>Likeliest first, ties by kind, else as they stand.</summary>
    private static void Order(WeighedExplanation[] list)
    {
        for (var i = 1; i < list.Length; i++)
        {
            var moving = list[i];
            var (weight, kind) = (Math.Round(moving.Weight, 12), moving.Explanation.Kind);
            var j = i;
            for (; j > 0; j--)
            {
                var other = Math.Round(list[j - 1].Weight, 12);
                if (other > weight || (other == weight && list[j - 1].Explanation.Kind <= kind)) break;
                list[j] = list[j - 1];
            }
            list[j] = moving;
        }
    }

    private static bool OneSurveyBehind(ReadOnlySpan<TreadShape?> written, ReadOnlySpan<TyreExpectation> expected)
    {
        for (var p = 0; p < written.Length; p++)
            if (written[p] is not null && expected[p].Surveys > 1) return false;
        return true;
    }

    internal static double LogMix((double Regular, double Odd) logShares, double regular, double odd)
    {
        var (a, b) = (logShares.Regular + regular, logShares.Odd + odd);
        var (top, gap) = a > b ? (a, b - a) : (b, a - b);
        // Below e^-40 the lesser part is beyond the last digit; below 1/500 four terms of the series of ln(1 + x) give twelve of them.
        if (gap < -40) return top;
        var x = Math.Exp(gap);
        return top + (x < 0.002 ? x * (1 - x * (0.5 - x * (1.0 / 3 - x / 4))) : Math.Log(1 + x));
    }
}
