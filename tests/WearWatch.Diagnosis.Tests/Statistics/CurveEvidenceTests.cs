using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tests.Statistics;

public class CurveEvidenceTests
{
    [Fact]
    public void Run_in_of_sliding_metal_refuses_a_straight_line()
    {
        // Meeker and Escobar 1998, sliding metal wear: every unit runs in, its curve is concave.
        var d = ReferenceData.Read("metal_wear.csv");
        foreach (var unit in d["unit"].Distinct())
        {
            var rows = Enumerable.Range(0, d["unit"].Length).Where(i => d["unit"][i] == unit).ToArray();
            Assert.True(CurveEvidence.Bent([.. rows.Select(i => d["cycles"][i])], [.. rows.Select(i => d["microns"][i])]), $"unit {unit}");
        }
    }

    [Fact]
    public void Depth_against_distance_on_a_straight_line_is_not_called_bent()
    {
        // NIST StRD Norris, a certified straight line.
        var d = ReferenceData.Read("norris.csv");
        Assert.False(CurveEvidence.Bent(d["x"], d["y"]));
    }

    [Fact]
    public void Four_readings_never_show_a_curve() => Assert.Null(CurveEvidence.Gain([0, 1, 2, 3], [0, 1, 4, 9]));
}
