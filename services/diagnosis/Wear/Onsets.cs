namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// Dates at which a fault may have begun, as days before the as-of date: wear before such a date is that of a sound
/// vehicle, wear after it shows the fault. The first stands for "before anything that was measured".
/// </summary>
public static class Onsets
{
    /// <summary>Mean age of a fault that is there today, days: faults arise at any time and live until the next alignment (from memory, about a year).</summary>
    private const double MeanAgeDays = 365;

    /// <summary>Days before the as-of date; infinite first, then falling. Finer where more is measured.</summary>
    public static IReadOnlyList<double> DaysAgo { get; } = [double.PositiveInfinity, 500, 330, 230, 165, 120, 85, 55, 30];

    /// <summary>Prior share of each onset among faults: each stands for the stretch of time around it.</summary>
    public static IReadOnlyList<double> Shares { get; } = Share();

    /// <summary>
    /// Days ago between which an onset stands: edges halfway between neighbours; the oldest finite one reaches as far beyond as
    /// before, the first from there to ever.
    /// </summary>
    public static (double Latest, double Earliest) Stretch(int onset)
    {
        var oldest = 1.5 * DaysAgo[1] - 0.5 * DaysAgo[2];
        double Edge(int i) => i == 0 ? oldest : i == DaysAgo.Count - 1 ? 0 : (DaysAgo[i] + DaysAgo[i + 1]) / 2;
        return (Edge(onset), onset == 0 ? double.PositiveInfinity : Edge(onset - 1));
    }

    private static double[] Share() =>
        [.. Enumerable.Range(0, DaysAgo.Count).Select(i => Math.Exp(-Stretch(i).Latest / MeanAgeDays) - Math.Exp(-Stretch(i).Earliest / MeanAgeDays))];
}
