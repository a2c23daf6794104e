using System.Runtime.CompilerServices;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tread;

/// <summary>How the readings of one position fit the expectation of one position; the same whichever explanation joins the two.</summary>
/// <param name="Known">False until it has been worked out.</param>
/// <param name="Residual">Mean depth less expected, mm.</param>
/// <param name="Variance">Its variance, what all tyres share left aside.</param>
/// <param name="Regular">Log density of all figures but for the exponent of the mean.</param>
/// <param name="Odd">Log density of a tyre off for a reason of its own.</param>
/// <param name="Changed">Log density of another tyre, mostly a new one.</param>
internal readonly record struct PairFit(bool Known, double Residual, double Variance, double Regular, double Odd, double Changed);

/// <summary>Log likelihood of a survey's treads under one explanation, given what history expects at each position.</summary>
internal static class SurveyLikelihood
{
    /// <summary>Share of tyres off for a reason of their own.</summary>
    private const double OddTyrePrior = 0.03;
    /// <summary>Share of axles whose tyres were all changed since without a record: tyres are changed by the axle.</summary>
    private const double AxleChangedPrior = 0.02;
    private const double OddMeanSd = 4, OddEdgeSd = 1.2, OddShoulderSd = 1.2;

    private static readonly (double Regular, double Odd) s_oddTyre = (Math.Log(1 - OddTyrePrior), Math.Log(OddTyrePrior));
    private static readonly (double Regular, double Odd) s_axleChanged = (Math.Log(1 - AxleChangedPrior), Math.Log(AxleChangedPrior));
    private static readonly (double Regular, double Odd) s_changedForNew = (Math.Log(1 - SurveyExplanation.ChangedForNew), Math.Log(SurveyExplanation.ChangedForNew));

