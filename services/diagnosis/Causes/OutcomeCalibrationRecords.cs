using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Geometry;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Causes;

/// <summary>What a workshop found on one visit, beside what had been stated of the vehicle before.</summary>
public sealed record ConfirmedOutcome
{
    public required string VehicleId { get; init; }
    /// <summary>As <c>Vehicle.Class.ToString()</c>.</summary>
    public required string VehicleClass { get; init; }
    public required DateTimeOffset At { get; init; }
    public SentBecause SentBecause { get; init; }
    /// <summary>Probability of misalignment stated before the visit and before calibration; null when none was.</summary>
    public double? StatedProbability { get; init; }
    /// <summary>How much more probable the workshop's record is for a misaligned vehicle than for a sound one, above 0; 1 says nothing.</summary>
    public required double LikelihoodRatio { get; init; }
    /// <summary>Angles measured before the work beside the intervals stated for them.</summary>
    public IReadOnlyList<AngleOutcome> Angles { get; init; } = [];

    /// <summary>One visit as an outcome.</summary>
    /// <param name="vehicle">The vehicle as it was.</param>
    /// <param name="record">The workshop's record.</param>
    /// <param name="tolerances">Operator's tolerances.</param>
    /// <param name="stated">Probability stated before the visit, before calibration.</param>
    /// <param name="causes">Causes stated with it.</param>
    public static ConfirmedOutcome Of(Vehicle vehicle, WorkshopRecord record, IReadOnlyList<ToleranceFact> tolerances, double? stated, IReadOnlyList<Cause> causes) => new()
    {
        VehicleId = vehicle.VehicleId,
        VehicleClass = vehicle.Class.ToString(),
        At = record.At,
        SentBecause = record.SentBecause,
        StatedProbability = stated,
        LikelihoodRatio = OutcomeLikelihood.Ratio(vehicle, record, tolerances),
        Angles =
        [
            .. from angle in record.Angles
               let before = angle.BeforeDeg ?? double.NaN
               where double.IsFinite(before)
               let cause = causes.FirstOrDefault(c => c.Quantity == angle.Quantity && c.Side == angle.Side && (c.Axle == angle.Axle || c.Axle is null || angle.Axle is null))
               where cause is not null
               select new AngleOutcome(angle.Quantity, cause.Value, before),
        ],
    };
}

/// <param name="Quantity">An alignment angle.</param>
/// <param name="Stated">Value and 90 % interval stated before the visit, deg.</param>
/// <param name="MeasuredDeg">What the bench read before the work, deg.</param>
public sealed record AngleOutcome(Quantity Quantity, Interval Stated, double MeasuredDeg);

/// <summary>What a workshop's record says for or against misalignment; a bare result counts, but less than measured angles.</summary>
public static class OutcomeLikelihood
{
    /// <summary>A record never speaks more strongly than this (from memory: one in fifty is about another vehicle, or written the wrong way round).</summary>
    public const double Most = 50;

    /// <summary>Error of a bench between two mountings of the sensors, share of the tolerance (from memory).</summary>
    public const double BenchError = 0.15;

    /// <summary>Rows: bare result and its likelihood ratio, out over in order (from memory: workshops adjust some that are in order, and a bare 'in order' hides a tenth that are not).</summary>
    public static IReadOnlyList<(WorkshopResult Result, double Ratio, string Source)> BareResults { get; } =
    [
        (WorkshopResult.InOrder, 0.1, "from memory"),
        (WorkshopResult.Adjusted, 4, "from memory"),
        (WorkshopResult.CouldNotAdjust, 6, "from memory"),
        (WorkshopResult.PartsNeeded, 3, "from memory"),
        (WorkshopResult.Unknown, 1, "says nothing"),
    ];

    /// <summary>P(record | misaligned) ÷ P(record | sound), 1/50 to 50.</summary>
    public static double Ratio(Vehicle vehicle, WorkshopRecord record, IReadOnlyList<ToleranceFact> tolerances)
    {
        var day = DateOnly.FromDateTime(record.At.UtcDateTime);
        var judged = record.Angles
            .Select(a => (Angle: a, Tolerance: Tolerances.For(vehicle, a.Quantity, a.Axle, tolerances, day)))
            .Where(x => x.Angle.BeforeDeg is { } before && double.IsFinite(before) && x.Tolerance is { PlusMinus: > 0 })
            .Select(x => (x.Angle.Quantity, Size: Math.Abs(x.Angle.BeforeDeg!.Value - x.Tolerance!.Value.Target) / x.Tolerance.Value.PlusMinus)).ToList();
        if (judged.Count == 0) return BareResults.First(r => r.Result == record.Result).Ratio;
        var worst = judged.Max(j => j.Size);
        // How surely the worst angle is beyond its tolerance, as odds of a logistic of the bench's error.
        var measured = Math.Exp((worst - 1) / BenchError);
        // Angles in order speak only for what was measured: a vehicle may be out where nobody looked.
        var quantities = Enum.GetValues<Quantity>().Where(q => q.IsAngle() && Tolerances.For(vehicle, q, null, tolerances, day) is not null).ToList();
        var unseen = 1 - (double)quantities.Count(q => judged.Any(j => j.Quantity == q)) / Math.Max(1, quantities.Count);
        return Math.Clamp(measured + unseen, 1 / Most, Most);
    }
}
