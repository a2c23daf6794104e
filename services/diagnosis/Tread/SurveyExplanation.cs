using System.Runtime.CompilerServices;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tread;

public enum ExplanationKind
{
    AsWritten,
    /// <summary>Left and right exchanged on every axle.</summary>
    SidesSwapped,
    /// <summary>Left and right exchanged on one axle.</summary>
    AxleSidesSwapped,
    /// <summary>Two axles exchanged.</summary>
    AxlesSwapped,
    /// <summary>Counts of 1/32 inch taken for mm.</summary>
    ThirtySecondsTakenForMm,
    /// <summary>mm taken for counts of 1/32 inch.</summary>
    MmTakenForThirtySeconds,
    /// <summary>The survey belongs to another vehicle.</summary>
    OtherVehicle,
    /// <summary>This one is right and the only survey it can be compared with is the wrong one.</summary>
    ComparedSurveyWrong,
    /// <summary>One groove mistyped.</summary>
    GrooveMistyped,
    /// <summary>One tyre misread, or read at another wheel.</summary>
    TyreMisread,
    /// <summary>Two wheels of one side exchanged: the walk began at the wrong corner, or two duals were taken for each other.</summary>
    PositionsExchanged,
    /// <summary>Grooves counted from the inboard side, on the whole vehicle or on one side of it.</summary>
    GroovesReversed,
    /// <summary>One groove measured on a wear bar.</summary>
    ReadOnWearBar,
}

/// <summary>One way to explain a survey.</summary>
public sealed record Explanation(ExplanationKind Kind, int? Axle = null, int? OtherAxle = null, Position? Position = null, int? Groove = null, Position? OtherPosition = null, Side? Side = null)
{
    public static readonly Explanation AsWritten = new(ExplanationKind.AsWritten);

    /// <summary>Factor from the depth as stored to the depth as meant.</summary>
    public double Factor => Kind switch
    {
        ExplanationKind.ThirtySecondsTakenForMm => GaugeNoise.ThirtySecondInchMm,
        ExplanationKind.MmTakenForThirtySeconds => 1 / GaugeNoise.ThirtySecondInchMm,
        _ => 1,
    };

    /// <summary>The position that a reading written at <paramref name="written"/> belongs to; its own inverse.</summary>
    public Position Belongs(Position written) => Kind switch
    {
        ExplanationKind.SidesSwapped => written.Mirrored,
        ExplanationKind.AxleSidesSwapped when written.Axle == Axle => written.Mirrored,
        ExplanationKind.AxlesSwapped when written.Axle == Axle => written with { Axle = OtherAxle!.Value },
        ExplanationKind.AxlesSwapped when written.Axle == OtherAxle => written with { Axle = Axle!.Value },
        ExplanationKind.PositionsExchanged when written == Position => OtherPosition!.Value,
        ExplanationKind.PositionsExchanged when written == OtherPosition => Position!.Value,
        _ => written,
    };

    /// <summary>The grooves of a position were counted from the wrong shoulder.</summary>
    public bool Reverses(Position written) => Kind == ExplanationKind.GroovesReversed && (Side is null || Side == written.Side);

    /// <summary>Something that a workshop can do to the tyres as well as a pen on paper: in walk after walk it was done to the tyres.</summary>
    public bool CanBeDoneToTyres => Kind is ExplanationKind.SidesSwapped or ExplanationKind.AxleSidesSwapped or ExplanationKind.AxlesSwapped or ExplanationKind.PositionsExchanged;

