using System.Numerics;
using System.Runtime.InteropServices;
using System.Runtime.Intrinsics;

namespace WearWatch.Diagnosis.Steering;

/// <summary>What one second of one channel comes to.</summary>
/// <param name="Mean">Mean of the valid samples; NaN where fewer than half are valid.</param>
/// <param name="Min">Least valid sample; NaN with the mean.</param>
/// <param name="Max">Largest valid sample; NaN with the mean.</param>
public readonly record struct BlockSummary(float Mean, float Min, float Max)
{
    public static readonly BlockSummary Missing = new(float.NaN, float.NaN, float.NaN);
}

/// <summary>Reduces one block of samples, NaN being missing. The vector form is the one used; the scalar form is its test oracle.</summary>
public static class BlockPass
{
    private const int Lanes = 8;

    /// <summary>Row r keeps the last r lanes: the part of an overlapping load that was not summed before.</summary>
    private static readonly float[] s_last = [.. Enumerable.Range(0, Lanes).SelectMany(r => Enumerable.Range(0, Lanes).Select(lane => BitConverter.Int32BitsToSingle(lane >= Lanes - r ? -1 : 0)))];

    /// <summary>Whole blocks first, as though nothing were missing; a block whose sum is then no number goes through the careful form.</summary>
    public static BlockSummary Vectorised(ReadOnlySpan<float> samples)
    {
        if (samples.Length < Lanes || !Vector256.IsHardwareAccelerated) return Scalar(samples);
        ref var first = ref MemoryMarshal.GetReference(samples);
        var sum = Vector256.LoadUnsafe(ref first);
        var (min, max) = (sum, sum);
        var end = samples.Length - Lanes;
        var at = Lanes;
        for (; at <= end; at += Lanes)
        {
            var x = Vector256.LoadUnsafe(ref first, (nuint)at);
            sum += x;
            min = Vector256.MinNative(min, x);
            max = Vector256.MaxNative(max, x);
        }
        if (samples.Length - at is var rest and > 0)
        {
            // The rest is read together with samples seen before: the extremes do not mind, the sum leaves them out.
            var x = Vector256.LoadUnsafe(ref first, (nuint)end);
            sum += x & Vector256.LoadUnsafe(ref MemoryMarshal.GetArrayDataReference(s_last), (nuint)(rest * Lanes));
            min = Vector256.MinNative(min, x);
            max = Vector256.MaxNative(max, x);
        }
        var total = Vector256.Sum(sum);
        return float.IsFinite(total) ? new(total / samples.Length, Least(min), Most(max)) : Masked(samples);
    }

    private static float Least(Vector256<float> v)
    {
        var w = Vector128.MinNative(v.GetLower(), v.GetUpper());
        w = Vector128.MinNative(w, Vector128.Shuffle(w, Vector128.Create(2, 3, 0, 1)));
        return Vector128.MinNative(w, Vector128.Shuffle(w, Vector128.Create(1, 0, 3, 2))).ToScalar();
    }

    private static float Most(Vector256<float> v)
    {
        var w = Vector128.MaxNative(v.GetLower(), v.GetUpper());
        w = Vector128.MaxNative(w, Vector128.Shuffle(w, Vector128.Create(2, 3, 0, 1)));
        return Vector128.MaxNative(w, Vector128.Shuffle(w, Vector128.Create(1, 0, 3, 2))).ToScalar();
    }

    /// <summary>The vector form that looks at every sample for being there.</summary>
    private static BlockSummary Masked(ReadOnlySpan<float> samples)
    {
        var width = Vector<float>.Count;
        var sum = Vector<float>.Zero;
        var min = new Vector<float>(float.PositiveInfinity);
        var max = new Vector<float>(float.NegativeInfinity);
        var missing = Vector<int>.Zero;
        var vectors = MemoryMarshal.Cast<float, Vector<float>>(samples);
        foreach (var x in vectors)
        {
            var valid = Vector.Equals(x, x);
            missing += Vector<int>.One + valid;
            sum += Vector.ConditionalSelect(valid, x, Vector<float>.Zero);
            min = Vector.ConditionalSelect(Vector.LessThan(x, min), x, min);
            max = Vector.ConditionalSelect(Vector.GreaterThan(x, max), x, max);
        }
        var (total, least, most, absent) = (Vector.Sum(sum), float.PositiveInfinity, float.NegativeInfinity, Vector.Sum(missing));
        for (var lane = 0; lane < width; lane++)
        {
            least = float.MinNative(min[lane], least);
            most = float.MaxNative(max[lane], most);
        }
        for (var i = vectors.Length * width; i < samples.Length; i++) Take(samples[i], ref total, ref least, ref most, ref absent);
        return Close(samples.Length, total, least, most, absent);
    }

    public static BlockSummary Scalar(ReadOnlySpan<float> samples)
    {
        var (total, least, most, absent) = (0f, float.PositiveInfinity, float.NegativeInfinity, 0);
        foreach (var x in samples) Take(x, ref total, ref least, ref most, ref absent);
        return Close(samples.Length, total, least, most, absent);
    }

    private static void Take(float x, ref float total, ref float least, ref float most, ref int absent)
    {
        if (float.IsNaN(x)) { absent++; return; }
        total += x;
        least = float.MinNative(x, least); // one instruction each; NaN is already out
        most = float.MaxNative(x, most);
    }

    private static BlockSummary Close(int length, float total, float least, float most, int absent)
    {
        var valid = length - absent;
        return valid == 0 || 2 * valid < length ? BlockSummary.Missing : new(total / valid, least, most);
    }
}
