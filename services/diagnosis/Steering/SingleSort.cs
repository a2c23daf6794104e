namespace WearWatch.Diagnosis.Steering;

/// <summary>Radix sort of single-precision numbers: their bits, turned so that they ascend as unsigned integers, in three passes of 11 bits.</summary>
internal static class SingleSort
{
    private const int Bits = 11, Buckets = 1 << Bits, Passes = 3;

    /// <summary>Values ascending, in double precision; there must be no NaN among them.</summary>
    public static double[] Ascending(ReadOnlySpan<float> values)
    {
        var n = values.Length;
        var (keys, other) = (GC.AllocateUninitializedArray<uint>(n), GC.AllocateUninitializedArray<uint>(n));
        var counts = new int[Passes * Buckets];
        for (var i = 0; i < n; i++)
        {
            var bits = BitConverter.SingleToInt32Bits(values[i]);
            var key = (uint)(bits ^ (bits >> 31 | int.MinValue)); // negative numbers: every bit turned; the others: the sign alone
            keys[i] = key;
            for (var p = 0; p < Passes; p++) counts[p * Buckets + Digit(key, p)]++;
        }
        for (var p = 0; p < Passes; p++)
        {
            var places = counts.AsSpan(p * Buckets, Buckets);
            var before = 0;
            foreach (ref var place in places) (place, before) = (before, before + place);
            foreach (var key in keys) other[places[Digit(key, p)]++] = key;
            (keys, other) = (other, keys);
        }
        var sorted = GC.AllocateUninitializedArray<double>(n);
        for (var i = 0; i < n; i++)
        {
            var key = (int)keys[i];
            sorted[i] = BitConverter.Int32BitsToSingle(key ^ (~key >> 31 | int.MinValue));
        }
        return sorted;
    }

    private static int Digit(uint key, int pass) => (int)(key >> (Bits * pass)) & (Buckets - 1);
}
