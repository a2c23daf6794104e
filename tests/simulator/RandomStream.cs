namespace WearWatch.Simulator;

/// <summary>
/// xoshiro256** (Blackman and Vigna 2018, public domain), seeded through SplitMix64 from a seed and a path of
/// keys, so that every vehicle, trip or road has a stream of its own that no other draw can disturb.
/// </summary>
public sealed class RandomStream
{
    private ulong _a, _b, _c, _d;
    private double _spare = double.NaN;

    public RandomStream(ulong seed, params ReadOnlySpan<int> path)
    {
        var key = seed * 0x9E3779B97F4A7C15UL + 0x632BE59BD9B4E019UL;
        foreach (var step in path) key = SplitMix(ref key) ^ ((ulong)(uint)step * 0xD1342543DE82EF95UL);
        _a = SplitMix(ref key);
        _b = SplitMix(ref key);
        _c = SplitMix(ref key);
        _d = SplitMix(ref key);
    }

    private static ulong SplitMix(ref ulong state)
    {
        var z = state += 0x9E3779B97F4A7C15UL;
        z = (z ^ (z >> 30)) * 0xBF58476D1CE4E5B9UL;
        z = (z ^ (z >> 27)) * 0x94D049BB133111EBUL;
        return z ^ (z >> 31);
    }

    private ulong NextBits()
    {
        var result = ulong.RotateLeft(_b * 5, 7) * 9;
        var t = _b << 17;
        _c ^= _a;
        _d ^= _b;
        _b ^= _c;
        _a ^= _d;
        _c ^= t;
        _d = ulong.RotateLeft(_d, 45);
        return result;
    }

    /// <summary>Uniform in [0, 1).</summary>
    public double Unit() => (NextBits() >> 11) * (1.0 / (1UL << 53));

    public double Between(double low, double high) => low + (high - low) * Unit();

    /// <summary>Whole number from <paramref name="low"/> to <paramref name="high"/>, both included.</summary>
    public int Whole(int low, int high) => low + (int)(Unit() * (high - low + 1));

    public bool Chance(double probability) => Unit() < probability;

    public double Sign() => Chance(0.5) ? 1 : -1;

    public T Pick<T>(IReadOnlyList<T> from) => from[Whole(0, from.Count - 1)];

    /// <summary>Standard normal (Marsaglia's polar method).</summary>
    public double Normal()
    {
        if (!double.IsNaN(_spare))
        {
            var kept = _spare;
            _spare = double.NaN;
            return kept;
        }
        double u, v, s;
        do
        {
            u = 2 * Unit() - 1;
            v = 2 * Unit() - 1;
            s = u * u + v * v;
        }
        while (s is >= 1 or 0);
        var factor = Math.Sqrt(-2 * Math.Log(s) / s);
        _spare = v * factor;
        return u * factor;
    }

    /// <summary>Normal of standard deviation <paramref name="sd"/>, drawn again until within ± <paramref name="bound"/>.</summary>
    public double Within(double sd, double bound)
    {
        double x;
        do x = sd * Normal();
        while (Math.Abs(x) > bound);
        return x;
    }
}
