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

    private static double[] Share()
    {
        var n = DaysAgo.Count;
        var shares = new double[n];
        // Edges halfway between neighbours; the oldest finite onset reaches as far beyond as before.
        double From(int i) => i == n - 1 ? 0 : (DaysAgo[i] + DaysAgo[i + 1]) / 2;
        double To(int i) => i == 1 ? 1.5 * DaysAgo[1] - 0.5 * DaysAgo[2] : From(i - 1);
        for (var i = 1; i < n; i++) shares[i] = Math.Exp(-From(i) / MeanAgeDays) - Math.Exp(-To(i) / MeanAgeDays);
        shares[0] = Math.Exp(-To(1) / MeanAgeDays);
        return shares;
    }
}
