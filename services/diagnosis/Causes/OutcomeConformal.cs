using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Causes;

/// <summary>
/// By how much stated intervals of angles must be widened, or may be narrowed, so that nine in ten hold what the bench then reads.
/// </summary>
/// <remarks>
/// Split conformal prediction (Vovk 2005; Lei et al. 2018) by vehicle, not by row: rows of one vehicle are not exchangeable with
/// those of another, so every vehicle carries the same weight however many angles it has, shared among them (pooled distributions of
/// Dunn, Wasserman and Ramdas 2022, handed down), and a vehicle's own outcomes are left out when its own interval is widened.
/// </remarks>
public sealed record OutcomeConformal
{
    /// <summary>Share of intervals that shall not hold.</summary>
    public const double Miss = 0.1;

    /// <summary>A reading this many half-widths off is as wrong as can be.</summary>
    private const double MostScore = 1000;

    /// <summary>Scores of each vehicle: distance of the bench's reading from the stated value over the stated half-width on that side.</summary>
    public required IReadOnlyList<VehicleScores> Vehicles { get; init; }

    public static OutcomeConformal Of(IEnumerable<ConfirmedOutcome> outcomes) => new()
    {
        Vehicles = [.. outcomes.GroupBy(o => o.VehicleId).OrderBy(g => g.Key, StringComparer.Ordinal)
            .Select(g => new VehicleScores(g.Key, [.. g.SelectMany(o => o.Angles).Select(Score).Order()]))
            .Where(v => v.Scores.Count > 0)],
    };

    /// <summary>Factor on both half-widths for a vehicle; null where there are too few other vehicles to say (fewer than 9 for nine in ten).</summary>
    public double? Factor(string? vehicleId = null, double miss = Miss)
    {
        var others = Vehicles.Where(v => v.VehicleId != vehicleId).ToList();
        // A vehicle yet unseen counts as one more, with a score beyond all.
        var needed = (1 - miss) * (others.Count + 1);
        var held = 0.0;
        foreach (var (score, weight) in others.SelectMany(v => v.Scores.Select(s => (Score: s, Weight: 1.0 / v.Scores.Count))).OrderBy(x => x.Score))
        {
            held += weight;
            if (held >= needed - 1e-9) return score;
        }
        return null;
    }

    /// <summary>The interval with its half-widths changed; as stated where there are too few vehicles.</summary>
    public Interval Apply(string vehicleId, Interval stated) =>
        Factor(vehicleId) is not { } f ? stated : new(stated.Value, stated.Value - f * (stated.Value - stated.Low), stated.Value + f * (stated.High - stated.Value));

    private static double Score(AngleOutcome outcome)
    {
        var (value, low, high) = outcome.Stated;
        var (off, half) = outcome.MeasuredDeg >= value ? (outcome.MeasuredDeg - value, high - value) : (value - outcome.MeasuredDeg, value - low);
        return off <= 0 ? 0 : half > 0 ? Math.Min(MostScore, off / half) : MostScore;
    }
}

public sealed record VehicleScores(string VehicleId, IReadOnlyList<double> Scores);
