namespace WearWatch.Diagnosis.Changes;

/// <summary>Two-sided tabular CUSUM of standardised values.</summary>
/// <param name="Up">Sum upward, standard deviations.</param>
/// <param name="Down">Sum downward, positive.</param>
/// <param name="UpSince">Values since the sum upward last stood at zero: the shift began with the first of them.</param>
/// <param name="DownSince">The same downward.</param>
/// <remarks>E. S. Page, Biometrika 41 (1954) 100; tabular form and counters as in Montgomery, Introduction to Statistical Quality Control.</remarks>
public readonly record struct Cusum(double Up, double Down, int UpSince, int DownSince)
{
    /// <param name="z">Value less target, over its standard deviation.</param>
    /// <param name="slack">Half the shift to be found, standard deviations; 0.5 finds a shift of one soonest.</param>
    public Cusum With(double z, double slack)
    {
        var (up, down) = (Math.Max(0, Up + z - slack), Math.Max(0, Down - z - slack));
        return new(up, down, up > 0 ? UpSince + 1 : 0, down > 0 ? DownSince + 1 : 0);
    }
}

/// <summary>Exponentially weighted moving average of standardised values with the exact variance of uneven weights.</summary>
/// <param name="Z">The average; 0 at the start.</param>
/// <param name="Variance">Of the average, where a value has variance 1.</param>
/// <remarks>S. W. Roberts, Technometrics 1 (1959) 239; limits: Lucas and Saccucci, Technometrics 32 (1990) 1.</remarks>
public readonly record struct Ewma(double Z, double Variance)
{
    /// <summary>With equal weights the variance is λ/(2 − λ)·(1 − (1 − λ)^2i).</summary>
    public Ewma With(double z, double weight) => new(weight * z + (1 - weight) * Z, weight * weight + (1 - weight) * (1 - weight) * Variance);

    /// <summary>Weight of a value that comes so far after the one before: 1 − exp(−Δ/τ), so that the memory is one of distance.</summary>
    public static double Weight(double distance, double memory) => 1 - Math.Exp(-Math.Max(0, distance) / memory);

    public bool Beyond(double limit) => Math.Abs(Z) > limit * Math.Sqrt(Variance);
}
