namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// A slope that wanders about its mean with season, loads and the age of the tyre: an Ornstein–Uhlenbeck process (Uhlenbeck and
/// Ornstein 1930), whose integral adds to the covariance of readings. A break has to show beyond that.
/// </summary>
/// <param name="Sd">SD of the slope, mm per 1000 km.</param>
/// <param name="Memory">Distance over which it keeps its departure, 1000 km.</param>
public readonly record struct SlopeWander(double Sd, double Memory)
{
    /// <summary>Covariance of the losses at two distances from the start, mm².</summary>
    public double Covariance(double x, double y) => Sd * Sd * Memory
        * (2 * Math.Min(x, y) - Memory * (1 + Math.Exp(-Math.Abs(x - y) / Memory) - Math.Exp(-x / Memory) - Math.Exp(-y / Memory)));
}
