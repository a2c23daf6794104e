using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;
using WearWatch.Diagnosis.Wear;
using Xunit.Abstractions;

namespace WearWatch.Diagnosis.Tests.Wear;

public class PlainSurveyTests(ITestOutputHelper output)
{
    private static readonly Vehicle s_truck = new()
    {
        VehicleId = "T1",
        Depot = "north",
        Class = VehicleClass.Truck,
        GrossMassKg = 26000,
        Axles = [new() { Number = 1, Steered = true }, new() { Number = 2, Driven = true, Duals = true }, new() { Number = 3, Driven = true, Duals = true }],
    };

    [Theory]
    [InlineData(1)]
    [InlineData(4)]
    public void What_is_called_plain_is_as_written_when_all_explanations_are_weighed(int grooves)
    {
        var random = new Random(grooves);
        double Normal() => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());
        var positions = s_truck.Positions().ToArray();
        var set = ExplanationSet.Of(s_truck, positions, [1, 2, 3]);
        var (plain, missed, sound, wrong) = (0, 0, 0, 0);
        for (var n = 0; n < 3000; n++)
        {
            var depth = positions.Select(_ => 10 + 2 * random.NextDouble()).ToArray();
            var known = 0.03 + 0.2 * random.NextDouble();
            var expected = positions.Select((_, i) => new TyreExpectation(new(depth[i] + known * Normal(), known), new(0.3, known), new(0.2, known), 5) { NewMm = new(16, 0.6) }).ToArray();
            var (bias, fault) = (0.2 * Normal(), n % 3);
            var written = positions.Select((p, i) =>
            {
                var read = fault == 1 ? Array.IndexOf(positions, p.Mirrored) : i;
                var unit = fault == 2 && n % 2 == 0 ? 1 / GaugeNoise.ThirtySecondInchMm : 1;
                return TreadShape.Of(new()
                {
                    Position = p,
                    Depths = [.. Enumerable.Range(1, grooves).Select(g => new GrooveDepth(grooves == 1 ? 0 : g, unit * (depth[read] + bias + 0.15 * Normal() - 0.15 * TreadShape.Across(g, grooves))))],
                }, 0.1);
            }).ToArray();
            var fits = PlainSurvey.Fits(set, written, expected, 0.2, 0.1);
            var full = SurveyExplanation.Weigh(set, written, expected, 0.2, 0.1);
            var asWritten = full.First(e => e.Explanation.Kind == ExplanationKind.AsWritten).Weight;
            if (fits) plain++;
            if (fits && asWritten < 0.8) missed++;
            if (fault == 0) sound++;
            if (fault == 0 && !fits) wrong++;
        }
        output.WriteLine($"plain {plain}, of them doubtful {missed}; of {sound} sound ones not plain {wrong}");
        Assert.True(missed <= plain / 500, $"{missed} of {plain}");
        Assert.True(wrong < sound / 2, $"{wrong} of {sound} sound ones had to be weighed in full");
    }
}
