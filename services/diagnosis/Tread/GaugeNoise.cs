namespace WearWatch.Diagnosis.Tread;

/// <summary>What a depot's depth readings are worth before the fleet itself has shown it.</summary>
public static class GaugeNoise
{
    /// <summary>Standard deviation of one reading repeated by the same hand, mm; design prior from memory, range seen 0.05 to 0.3.</summary>
    public const double RepeatSdMm = 0.15;

    /// <summary>Standard deviation of technicians' biases, mm; design prior from memory.</summary>
    public const double TechnicianSdMm = 0.2;

    /// <summary>Standard deviation of gauges' biases, mm; from memory.</summary>
    public const double GaugeSdMm = 0.1;

    /// <summary>A 32nd of an inch, mm; exact.</summary>
    public const double ThirtySecondInchMm = 0.79375;

    /// <summary>Standard deviation that rounding to steps adds: step ÷ √12.</summary>
    public static double Quantisation(double resolutionMm) => resolutionMm / Math.Sqrt(12);

    /// <summary>Variance of one reading, mm²: repeat and rounding.</summary>
    public static double ReadingVariance(double repeatSdMm, double resolutionMm) => repeatSdMm * repeatSdMm + resolutionMm * resolutionMm / 12;

    /// <summary>Distance between two readings after which a slope shows at two standard errors, km: 2·√2·σ ÷ slope.</summary>
    /// <param name="slopeMmPer1000Km">mm per 1000 km.</param>
    /// <param name="sdMm">Standard deviation of a reading, mm.</param>
    public static double KmForTwoSigma(double slopeMmPer1000Km, double sdMm) => 2 * Math.Sqrt(2) * sdMm / slopeMmPer1000Km * 1000;
}
