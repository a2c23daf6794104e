namespace WearWatch.Simulator.Best;

/// <summary>The standard normal.</summary>
internal static class NormalLaw
{
    /// <summary>Probability below x; error below 1.5e-7 (Abramowitz and Stegun, Handbook of Mathematical Functions, 7.1.26).</summary>
    public static double Below(double x)
    {
        var z = Math.Abs(x) / Math.Sqrt(2);
        var t = 1 / (1 + 0.3275911 * z);
        var tail = t * (0.254829592 + t * (-0.284496736 + t * (1.421413741 + t * (-1.453152027 + t * 1.061405429)))) * Math.Exp(-z * z) / 2;
        return x > 0 ? 1 - tail : tail;
    }
}
