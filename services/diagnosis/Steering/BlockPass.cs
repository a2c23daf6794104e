using System.Numerics;
using System.Runtime.InteropServices;

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
    private const int ShortestVectors = 3;

    public static BlockSummary Vectorised(ReadOnlySpan<float> samples)
    {
        var width = Vector<float>.Count;
        if (samples.Length < ShortestVectors * width) return Scalar(samples); // the lanes would cost more to gather than they save
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