    /// <summary>A plain sentence.</summary>
    public string Sentence => Kind switch
    {
        ExplanationKind.AsWritten => "As written.",
        ExplanationKind.SidesSwapped => "Left and right look exchanged on the whole vehicle.",
        ExplanationKind.AxleSidesSwapped => $"Left and right look exchanged on axle {Axle}.",
        ExplanationKind.AxlesSwapped => $"Axles {Axle} and {OtherAxle} look exchanged.",
        ExplanationKind.ThirtySecondsTakenForMm => "The depths look like 32nds of an inch written as mm.",
        ExplanationKind.MmTakenForThirtySeconds => "The depths look like mm written as 32nds of an inch.",
        ExplanationKind.OtherVehicle => "The depths look like another vehicle's.",
        ExplanationKind.ComparedSurveyWrong => "This survey may be right and the other one wrong.",
        ExplanationKind.GrooveMistyped => $"Groove {Groove} of {Position} looks mistyped.",
        ExplanationKind.PositionsExchanged => $"{Position} and {OtherPosition} look exchanged.",
        ExplanationKind.GroovesReversed => $"The grooves look counted from the inboard side{(Side is { } s ? $" on the {s.ToString().ToLowerInvariant()}" : "")}.",
        ExplanationKind.ReadOnWearBar => $"Groove {Groove} of {Position} looks measured on a wear bar.",
        ExplanationKind.TyreMisread => $"{Position} does not fit its own history in this survey alone.",
        _ => Kind.ToString(),
    };
}

/// <summary>An explanation with its posterior weight, 0 to 1.</summary>
public sealed record WeighedExplanation(Explanation Explanation, double Weight);

/// <summary>What a tyre's own history leads one to expect at a survey, from the other surveys only.</summary>
/// <param name="MeanMm">Mean depth, mm; its error without that of the reading and without technicians' biases.</param>
/// <param name="EdgeMm">See <see cref="TreadShape.EdgeMm"/>.</param>
/// <param name="ShoulderMm">See <see cref="TreadShape.ShoulderMm"/>.</param>
/// <param name="Surveys">How many surveys of this fitting it rests on.</param>
public readonly record struct TyreExpectation(Estimate MeanMm, Estimate EdgeMm, Estimate ShoulderMm, int Surveys)
{
    /// <summary>Mean depth that a tyre would show had it been put on new since the survey before, mm; null where nothing is known of that.</summary>
    public Estimate? NewMm { get; init; }
}

/// <summary>
/// Weighs competing explanations of one survey by their likelihood given the vehicle's own history. Any single tyre may
/// be off for its own reason (misread, changed), so each tyre's density is a mixture; what all tyres share (the
/// technician's hand) is taken out first, shrunk to its prior.
/// </summary>
public static class SurveyExplanation
{
    // Prior shares of surveys, inside the 1-3 % of blunders usual in depots; from memory.
    private const double SidesSwappedPrior = 0.01;
    private const double AxleSidesSwappedPrior = 0.005;
    private const double AxlesSwappedPrior = 0.004;
    private const double PositionsExchangedPrior = 0.004;
    private const double GroovesReversedPrior = 0.002;
    private const double UnitPrior = 0.004;
    /// <summary>
    /// What is left of that prior where the gauge's step says otherwise: mm can only be taken for 32nds where the record
    /// says 32nds, and its depths are then whole steps of those; the other way round just as little. From memory.
    /// </summary>
    private const double AgainstStep = 0.02;
    private const double OtherVehiclePrior = 0.002;
    /// <summary>Share of tyres off for a reason of their own.</summary>
    private const double OddTyrePrior = 0.03;
    /// <summary>Share of axles whose tyres were all changed since without a record: tyres are changed by the axle.</summary>
    private const double AxleChangedPrior = 0.02;
    private const double OddMeanSd = 4, OddEdgeSd = 1.2, OddShoulderSd = 1.2;
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
            weights[i] = candidates[i].LogPriorAt(resolutionMm) + LogLikelihood(candidates[i], set, written, expected, pairs, technicianSdMm, i == 0);
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

