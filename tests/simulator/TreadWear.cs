namespace WearWatch.Simulator;

/// <summary>How a vehicle is driven and what its tyres carry, as far as it wears them.</summary>
public sealed record Duty
{
    /// <summary>Wear of this driver and these goods over the fleet's, 0.65 to 1.35 (drivers alone move wear up to 35 %, fleet trade press).</summary>
    public double Driver { get; init; } = 1;
    /// <summary>Exponent of wear over slip, 2 or a little more (Schallamach and Turner 1960; Grosch and Schallamach 1961).</summary>
    public double Exponent { get; init; } = 2;
    /// <summary>Mean slip of one-way turning, deg, + left turns; at the front axle.</summary>
    public double OneWayDeg { get; init; }
    /// <summary>Outboard shoulders' extra share from cornering roll.</summary>
    public double Roll { get; init; }
    /// <summary>Mean sine of the bank of its roads.</summary>
    public double MeanBank { get; init; }
}

/// <summary>
/// Wear of one tyre, strip by strip, from the energy of sliding: the pressure of the strip times a power of the
/// slip angle, averaged over service slip (normal, zero mean unless the duty is one-sided) about the steady slip of
/// straight running. With power 2 the mean is the usual form 1 + (α/σ)². Shoulder shares reach 2:1 at large
/// slip (from memory).
/// </summary>
public static class TreadWear
{
    // Gauss-Hermite nodes and weights for the standard normal, nine points.
    private static readonly double[] Nodes = [-4.512745863399783, -3.205429002856470, -2.076847978677830, -1.023255663789133, 0, 1.023255663789133, 2.076847978677830, 3.205429002856470, 4.512745863399783];
    private static readonly double[] Weights = [2.234584400774658e-5, 2.789141321231769e-3, 4.991640676521788e-2, 2.440975028949394e-1, 4.063492063492063e-1, 2.440975028949394e-1, 4.991640676521788e-2, 2.789141321231769e-3, 2.234584400774658e-5];

    private const double ShoulderShift = 0.36;
    private const double ShiftSlipDeg = 0.45;
    private const double CamberShiftPerDeg = 0.11;

    /// <summary>Rates by strip from the outboard edge, mm per 1000 km.</summary>
    /// <param name="axle">The axle the tyre runs on.</param>
    /// <param name="towardsToeInDeg">Steady slip towards toe-in, deg.</param>
    /// <param name="camberDeg">Camber, + top out.</param>
    /// <param name="pressureShare">(pressure − set) ÷ set.</param>
    public static double[] Rates(AxleType axle, Duty duty, double towardsToeInDeg, double camberDeg, double pressureShare, double month, double[] profile)
    {
        var (mean, shifted) = Sliding(axle, duty, towardsToeInDeg);
        var rates = new double[Tyre.Strips];
        for (var s = 0; s < Tyre.Strips; s++)
            rates[s] = StripRate(axle, duty, mean, shifted, camberDeg, pressureShare, month, profile, s);
        return rates;
    }

    /// <summary>Sliding energy over that of the usual service slip alone, and the part of it that leans to the outboard side.</summary>
    public static (double Mean, double Shifted) Sliding(AxleType axle, Duty duty, double towardsToeInDeg)
    {
        var sigma = axle.ServiceSlipDeg * Math.Sqrt(duty.Driver);
        double mean = 0, shifted = 0, reference = 0;
        for (var j = 0; j < Nodes.Length; j++)
        {
            var slip = towardsToeInDeg + sigma * Nodes[j];
            var energy = Weights[j] * Math.Pow(Math.Abs(slip), duty.Exponent);
            mean += energy;
            shifted += energy * Math.Tanh(slip / ShiftSlipDeg);
            reference += Weights[j] * Math.Pow(axle.ServiceSlipDeg * Math.Abs(Nodes[j]), duty.Exponent);
        }
        return (mean / reference, shifted / reference);
    }

    /// <summary>Rate of one strip, mm per 1000 km, at a sliding energy.</summary>
    public static double StripRate(AxleType axle, Duty duty, double mean, double shifted, double camberDeg, double pressureShare, double month, double[] profile, int strip)
    {
        var outboard = 1 - 2.0 * strip / (Tyre.Strips - 1);
        var edge = outboard * (CamberShiftPerDeg * camberDeg + duty.Roll);
        var across = pressureShare < 0 ? -1.0 * pressureShare * (outboard * outboard - 0.35) : 1.2 * pressureShare * (0.55 - outboard * outboard);
        var all = 1 + 0.4 * Math.Max(0, -pressureShare);
        return axle.BaseRate * month * profile[strip] * all * Math.Max(0.2, (mean * (1 + edge + across)) + ShoulderShift * outboard * shifted);
    }

    /// <summary>
    /// Usual profile of a pattern on an axle: shoulders 10 to 35 % faster than the centre, the outboard half a few per cent
    /// more (normal tyres wear outside grooves 10 to 50 % faster than inside ones, NHTSA tread-wear groove patterns, 1985).
    /// </summary>
    public static double[] Profile(double shoulders, double outboardHalf)
    {
        var profile = new double[Tyre.Strips];
        for (var s = 0; s < Tyre.Strips; s++)
        {
            var outboard = 1 - 2.0 * s / (Tyre.Strips - 1);
            profile[s] = 1 + shoulders * (outboard * outboard - 0.45) + outboardHalf * outboard;
        }
        return profile;
    }
}
