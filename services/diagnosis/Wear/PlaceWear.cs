namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// What readings say of a slope that may have changed at an onset and of what all tyres of a survey share: the likelihood
/// exp(−½ ξᵀKξ + hᵀξ) of ξ = (slope before, slope after, shared error of each survey), every intercept integrated out. It may
/// say nothing of some of them. Slopes in mm per 1000 km, shared errors in mm.
/// </summary>
/// <param name="K">Information, row by row, (2 + surveys)².</param>
/// <param name="H">Information times best values.</param>
public sealed record SlopeEvidence(double[] K, double[] H)
{
    /// <summary>Length of ξ.</summary>
    public int Size => H.Length;

    /// <summary>Whether it says anything of either slope.</summary>
    public bool Tells => K[0] > 1e-12 || K[Size + 1] > 1e-12;

    /// <summary>Information on the slope after, and its best value were it known to hold alone; for display.</summary>
    public (double Value, double StandardError)? After => K[Size + 1] > 1e-12 ? (H[1] / K[Size + 1], 1 / Math.Sqrt(K[Size + 1])) : null;

    /// <summary>The same of slopes in another unit: old = new × <paramref name="unit"/>.</summary>
    public SlopeEvidence InUnitsOf(double unit)
    {
        double Scale(int i) => i < 2 ? unit : 1;
        return new([.. K.Select((k, at) => k * Scale(at / Size) * Scale(at % Size))], [.. H.Select((h, i) => h * Scale(i))]);
    }

    /// <summary>Whether both say the same but for rounding.</summary>
    public bool SameAs(SlopeEvidence other) => Size == other.Size && Alike(K, other.K) && Alike(H, other.H);

    private static bool Alike(double[] a, double[] b)
    {
        for (var i = 0; i < a.Length; i++)
            if (Math.Abs(a[i] - b[i]) > 1e-7 * (Math.Abs(a[i]) + Math.Abs(b[i]))) return false;
        return true;
    }

    /// <summary>A slope known to hold ever since, with nothing shared.</summary>
    public static SlopeEvidence AfterOnly(double value, double standardError)
    {
        var information = 1 / (standardError * standardError);
        return new([0, 0, 0, information], [0, value * information]);
    }
}

/// <summary>How one place of the vehicle wore its tyres before and after a possible onset, whichever tyre stood there.</summary>
public sealed record PlaceWear
{
    /// <summary>Loss of mean depth.</summary>
    public required SlopeEvidence Rate { get; init; }
    /// <summary>Loss at the outboard shoulder less loss at the inboard one; surveys share no error of it.</summary>
    public required SlopeEvidence Edge { get; init; }
    public Rubs Before { get; init; }
    public Rubs After { get; init; }
}

/// <summary>One place's normal wear and its evidence for every onset, in the order of <see cref="Onsets.DaysAgo"/>.</summary>
public sealed record PlaceHistory
{
    public required Facts.Position Position { get; init; }
    /// <summary>Normal rate, mm per 1000 km, and the standard error of its logarithm.</summary>
    public required double NormalRateMmPer1000Km { get; init; }
    public required double NormalLogRateSd { get; init; }
    /// <summary>Spread of ln(rate) between sound tyres of the kind.</summary>
    public required double BetweenLogSd { get; init; }
    /// <summary>Edge slope per mm of mean wear that is normal for the place, the crown's part included.</summary>
    public required double NormalEdgePerMm { get; init; }
    public required IReadOnlyList<PlaceWear> ByOnset { get; init; }
}

/// <summary>How a vehicle wore its tyres, place by place, with the errors that the places of one survey share.</summary>
public sealed record VehicleWearHistory
{
    /// <summary>Inverse covariance of the surveys' shared errors of depth, mm⁻²; row by row.</summary>
    public required double[] SharedPrecision { get; init; }
    public required int Surveys { get; init; }
    /// <summary>Front to rear, left before right; only places that were read.</summary>
    public required IReadOnlyList<PlaceHistory> Places { get; init; }

    public PlaceHistory? At(Facts.Position position) => Places.FirstOrDefault(p => p.Position == position);
}

/// <summary>Hand rubs: how many caught moving outward (toe-in), inward (toe-out), neither.</summary>
public readonly record struct Rubs(int Outward, int Inward, int Neither)
{
    public int Count => Outward + Inward + Neither;

    /// <summary>As noted by one who takes outward for inward.</summary>
    public Rubs Exchanged() => new(Inward, Outward, Neither);
}
