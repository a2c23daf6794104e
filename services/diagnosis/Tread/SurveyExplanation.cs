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
}

/// <summary>One way to explain a survey.</summary>
public sealed record Explanation(ExplanationKind Kind, int? Axle = null, int? OtherAxle = null, Position? Position = null, int? Groove = null)
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
        _ => written,
    };

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
public readonly record struct TyreExpectation(Estimate MeanMm, Estimate EdgeMm, Estimate ShoulderMm, int Surveys);

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
    private const double UnitPrior = 0.004;
    private const double OtherVehiclePrior = 0.002;
    /// <summary>Share of tyres off for a reason of their own.</summary>
    private const double OddTyrePrior = 0.03;
    /// <summary>Share of axles whose tyres were all changed since without a record: tyres are changed by the axle.</summary>
    private const double AxleChangedPrior = 0.02;
    private const double OddMeanSd = 4, OddEdgeSd = 1.2, OddShoulderSd = 1.2;

    /// <summary>Weight from which an explanation is acted on.</summary>
    public const double Clear = 0.9;

    /// <summary>Explanations with their weights, the likeliest first; ties fall to the earlier kind.</summary>
    /// <param name="vehicle">The vehicle surveyed.</param>
    /// <param name="written">Shapes at the positions as written, in any order.</param>
    /// <param name="expected">What history expects, for every position of the vehicle.</param>
    /// <param name="technicianSdMm">Standard deviation of what all tyres of a survey share, mm.</param>
    public static IReadOnlyList<WeighedExplanation> Weigh(Vehicle vehicle, IReadOnlyList<TreadShape> written, IReadOnlyDictionary<Position, TyreExpectation> expected, double technicianSdMm)
    {
        var candidates = Candidates(vehicle, written);
        var logs = new double[candidates.Count];
        for (var i = 0; i < logs.Length; i++) logs[i] = Math.Log(candidates[i].Prior) + LogLikelihood(candidates[i].Explanation, written, expected, technicianSdMm);
        var top = logs.Max();
        var total = logs.Sum(l => Math.Exp(l - top));
        var weighed = candidates.Select((c, i) => new WeighedExplanation(c.Explanation, Math.Exp(logs[i] - top) / total)).ToList();
        if (weighed.MaxBy(w => w.Weight)!.Explanation.Kind != ExplanationKind.AsWritten && OneSurveyBehind(written, expected))
        {
            // Two surveys that contradict each other accuse one another equally.
            var doubt = weighed.Where(w => w.Explanation.Kind != ExplanationKind.AsWritten).Sum(w => w.Weight) / 2;
            weighed = [.. weighed.Select(w => w.Explanation.Kind == ExplanationKind.AsWritten ? w : w with { Weight = w.Weight / 2 })];
            weighed.Add(new WeighedExplanation(new Explanation(ExplanationKind.ComparedSurveyWrong), doubt));
        }
        return [.. weighed.OrderByDescending(w => Math.Round(w.Weight, 12)).ThenBy(w => w.Explanation.Kind)];
    }

    private static bool OneSurveyBehind(IReadOnlyList<TreadShape> written, IReadOnlyDictionary<Position, TyreExpectation> expected) =>
        written.All(s => !expected.TryGetValue(s.Position, out var e) || e.Surveys <= 1);

    private static List<(Explanation Explanation, double Prior)> Candidates(Vehicle vehicle, IReadOnlyList<TreadShape> written)
    {
        List<(Explanation, double)> list = [(Explanation.AsWritten, 1 - SidesSwappedPrior - AxleSidesSwappedPrior - AxlesSwappedPrior - 2 * UnitPrior - OtherVehiclePrior)];
        var axles = written.Select(s => s.Position.Axle).Distinct().Order().ToList();
        list.Add((new(ExplanationKind.SidesSwapped), SidesSwappedPrior));
        if (axles.Count > 1)
            foreach (var axle in axles) list.Add((new(ExplanationKind.AxleSidesSwapped, axle), AxleSidesSwappedPrior / axles.Count));
        var pairs = (from a in axles from b in axles where a < b && vehicle.AxleAt(a)?.Duals == vehicle.AxleAt(b)?.Duals select (a, b)).ToList();
        foreach (var (a, b) in pairs) list.Add((new(ExplanationKind.AxlesSwapped, a, b), AxlesSwappedPrior / pairs.Count));
        list.Add((new(ExplanationKind.ThirtySecondsTakenForMm), UnitPrior));
        list.Add((new(ExplanationKind.MmTakenForThirtySeconds), UnitPrior));
        list.Add((new(ExplanationKind.OtherVehicle), OtherVehiclePrior));
        return list;
    }

    private static double LogLikelihood(Explanation explanation, IReadOnlyList<TreadShape> written, IReadOnlyDictionary<Position, TyreExpectation> expected, double technicianSd)
    {
        var factor = explanation.Factor;
        var count = written.Count;
        Span<double> residual = count <= 64 ? stackalloc double[count] : new double[count];
        Span<double> variance = count <= 64 ? stackalloc double[count] : new double[count];
        var behind = 0;
        for (var i = 0; i < count; i++)
        {
            var e = expected[explanation.Belongs(written[i].Position)].MeanMm;
            var y = written[i].MeanDepthMm * factor;
            residual[i] = y.Value - e.Value;
            variance[i] = y.StandardError * y.StandardError + e.StandardError * e.StandardError;
            behind = Math.Max(behind, expected[written[i].Position].Surveys);
        }
        // The others' technicians err too, so the shared part of a comparison is wider than one technician's.
        var sharedVariance = technicianSd * technicianSd * (1 + 1.0 / Math.Max(1, behind));
        var shared = Shared(residual, variance, sharedVariance);
        var log = count > 2 ? -0.5 * shared * shared / sharedVariance : 0;
        Span<double> alone = stackalloc double[Position.MaxAxle + 1];
        Span<double> together = stackalloc double[Position.MaxAxle + 1];
        for (var i = 0; i < count; i++)
        {
            var shape = written[i];
            var e = expected[explanation.Belongs(shape.Position)];
            var odd = LineBelief.LogDensity(residual[i], OddMeanSd * OddMeanSd + variance[i]);
            var regular = LineBelief.LogDensity(residual[i] - shared, variance[i] + (count > 2 ? 0 : sharedVariance));
            Add(shape.EdgeMm, e.EdgeMm, OddEdgeSd, ref odd, ref regular);
            Add(shape.ShoulderMm, e.ShoulderMm, OddShoulderSd, ref odd, ref regular);
            alone[shape.Position.Axle] += LogMix(OddTyrePrior, regular, odd);
            together[shape.Position.Axle] += odd;
            var figures = 1 + (shape.EdgeMm is null ? 0 : 1) + (shape.ShoulderMm is null ? 0 : 1);
            log += figures * Math.Log(factor);
        }
        for (var axle = 0; axle < alone.Length; axle++)
            log += explanation.Kind == ExplanationKind.OtherVehicle ? together[axle] : LogMix(AxleChangedPrior, alone[axle], together[axle]);
        return log;

        void Add(Estimate? seen, Estimate e, double oddSd, ref double odd, ref double regular)
        {
            if (seen is not { } s) return;
            var v = factor * factor * s.StandardError * s.StandardError + e.StandardError * e.StandardError;
            odd += LineBelief.LogDensity(factor * s.Value - e.Value, oddSd * oddSd + v);
            regular += LineBelief.LogDensity(factor * s.Value - e.Value, v);
        }
    }

    /// <summary>What all tyres share: their median residual, shrunk to zero and held within three of its standard deviations.</summary>
    private static double Shared(ReadOnlySpan<double> residual, ReadOnlySpan<double> variance, double sharedVariance)
    {
        if (residual.Length <= 2) return 0;
        Span<double> sorted = stackalloc double[Math.Min(residual.Length, 64)];
        residual[..sorted.Length].CopyTo(sorted);
        sorted.Sort();
        var median = Medians.OfSorted(sorted);
        double precision = 0;
        foreach (var v in variance) precision += 1 / v;
        var bound = 3 * Math.Sqrt(sharedVariance);
        return Math.Clamp(median * sharedVariance / (sharedVariance + 1.57 / precision), -bound, bound);
    }

    private static double LogMix(double oddShare, double regular, double odd)
    {
        var a = Math.Log(1 - oddShare) + regular;
        var b = Math.Log(oddShare) + odd;
        var top = Math.Max(a, b);
        return top + Math.Log(Math.Exp(a - top) + Math.Exp(b - top));
    }
}
