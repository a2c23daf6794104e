using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Causes;

/// <summary>
/// What confirmed outcomes teach about the stated probabilities and intervals. A stated probability p of a class becomes
/// σ(Shift + Slope · logit p) with a slope above zero, so that the order within a class stays (Platt 1999; Cox 1958), and
/// few outcomes move it little: the prior sits at 'as stated'. Plain numbers, to be kept in a fleet snapshot.
/// </summary>
public sealed record OutcomeCalibration
{
    /// <summary>No probability of 0 or 1 goes in or comes out.</summary>
    public const double LeastProbability = 1e-4;

    /// <summary>For classes without outcomes of their own.</summary>
    public required ClassCalibration Fleet { get; init; }
    public required IReadOnlyList<ClassCalibration> Classes { get; init; }
    /// <summary>
    /// How much more often than stated the vehicles sent for a reason outside the list were out, in log odds: what drivers and technicians
    /// knew beyond the figures. It is kept out of the calibration.
    /// </summary>
    public required IReadOnlyDictionary<SentBecause, double> SentShift { get; init; }
    /// <summary>Outcomes used; those without a stated probability, after a repair, or with nothing said are not.</summary>
    public required int Used { get; init; }
    public required int LeftOut { get; init; }
    public required OutcomeConformal Angles { get; init; }

    public static OutcomeCalibration None { get; } = Fit([]);

    /// <summary>The order of the outcomes does not matter; one that is given twice counts once.</summary>
    public static OutcomeCalibration Fit(IReadOnlyList<ConfirmedOutcome> outcomes)
    {
        var distinct = outcomes.GroupBy(o => (o.VehicleId, o.At, o.SentBecause, o.StatedProbability, o.LikelihoodRatio)).Select(g => g.First())
            .OrderBy(o => o.VehicleClass, StringComparer.Ordinal).ThenBy(o => o.VehicleId, StringComparer.Ordinal).ThenBy(o => o.At).ToList();
        var usable = distinct.Where(Usable).ToList();
        return OutcomeCalibrationFit.Of(usable) with { LeftOut = distinct.Count - usable.Count, Angles = OutcomeConformal.Of(distinct) };
    }

    /// <summary>The calibrated probability, above 0 and below 1.</summary>
    /// <param name="vehicleClass">As <c>Vehicle.Class.ToString()</c>; a class without outcomes takes the fleet's.</param>
    /// <param name="probability">As stated, 0 to 1.</param>
    public double Apply(string vehicleClass, double probability)
    {
        var own = Classes.FirstOrDefault(c => c.Class == vehicleClass) ?? Fleet;
        return own.Shift == 0 && own.Slope == 1 ? Bounded(probability) : Bounded(1 / (1 + Math.Exp(-own.Shift - own.Slope * LogOdds(probability))));
    }

    internal static double LogOdds(double probability)
    {
        var p = Bounded(probability);
        return Math.Log(p / (1 - p));
    }

    private static double Bounded(double probability) => Math.Clamp(probability, LeastProbability, 1 - LeastProbability);

    /// <summary>After a repair the vehicle is no longer the one of which the probability was stated.</summary>
    private static bool Usable(ConfirmedOutcome o) =>
        o is { StatedProbability: >= 0 and <= 1, LikelihoodRatio: > 0 } && double.IsFinite(o.LikelihoodRatio) && o.LikelihoodRatio != 1 && o.SentBecause != SentBecause.AfterRepair;
}

/// <param name="Class">Class, or empty for the fleet.</param>
/// <param name="Shift">Log odds.</param>
/// <param name="Slope">Above zero; below 1 where stated probabilities were too sure.</param>
/// <param name="Outcomes">Outcomes of the class.</param>
public sealed record ClassCalibration(string Class, double Shift, double Slope, int Outcomes);
