using System.Runtime.CompilerServices;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// Most surveys are as they were written, and that shows without weighing every explanation: what another one could gain at most
/// takes sums of squares alone, without the normalising logarithms of <see cref="SurveyExplanation"/>. Only where these bounds leave
/// room are the explanations weighed in full.
/// </summary>
internal static class PlainSurvey
{
    /// <summary>Share by which a tyre, or an axle, that fits an explanation badly may still be let off as odd or changed: the shares of <see cref="SurveyExplanation"/> times the most that its wide densities can be of a narrow one.</summary>
    private const double TyreEscape = 0.01, AxleEscape = 0.002;

    /// <summary>Half a χ² from which exchanges of two wheels are weighed, as in <see cref="SurveyExplanation"/>.</summary>
    private const double WorthWeighing = 4;

    private const double MostOfOthers = (1 - SurveyExplanation.Clear) / SurveyExplanation.Clear;

    /// <summary>True where all explanations but the first together cannot have more than a tenth of the weight.</summary>
    /// <param name="set">The explanations.</param>
    /// <param name="written">Shapes by position; null where not read.</param>
    /// <param name="expected">What history expects, by position.</param>
    /// <param name="technicianSdMm">Standard deviation of what all tyres of a survey share, mm.</param>
    /// <param name="resolutionMm">Step of the gauge, mm.</param>
    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    public static bool Fits(ExplanationSet set, ReadOnlySpan<TreadShape?> written, ReadOnlySpan<TyreExpectation> expected, double technicianSdMm, double resolutionMm)
    {
        var n = written.Length;
        int count = 0, behind = 0, figures = 0;
        double precision = 0, weighed = 0;
        for (var p = 0; p < n; p++)
        {
            if (written[p] is not { } shape) continue;
            behind = Math.Max(behind, expected[p].Surveys);
            var w = 1 / Variance(shape.MeanDepthMm, expected[p].MeanMm);
            precision += w;
            weighed += w * (shape.MeanDepthMm.Value - expected[p].MeanMm.Value);
            figures += 1 + (shape.EdgeMm is null ? 0 : 1) + (shape.ShoulderMm is null ? 0 : 1);
            count++;
        }
        if (count <= 2) return false;
        var sharedVariance = technicianSdMm * technicianSdMm * (1 + 1.0 / Math.Max(1, behind));
        var shared = weighed / (precision + 1 / sharedVariance);
        double first = 0.5 * shared * shared / sharedVariance, shapes = 0, worst = 0, next = 0;
        for (var p = 0; p < n; p++)
        {
            if (written[p] is not { } shape) continue;
            var shapeMisfit = Square(shape.EdgeMm, expected[p].EdgeMm, 1) + Square(shape.ShoulderMm, expected[p].ShoulderMm, 1);
            var misfit = Square(shape.MeanDepthMm, expected[p].MeanMm, 1, shared) + shapeMisfit;
            set.Misfit[p] = misfit;
            first += misfit;
            shapes += shapeMisfit;
            if (misfit > worst) (worst, next) = (misfit, worst);
            else next = Math.Max(next, misfit);
        }
        // Far off as written: there is something to explain.
        if (first - shapes > 2 * count) return false;
        double others = 0;
        for (var c = 1; c < set.Candidates.Length && others < MostOfOthers; c++)
        {
            var candidate = set.Candidates[c];
            var prior = candidate.LogPriorAt(resolutionMm) - set.Candidates[0].LogPrior + first;
            switch (candidate.Explanation.Kind)
            {
                // Without something to gain it is not weighed in full either.
                case ExplanationKind.PositionsExchanged when worst + next <= WorthWeighing || Moved(candidate, set) <= WorthWeighing:
                    break;
                case ExplanationKind.OtherVehicle:
                    // Each tyre may be anything within some mm: against a density of tenths of a mm that is below a tenth each.
                    others += Math.Exp(prior - 2 * count);
                    break;
                default:
                    others += Math.Exp(prior + figures * candidate.LogFactor) * Likeness(candidate, set, written, expected, shared, sharedVariance);
                    break;
            }
        }
        return others < MostOfOthers;
    }

    private static double Moved(ExplanationSet.Candidate candidate, ExplanationSet set)
    {
        double sum = 0;
        for (var p = 0; p < set.Misfit.Length; p++)
            if (candidate.Belongs[p] != p) sum += set.Misfit[p];
        return sum;
    }

    /// <summary>The most that the likelihood under an exchange or another unit can be, as a share of a perfect fit.</summary>
    private static double Likeness(ExplanationSet.Candidate candidate, ExplanationSet set, ReadOnlySpan<TreadShape?> written, ReadOnlySpan<TyreExpectation> expected, double shared, double sharedVariance)
    {
        // An exchange leaves what all share as it was; another unit would move all tyres, as far as a hand's bias can go.
        if (candidate.Factor != 1) shared = Math.CopySign(3 * Math.Sqrt(sharedVariance), candidate.Factor - 1);
        var likeness = candidate.Factor != 1 ? 1 : Math.Exp(-0.5 * shared * shared / sharedVariance);
        foreach (var axle in set.Axles)
        {
            double product = 1;
            for (var p = 0; p < written.Length; p++)
            {
                if (set.Axle[p] != axle || written[p] is not { } shape) continue;
                ref readonly var e = ref expected[candidate.Belongs[p]];
                var x = Square(shape.MeanDepthMm, e.MeanMm, candidate.Factor, shared) + Square(shape.EdgeMm, e.EdgeMm, candidate.Reversed[p] ? -1 : candidate.Factor) + Square(shape.ShoulderMm, e.ShoulderMm, candidate.Factor);
                product *= Math.Exp(-x) + TyreEscape;
            }
            likeness *= Math.Min(1, product) + AxleEscape;
        }
        return likeness;
    }

    private static double Variance(in Estimate a, in Estimate b) => a.StandardError * a.StandardError + b.StandardError * b.StandardError;

    private static double Square(in Estimate seen, in Estimate e, double factor, double shared = 0)
    {
        var off = factor * seen.Value - e.Value - shared;
        return 0.5 * off * off / (factor * factor * seen.StandardError * seen.StandardError + e.StandardError * e.StandardError);
    }

    private static double Square(in Estimate? seen, in Estimate e, double factor) => seen is { } s ? Square(s, e, factor) : 0;
}
