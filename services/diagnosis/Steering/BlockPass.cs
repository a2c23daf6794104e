using System.Numerics;
using System.Runtime.CompilerServices;
using System.Runtime.InteropServices;
using System.Runtime.Intrinsics;
using System.Runtime.Intrinsics.X86;

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

    /// <summary>Samples a block may have for eight blocks to be taken at once, one in each lane: at more, a block fills its lanes by itself.</summary>
    public const int LeastAbreast = 4, MostAbreast = 40;

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

    /// <summary>
    /// Blocks of one length laid end to end, eight at a time, a block to a lane: each is summed in the order of its samples, so that the
    /// figures are the scalar form's to the last bit. Eight blocks with something missing among them go through that form.
    /// </summary>
    /// <param name="samples">As many blocks as the results hold.</param>
    /// <param name="length">Samples in each block.</param>
    /// <param name="mean">One a block, as <paramref name="min"/> and <paramref name="max"/>.</param>
    /// <param name="min">Least valid sample.</param>
    /// <param name="max">Largest valid sample.</param>
    /// <returns>Some block holds one value only.</returns>
    public static bool Abreast(ReadOnlySpan<float> samples, int length, Span<float> mean, Span<float> min, Span<float> max)
    {
        var flat = false;
        if (mean.Length < Lanes || length is < LeastAbreast or > MostAbreast || !Avx.IsSupported) return Singly(samples, length, 0, mean.Length, mean, min, max);
        ref var first = ref MemoryMarshal.GetReference(samples[..(length * mean.Length)]);
        for (var b = 0; b < mean.Length; b += Lanes)
        {
            var from = Math.Min(b, mean.Length - Lanes); // the last eight may take some blocks a second time
            if (Eight(ref Unsafe.Add(ref first, from * length), length, out var sum, out var least, out var most))
            {
                (sum / length).CopyTo(mean[from..]);
                least.CopyTo(min[from..]);
                most.CopyTo(max[from..]);
                flat |= Vector256.EqualsAny(least, most);
            }
            else flat |= Singly(samples, length, from, from + Lanes, mean, min, max);
        }
        return flat;
    }

    private static bool Singly(ReadOnlySpan<float> samples, int length, int from, int to, Span<float> mean, Span<float> min, Span<float> max)
    {
        var flat = false;
        for (var b = from; b < to; b++)
        {
            (mean[b], min[b], max[b]) = Scalar(samples.Slice(b * length, length));
            flat |= min[b] == max[b];
        }
        return flat;
    }

    /// <returns>Whether all sums are numbers.</returns>
    private static bool Eight(ref float first, int length, out Vector256<float> sum, out Vector256<float> min, out Vector256<float> max)
    {
        (sum, min, max) = (Vector256<float>.Zero, Vector256.Create(float.PositiveInfinity), Vector256.Create(float.NegativeInfinity));
        var (total, least, most) = (sum, min, max);
        for (var i = 0; i < length; i += 4)
        {
            // The last four may begin with samples seen before: the extremes do not mind, the sum leaves them out.
            var (at, seen) = i + 4 <= length ? (i, 0) : (length - 4, i + 4 - length);
            var (a, b, c, d) = Turned(ref Unsafe.Add(ref first, at), (nuint)length);
            if (seen == 0) total += a;
            if (seen <= 1) total += b;
            if (seen <= 2) total += c;
            total += d;
            least = Vector256.MinNative(least, Vector256.MinNative(Vector256.MinNative(a, b), Vector256.MinNative(c, d)));
            most = Vector256.MaxNative(most, Vector256.MaxNative(Vector256.MaxNative(a, b), Vector256.MaxNative(c, d)));
        }
        (sum, min, max) = (total, least, most);
        return Vector256.EqualsAll(total - total, Vector256<float>.Zero);
    }

    /// <summary>Four samples of each of eight rows, turned so that each vector holds one sample of every row.</summary>
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static (Vector256<float>, Vector256<float>, Vector256<float>, Vector256<float>) Turned(ref float first, nuint stride)
    {
        var (r0, r1) = (Rows(ref first, 0, stride), Rows(ref first, 1, stride));
        var (r2, r3) = (Rows(ref first, 2, stride), Rows(ref first, 3, stride));
        var (low01, low23) = (Avx.UnpackLow(r0, r1), Avx.UnpackLow(r2, r3));
        var (high01, high23) = (Avx.UnpackHigh(r0, r1), Avx.UnpackHigh(r2, r3));
        return (Avx.Shuffle(low01, low23, 0x44), Avx.Shuffle(low01, low23, 0xEE), Avx.Shuffle(high01, high23, 0x44), Avx.Shuffle(high01, high23, 0xEE));
    }

    /// <summary>Four samples of a row beside those of the fourth row after it.</summary>
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static Vector256<float> Rows(ref float first, nuint row, nuint stride) =>
        Vector256.Create(Vector128.LoadUnsafe(ref first, row * stride), Vector128.LoadUnsafe(ref first, (row + 4) * stride));

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
