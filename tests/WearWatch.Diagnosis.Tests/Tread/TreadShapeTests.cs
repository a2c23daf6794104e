using CsCheck;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Tests.Tread;

public class TreadShapeTests
{
    private static TyreReadings Tyre(params double[] depths) => new() { Position = new(1, Side.Left), Depths = [.. depths.Select((d, i) => new GrooveDepth(i + 1, d))] };

    [Fact]
    public void Three_grooves_give_mean_edge_and_shoulder_exactly()
    {
        var shape = TreadShape.Of(Tyre(6, 8, 7), 0.1, newDepthMm: 9)!;
        Assert.Equal(7, shape.MeanDepthMm.Value, 1e-9);
        Assert.Equal(2, shape.MeanLossMm!.Value.Value, 1e-9);
        Assert.Equal(1, shape.EdgeMm!.Value.Value, 1e-9);
        Assert.Equal(8 - 6.5, shape.ShoulderMm!.Value.Value, 1e-9);
    }

    [Fact]
    public void An_outboard_shoulder_worn_more_has_a_positive_edge() =>
        Assert.True(TreadShape.Of(Tyre(5, 6, 7, 8), 0.1)!.EdgeMm!.Value.Value > 0);

    [Fact]
    public void Turning_the_grooves_round_turns_the_edge_and_nothing_else() =>
        Gen.Double[1, 20].Array[2, 8].Sample(depths =>
        {
            var a = TreadShape.Of(Tyre(depths), 0.1)!;
            var b = TreadShape.Of(Tyre([.. depths.Reverse()]), 0.1)!;
            Assert.Equal(a.EdgeMm!.Value.Value, -b.EdgeMm!.Value.Value, 1e-9);
            Assert.Equal(a.MeanDepthMm.Value, b.MeanDepthMm.Value, 1e-9);
            Assert.Equal(a.ShoulderMm?.Value ?? 0, b.ShoulderMm?.Value ?? 0, 1e-9);
        });

    [Fact]
    public void A_depth_added_to_all_grooves_moves_the_mean_alone() =>
        Gen.Select(Gen.Double[1, 20].Array[3, 8], Gen.Double[0, 5]).Sample((depths, more) =>
        {
            var a = TreadShape.Of(Tyre(depths), 0.1)!;
            var b = TreadShape.Of(Tyre([.. depths.Select(d => d + more)]), 0.1)!;
            Assert.Equal(a.MeanDepthMm.Value + more, b.MeanDepthMm.Value, 1e-9);
            Assert.Equal(a.EdgeMm!.Value.Value, b.EdgeMm!.Value.Value, 1e-9);
            Assert.Equal(a.ShoulderMm!.Value.Value, b.ShoulderMm!.Value.Value, 1e-8);
        });

    [Fact]
    public void One_depth_gives_a_mean_and_no_shape()
    {
        var shape = TreadShape.Of(new TyreReadings { Position = new(1, Side.Left), Depths = [new(0, 7)] }, 0.79375)!;
        Assert.Equal(7, shape.MeanDepthMm.Value);
        Assert.True(shape.MeanDepthMm.StandardError > GaugeNoise.Quantisation(0.79375));
        Assert.Null(shape.EdgeMm);
        Assert.Null(shape.ShoulderMm);
        Assert.Null(shape.RoundVariationMm);
        Assert.Null(shape.FeatherMm);
    }

    [Fact]
    public void A_missing_groove_costs_certainty_not_the_shape()
    {
        var whole = TreadShape.Of(Tyre(6, 7, 7, 6.5), 0.1)!;
        var partial = TreadShape.Of(new TyreReadings { Position = new(1, Side.Left), Depths = [new(1, 6), new(2, 7), new(4, 6.5)] }, 0.1, grooves: 4)!;
        Assert.True(partial.MeanDepthMm.StandardError > whole.MeanDepthMm.StandardError);
        Assert.Equal(whole.MeanDepthMm.Value, partial.MeanDepthMm.Value, 0.2);
    }

    [Fact]
    public void Cupping_shows_round_the_tyre()
    {
        GrooveDepth[] Round(double swing) => [.. from g in Enumerable.Range(1, 3) from k in Enumerable.Range(0, 6) select new GrooveDepth(g, 8 + swing * Math.Sin(k * Math.PI / 3), k * 60)];
        var cupped = TreadShape.Of(new TyreReadings { Position = new(1, Side.Left), Depths = Round(1.5) }, 0.1)!;
        var even = TreadShape.Of(new TyreReadings { Position = new(1, Side.Left), Depths = Round(0) }, 0.1)!;
        Assert.True(cupped.RoundVariationMm!.Value.Low > 0.5);
        Assert.Equal(0, even.RoundVariationMm!.Value.Value);
    }

    [Fact]
    public void Edges_that_stand_inboard_give_a_positive_feather()
    {
        // Outboard of a groove lies the inboard edge of the next rib: it stands higher when the wheel ran toe-in.
        var shape = TreadShape.Of(new TyreReadings { Position = new(1, Side.Left), Depths = [new(1, 6, null, 0.4), new(2, 6, null, 0.5), new(3, 6, null, 0.6)] }, 0.1)!;
        Assert.Equal(0.5, shape.FeatherMm!.Value.Value, 1e-9);
    }
}