    internal static List<(Explanation Explanation, double Prior)> Candidates(Vehicle vehicle, IReadOnlyList<int> axles)
    {
        List<(Explanation, double)> list = [(Explanation.AsWritten, 1 - SidesSwappedPrior - AxleSidesSwappedPrior - AxlesSwappedPrior - PositionsExchangedPrior - GroovesReversedPrior - 2 * UnitPrior - OtherVehiclePrior)];
        list.Add((new(ExplanationKind.SidesSwapped), SidesSwappedPrior));
        if (axles.Count > 1)
            foreach (var axle in axles) list.Add((new(ExplanationKind.AxleSidesSwapped, axle), AxleSidesSwappedPrior / axles.Count));
        var pairs = (from a in axles from b in axles where a < b && vehicle.AxleAt(a)?.Duals == vehicle.AxleAt(b)?.Duals select (a, b)).ToList();
        foreach (var (a, b) in pairs) list.Add((new(ExplanationKind.AxlesSwapped, a, b), AxlesSwappedPrior / pairs.Count));
        list.Add((new(ExplanationKind.ThirtySecondsTakenForMm), UnitPrior));
        list.Add((new(ExplanationKind.MmTakenForThirtySeconds), UnitPrior));
        list.Add((new(ExplanationKind.OtherVehicle), OtherVehiclePrior));
        var wheels = Exchangeable(vehicle, axles);
        foreach (var (a, b) in wheels) list.Add((new(ExplanationKind.PositionsExchanged, Position: a, OtherPosition: b), PositionsExchangedPrior / wheels.Count));
        foreach (Side? side in new Side?[] { null, Side.Left, Side.Right }) list.Add((new(ExplanationKind.GroovesReversed, Side: side), GroovesReversedPrior / 3));
        return list;
    }

    /// <summary>Wheels of one side that one reaches from the same stand on two axles, and the two duals of one end.</summary>
    private static List<(Position, Position)> Exchangeable(Vehicle vehicle, IReadOnlyList<int> axles)
    {
        Position[] read = [.. vehicle.Positions().Where(p => axles.Contains(p.Axle))];
        return [.. from a in read from b in read
                   where a.Side == b.Side && ((a.Axle < b.Axle && a.Dual != Dual.Inner && b.Dual != Dual.Inner) || (a.Axle == b.Axle && a.Dual == Dual.Outer && b.Dual == Dual.Inner))
                   select (a, b)];
    }

    /// <summary>How far a unit's mix-up agrees with the step of the gauge, as a factor on its prior.</summary>
    internal static double StepFactor(ExplanationKind kind, double resolutionMm)
    {
        var steps = resolutionMm / GaugeNoise.ThirtySecondInchMm;
        var thirtySeconds = resolutionMm > 0.15 && Math.Abs(steps - Math.Round(steps * 4) / 4) < 0.01;
        return kind switch
        {
            ExplanationKind.MmTakenForThirtySeconds => thirtySeconds ? 1 : AgainstStep,
            ExplanationKind.ThirtySecondsTakenForMm => thirtySeconds ? AgainstStep : 1,
            _ => 1,
        };
    }

    /// <summary>How the readings of one position fit the expectation of one position; the same whichever explanation joins the two.</summary>
    /// <param name="Known">False until it has been worked out.</param>
    /// <param name="Residual">Mean depth less expected, mm.</param>
    /// <param name="Variance">Its variance, what all tyres share left aside.</param>
    /// <param name="Regular">Log density of all figures but for the exponent of the mean.</param>
    /// <param name="Odd">Log density of a tyre off for a reason of its own.</param>
    /// <param name="Changed">Log density of another tyre, mostly a new one.</param>
    internal readonly record struct PairFit(bool Known, double Residual, double Variance, double Regular, double Odd, double Changed);

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
            var flat = new Estimate(0, NewShapeSd);
            Add(factor, shape.EdgeMm, flat, OddEdgeSd, ref unused, ref likeNew);
            Add(factor, shape.ShoulderMm, flat, OddShoulderSd, ref unused, ref likeNew);
            changed = LogMix(s_changedForNew, odd, likeNew);
        }
        return new(true, residual, variance, regular, odd, changed);
    }

    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    private static double LogLikelihood(
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
            alone[set.Axle[p]] += LogMix(s_oddTyre, fits[p].Regular - 0.5 * off * off / (fits[p].Variance + own), fits[p].Changed);
            together[set.Axle[p]] += candidate.Explanation.Kind == ExplanationKind.OtherVehicle ? fits[p].Odd : fits[p].Changed;
            if (!first) continue;
            var (edge, shoulder) = (HalfSquare(written[p]!.EdgeMm, expected[p].EdgeMm), HalfSquare(written[p]!.ShoulderMm, expected[p].ShoulderMm));
            set.Misfit[p] = 0.5 * off * off / (fits[p].Variance + own) + edge + shoulder;
            edges += edge - 0.5;
        }
        if (first) set.EdgeMisfit = edges;
        foreach (var axle in set.Axles)
            log += candidate.Explanation.Kind == ExplanationKind.OtherVehicle ? together[axle] : LogMix(s_axleChanged, alone[axle], together[axle]);
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

    private static readonly (double Regular, double Odd) s_oddTyre = (Math.Log(1 - OddTyrePrior), Math.Log(OddTyrePrior));
    private static readonly (double Regular, double Odd) s_axleChanged = (Math.Log(1 - AxleChangedPrior), Math.Log(AxleChangedPrior));

    private static readonly (double Regular, double Odd) s_changedForNew = (Math.Log(1 - ChangedForNew), Math.Log(ChangedForNew));

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

