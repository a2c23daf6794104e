namespace WearWatch.Simulator;

/// <summary>One tyre with its tread, strip by strip from the outboard edge as it is mounted now.</summary>
public sealed class Tyre
{
    public const int Strips = 7;
    public const double GrooveDeviationMm = 0.05;
    public const double DeviationMemoryKm = 8000;
    public const double FeatherMemoryKm = 3000;
    private readonly double[] _deviation = new double[6];
    private double _deviationKm;

    public required string Id { get; init; }
    public required string Pattern { get; init; }
    public required double NewDepthMm { get; init; }
    /// <summary>Depth, mm, at strips spread evenly from the outboard edge to the inboard edge.</summary>
    public double[] DepthMm { get; private set; } = [];
    /// <summary>Force of construction towards the tyre's outboard side, N; turns with the tyre on its rim.</summary>
    public double ConicityN { get; private set; }
    /// <summary>Wear of this casting over that of its pattern, share by strip.</summary>
    public required double[] StripFactor { get; init; }
    /// <summary>Fin height at the rib edges, mm, + fin inboard (toe-in); follows the slip within some 3000 km.</summary>
    public double FeatherMm { get; private set; }
    /// <summary>Depth variation round the tyre of a cupped tread, mm amplitude.</summary>
    public double CuppingMm { get; set; }
    public double Km { get; private set; }
    /// <summary>Depth, mm, by strip when it was new, from the side that was outboard then.</summary>
    public double[] NewDepths { get; private set; } = [];
    /// <summary>Whether it stands the other way round on its rim than when it was new.</summary>
    public bool Turned { get; private set; }

    public static Tyre Draw(string id, string pattern, double newDepthMm, double conicitySdN, RandomStream random)
    {
        var tyre = new Tyre
        {
            Id = id,
            Pattern = pattern,
            NewDepthMm = newDepthMm,
            StripFactor = [.. Enumerable.Range(0, Strips).Select(_ => 1 + 0.025 * random.Normal())],
            ConicityN = conicitySdN * random.Within(1, 2),
        };
        // A new tyre's grooves differ by a tenth or so.
        tyre.DepthMm = [.. Enumerable.Range(0, Strips).Select(_ => newDepthMm - Math.Abs(0.05 * random.Normal()))];
        tyre.NewDepths = [.. tyre.DepthMm];
        for (var i = 0; i < tyre._deviation.Length; i++) tyre._deviation[i] = GrooveDeviationMm * random.Normal();
        return tyre;
    }

    public void SetConicity(double newtons) => ConicityN = newtons;

    /// <summary>Runs some distance at given strip rates, mm per 1000 km.</summary>
    /// <param name="towardsToeInDeg">Mean slip towards toe-in, deg.</param>
    public void Run(double km, double[] rates, double towardsToeInDeg)
    {
        for (var s = 0; s < Strips; s++) DepthMm[s] = Math.Max(0, DepthMm[s] - Loss(s, km, rates[s]));
        FeatherMm += (SettledFeather(towardsToeInDeg) - FeatherMm) * (1 - Math.Exp(-km / FeatherMemoryKm));
        Km += km;
    }

    /// <summary>Fin height that a lasting slip leads to, mm.</summary>
    public static double SettledFeather(double towardsToeInDeg) => 0.55 * Math.Tanh(towardsToeInDeg / 0.3);

    /// <summary>Loss over some distance: 25 % faster at first, decaying within some 1.2 mm, then slowing by up to 10 % (from memory).</summary>
    public double Loss(int strip, double km, double rate) => km / 1000 * rate * StripFactor[strip] * Stage(NewDepthMm - DepthMm[strip], NewDepthMm);

    /// <summary>Rate at some wear over the usual rate.</summary>
    public static double Stage(double wornMm, double newDepthMm) => 1 + 0.25 * Math.Exp(-wornMm / 1.2) - 0.1 * wornMm / newDepthMm;

    /// <summary>
    /// Depth, mm, at a groove, with the deviation of its own that a groove carries for some 8000 km ("a note on patterns
    /// of wear", Tire Sci. Technol. 7(1): groove residuals come in runs).
    /// </summary>
    public double GrooveDepth(int groove, int grooves, RandomStream random)
    {
        var memory = Math.Exp(-(Km - _deviationKm) / DeviationMemoryKm);
        if (memory < 1)
        {
            var fresh = GrooveDeviationMm * Math.Sqrt(1 - memory * memory);
            for (var i = 0; i < _deviation.Length; i++) _deviation[i] = memory * _deviation[i] + fresh * random.Normal();
            _deviationKm = Km;
        }
        return Math.Max(0, SmoothDepth(groove, grooves) + _deviation[groove]);
    }

    /// <summary>Depth at a groove without deviations, mm.</summary>
    public double SmoothDepth(int groove, int grooves) => AtGroove(DepthMm, groove, grooves);

    /// <summary>Value at a groove (0 = outermost) of something known by strip.</summary>
    public static double AtGroove(double[] byStrip, int groove, int grooves)
    {
        // Grooves stand between −0.72 and +0.72 of the half width.
        var at = (1 + (grooves == 1 ? 0 : -0.72 + 1.44 * groove / (grooves - 1))) / 2 * (Strips - 1);
        var low = Math.Min((int)at, Strips - 2);
        return byStrip[low] + (at - low) * (byStrip[low + 1] - byStrip[low]);
    }

    /// <summary>Takes the tyre off its rim and puts it back the other way round.</summary>
    public void TurnOnRim()
    {
        Array.Reverse(DepthMm);
        Array.Reverse(StripFactor);
        ConicityN = -ConicityN;
        FeatherMm = -FeatherMm;
        Turned = !Turned;
    }
}
