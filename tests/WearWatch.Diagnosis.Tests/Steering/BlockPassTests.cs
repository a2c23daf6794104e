using CsCheck;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Steering;

public class BlockPassTests
{
    private static readonly Gen<float[]> Samples = Gen.Frequency((9, Gen.Float[-500, 500]), (1, Gen.Const(float.NaN))).Array[0, 130];

    [Fact]
    public void Vector_pass_agrees_with_its_scalar_twin() => Samples.Sample(samples =>
    {
        var (fast, plain) = (BlockPass.Vectorised(samples), BlockPass.Scalar(samples));
        Assert.Equal(float.IsNaN(plain.Mean), float.IsNaN(fast.Mean));
        if (float.IsNaN(plain.Mean)) return;
        Assert.Equal(plain.Mean, fast.Mean, 1e-3);
        Assert.Equal(plain.Min, fast.Min);
        Assert.Equal(plain.Max, fast.Max);
    });

    [Fact]
    public void A_block_with_more_than_half_missing_is_missing()
    {
        Assert.True(float.IsNaN(BlockPass.Vectorised([1, float.NaN, float.NaN]).Mean));
        Assert.Equal(1.5f, BlockPass.Vectorised([1, 2, float.NaN, float.NaN]).Mean);
        Assert.True(float.IsNaN(BlockPass.Vectorised([]).Mean));
    }

    [Fact]
    public void Blocks_taken_eight_abreast_equal_the_scalar_twin_to_the_last_bit() =>
        Gen.Select(Gen.Int[1, 45], Gen.Int[0, 30], Gen.Int[0, 3], Gen.Int[0, 1000]).Sample((length, blocks, missingIn1000, seed) =>
        {
            var random = new Random(seed);
            var samples = Enumerable.Range(0, length * blocks).Select(_ => random.Next(1000) < missingIn1000 ? float.NaN : (float)(1000 * random.NextDouble() - 500)).ToArray();
            var (mean, min, max) = (new float[blocks], new float[blocks], new float[blocks]);
            BlockPass.Abreast(samples, length, mean, min, max);
            for (var b = 0; b < blocks; b++)
                Assert.Equal(BlockPass.Scalar(samples.AsSpan(b * length, length)), new BlockSummary(mean[b], min[b], max[b]));
        });

    [Fact]
    public void A_flat_block_among_others_is_noticed()
    {
        var samples = Enumerable.Range(0, 110).Select(i => i / 10 == 9 ? 3f : i % 7).ToArray();
        Assert.True(BlockPass.Abreast(samples, 10, new float[11], new float[11], new float[11]));
        samples[95] = 4;
        Assert.False(BlockPass.Abreast(samples, 10, new float[11], new float[11], new float[11]));
    }
}
