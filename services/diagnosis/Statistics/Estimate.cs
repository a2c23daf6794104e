namespace WearWatch.Diagnosis.Statistics;

/// <summary>A figure that never travels without its error.</summary>
/// <param name="Value">Best value, in the unit of the field that holds it.</param>
/// <param name="StandardError">One standard error in the same unit; zero or more.</param>
public readonly record struct Estimate(double Value, double StandardError)
{
    /// <summary>Two-sided 90 % point of the normal law.</summary>
    public const double Z90 = 1.6448536269514722;

    /// <summary>Lower bound of the 90 % interval.</summary>
    public double Low => Value - Z90 * StandardError;

    /// <summary>Upper bound of the 90 % interval.</summary>
    public double High => Value + Z90 * StandardError;

    public static Estimate operator -(Estimate e) => new(-e.Value, e.StandardError);

    public static Estimate operator *(Estimate e, double factor) => new(e.Value * factor, e.StandardError * Math.Abs(factor));

    /// <summary>Sum of two independent estimates.</summary>
    public static Estimate operator +(Estimate a, Estimate b) => new(a.Value + b.Value, Math.Sqrt(a.StandardError * a.StandardError + b.StandardError * b.StandardError));

    /// <summary>Difference of two independent estimates.</summary>
    public static Estimate operator -(Estimate a, Estimate b) => a + -b;
}