/// <summary>The explanations that a survey of certain axles can have, made once and used for every such survey of a vehicle, by one thread.</summary>
internal sealed class ExplanationSet
{
    /// <param name="Explanation">Which.</param>
    /// <param name="LogPrior">ln of its prior share.</param>
    /// <param name="Factor">From the depth as stored to the depth as meant.</param>
    /// <param name="LogFactor">Its logarithm.</param>
    /// <param name="Belongs">Index of the position that a reading written at each position belongs to.</param>
    /// <param name="Reversed">By position: grooves counted from the wrong shoulder.</param>
    public sealed record Candidate(Explanation Explanation, double LogPrior, double Factor, double LogFactor, int[] Belongs, bool[] Reversed)
    {
        /// <summary>ln of the prior share in a survey whose gauge has this step, mm.</summary>
        public double LogPriorAt(double resolutionMm) => Factor == 1 ? LogPrior : LogPrior + Math.Log(SurveyExplanation.StepFactor(Explanation.Kind, resolutionMm));
    }

    /// <summary>Half the χ² of each tyre as written, and of all edges beyond what is usual, of the survey being weighed.</summary>
    public double[] Misfit { get; private init; } = [];
    public double EdgeMisfit { get; set; }

    /// <summary>Whether a rarer exchange could explain more than its prior takes off.</summary>
    public bool WorthWeighing(Candidate candidate, double least) => candidate.Explanation.Kind switch
    {
        ExplanationKind.GroovesReversed => EdgeMisfit > least,
        ExplanationKind.PositionsExchanged => MisfitOfMoved(candidate.Belongs) > least,
        _ => true,
    };

    private double MisfitOfMoved(int[] belongs)
    {
        double sum = 0;
        for (var p = 0; p < belongs.Length; p++)
            if (belongs[p] != p) sum += Misfit[p];
        return sum;
    }

    /// <summary>ln of the prior share of an explanation in a survey of these axles.</summary>
    public double LogPrior(Explanation explanation, double resolutionMm)
    {
        foreach (var candidate in Candidates)
            if (candidate.Explanation == explanation) return candidate.LogPriorAt(resolutionMm);
        return double.NegativeInfinity;
    }

    public required Candidate[] Candidates { get; init; }
    /// <summary>Axle number of each position.</summary>
    public required int[] Axle { get; init; }
    /// <summary>Axles read, ascending.</summary>
    public required int[] Axles { get; init; }

    /// <summary>Room for the fits of each position's readings to each position's expectation; one survey at a time.</summary>
    public required SurveyExplanation.PairFit[] Pairs { get; init; }

    /// <param name="vehicle">The vehicle.</param>
    /// <param name="positions">Its positions in order.</param>
    /// <param name="axles">Axles read, in any order.</param>
    public static ExplanationSet Of(Vehicle vehicle, Position[] positions, IReadOnlyList<int> axles)
    {
        int[] read = [.. axles.Order()];
        return new ExplanationSet
        {
            Axle = [.. positions.Select(p => p.Axle)],
            Axles = read,
            Misfit = new double[positions.Length],
            Pairs = new SurveyExplanation.PairFit[positions.Length * positions.Length],
            Candidates = [.. SurveyExplanation.Candidates(vehicle, read).Select(c => new Candidate(c.Explanation, Math.Log(c.Prior), c.Explanation.Factor, Math.Log(c.Explanation.Factor),
                [.. positions.Select(p => Array.IndexOf(positions, c.Explanation.Belongs(p)))], [.. positions.Select(c.Explanation.Reverses)]))],
        };
    }
}
