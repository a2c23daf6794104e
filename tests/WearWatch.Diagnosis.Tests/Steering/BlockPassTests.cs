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
}