    private static PairFit Pair(TreadShape shape, in TyreExpectation e, double factor, double sharedVariance, bool reversed)
    {
        var mean = shape.MeanDepthMm * factor;
        if (reversed) shape = shape with { EdgeMm = -shape.EdgeMm };
        var residual = mean.Value - e.MeanMm.Value;
        var variance = mean.StandardError * mean.StandardError + e.MeanMm.StandardError * e.MeanMm.StandardError;
        var odd = LineBelief.LogDensity(residual, OddMeanSd * OddMeanSd + variance);
        var regular = LineBelief.LogDensity(0, variance + sharedVariance);
        Add(factor, shape.EdgeMm, e.EdgeMm, OddEdgeSd, ref odd, ref regular);
        Add(factor, shape.ShoulderMm, e.ShoulderMm, OddShoulderSd, ref odd, ref regular);
        var changed = odd;
        if (e.NewMm is { } fresh)
        {
            var likeNew = LineBelief.LogDensity(mean.Value - fresh.Value, mean.StandardError * mean.StandardError + fresh.StandardError * fresh.StandardError);
            double unused = 0;
            var flat = new Estimate(0, SurveyExplanation.NewShapeSd);
            Add(factor, shape.EdgeMm, flat, OddEdgeSd, ref unused, ref likeNew);
            Add(factor, shape.ShoulderMm, flat, OddShoulderSd, ref unused, ref likeNew);
            changed = SurveyExplanation.LogMix(s_changedForNew, odd, likeNew);
        }
        return new(true, residual, variance, regular, odd, changed);
    }


    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    public static double Of(
        ExplanationSet.Candidate candidate, ExplanationSet set, ReadOnlySpan<TreadShape?> written, ReadOnlySpan<TyreExpectation> expected, PairFit[] pairs, double technicianSd, bool first)
    {
        var (n, factor) = (written.Length, candidate.Factor);
        int behind = 0, count = 0, figures = 0;
        for (var p = 0; p < n; p++)
        {
            if (written[p] is not { } shape) continue;
            behind = Math.Max(behind, expected[p].Surveys);
            figures += 1 + (shape.EdgeMm is null ? 0 : 1) + (shape.ShoulderMm is null ? 0 : 1);
            count++;
        }
        // The others' technicians err too, so the shared part of a comparison is wider than one technician's.
        var sharedVariance = technicianSd * technicianSd * (1 + 1.0 / Math.Max(1, behind));
        // Of one tyre or two what they share cannot be told from their own.
        var own = count > 2 ? 0 : sharedVariance;
        Span<PairFit> fits = n <= 64 ? stackalloc PairFit[n] : new PairFit[n];
        Span<double> residual = n <= 64 ? stackalloc double[n] : new double[n];
        double precision = 0;
        count = 0;
        for (var p = 0; p < n; p++)
        {
            if (written[p] is not { } shape) continue;
            var q = candidate.Belongs[p];
            ref var kept = ref pairs[p * n + q];
            var plain = factor == 1 && !candidate.Reversed[p];
            if (!kept.Known || !plain) fits[p] = Pair(shape, expected[q], factor, own, candidate.Reversed[p]);
            else fits[p] = kept;
            if (plain) kept = fits[p];
            residual[count++] = fits[p].Residual;
            precision += 1 / fits[p].Variance;
        }
        var shared = Shared(residual[..count], precision, sharedVariance);
        var log = (count > 2 ? -0.5 * shared * shared / sharedVariance : 0) + figures * candidate.LogFactor;
        Span<double> alone = stackalloc double[Position.MaxAxle + 1];
        Span<double> together = stackalloc double[Position.MaxAxle + 1];
        double edges = 0;
        for (var p = 0; p < n; p++)
        {
            if (first) set.Misfit[p] = 0;
            if (written[p] is null) continue;
            var off = fits[p].Residual - shared;
            alone[set.Axle[p]] += SurveyExplanation.LogMix(s_oddTyre, fits[p].Regular - 0.5 * off * off / (fits[p].Variance + own), fits[p].Changed);
            together[set.Axle[p]] += candidate.Explanation.Kind == ExplanationKind.OtherVehicle ? fits[p].Odd : fits[p].Changed;
            if (!first) continue;
            var (edge, shoulder) = (HalfSquare(written[p]!.EdgeMm, expected[p].EdgeMm), HalfSquare(written[p]!.ShoulderMm, expected[p].ShoulderMm));
            set.Misfit[p] = 0.5 * off * off / (fits[p].Variance + own) + edge + shoulder;
            edges += edge - 0.5;
        }
        if (first) set.EdgeMisfit = edges;
        foreach (var axle in set.Axles)
            log += candidate.Explanation.Kind == ExplanationKind.OtherVehicle ? together[axle] : SurveyExplanation.LogMix(s_axleChanged, alone[axle], together[axle]);
        return log;
    }

    private static double HalfSquare(in Estimate? seen, in Estimate e) =>
        seen is { } s ? 0.5 * (s.Value - e.Value) * (s.Value - e.Value) / (s.StandardError * s.StandardError + e.StandardError * e.StandardError) : 0;

    private static void Add(double factor, in Estimate? seen, in Estimate e, double oddSd, ref double odd, ref double regular)
    {
        if (seen is not { } s) return;
        var v = factor * factor * s.StandardError * s.StandardError + e.StandardError * e.StandardError;
        odd += LineBelief.LogDensity(factor * s.Value - e.Value, oddSd * oddSd + v);
        regular += LineBelief.LogDensity(factor * s.Value - e.Value, v);
    }

    /// <summary>What all tyres share: their median residual, shrunk to zero and held within three of its standard deviations.</summary>
    private static double Shared(Span<double> residual, double precision, double sharedVariance)
    {
        if (residual.Length <= 2) return 0;
        var bound = 3 * Math.Sqrt(sharedVariance);
        return Math.Clamp(Selection.Median(residual) * sharedVariance / (sharedVariance + 1.57 / precision), -bound, bound);
    }
}
