using System.Text.Json;
using WearWatch.Proving.Run;

namespace WearWatch.Proving.Tests;

/// <summary>One small fleet through the whole proving ground. It must run and print its figures; how good they are is no test's matter.</summary>
public sealed class ShortFormTests
{
    private static readonly Dictionary<string, string[]> s_figures = new()
    {
        ["verdict"] = ["auc", "precision_at_k", "calibration_error", "first_cause", "first_two_causes", "angle_coverage", "lookalike_false_alarms", "ranking_regret", "truly_misaligned_in_first_ten"],
        ["tread"] = ["remaining_distance_coverage", "remaining_distance_median_error", "swap_found", "swap_false_alarms", "unit_found", "tyre_change_found", "one_edge_on_sound"],
        ["steering"] = ["steering_pull_coverage", "off_centre_coverage", "crown_removed", "change_date_error_days", "changes_found", "false_changes_per_vehicle_year"],
    };

    [Fact]
    public async Task A_small_fleet_is_proved_from_simulation_to_figures()
    {
        var folder = Path.Combine(Path.GetTempPath(), $"wearwatch-proving-{Guid.NewGuid():N}");
        try
        {
            var options = Options.Read(["verdict", "--seeds", "1", "--first", "5", "--vehicles", "24", "--max-samples", "120000", "--keep", folder]);
            var cases = await Fleets.Run(options, _ => { }, CancellationToken.None);
            Assert.Equal(24, cases.Count);
            Assert.All(cases, c => Assert.NotNull(c.Diagnosis));
            Assert.All(cases, c => Assert.InRange(c.Best!.Probability, 0, 1));
            Assert.InRange(JsonDocument.Parse(Figures.Report.Of("verdict", cases, TimeSpan.Zero).Json()).RootElement.GetProperty("auc").GetProperty("best").GetProperty("value").GetDouble(), 0.5, 1);
            Assert.Equal(Enumerable.Range(1, 24), cases.Select(c => c.Rank).Order());
            Assert.All(s_figures, part => AllThere(Figures.Report.Of(part.Key, cases, TimeSpan.Zero), part.Value));
        }
        finally
        {
            if (Directory.Exists(folder)) Fleets.Remove(folder);
        }
    }

    [Theory]
    [InlineData("verdict", "--seeds", "0")]
    [InlineData("verdict", "--seeds")]
    [InlineData("wear")]
    [InlineData("tread", "--colour", "red")]
    [InlineData("tread", "--again", "/there/is/no/such/folder")]
    public void A_line_that_is_not_understood_is_refused(params string[] line) => Assert.Throws<ArgumentException>(() => Options.Read(line));

    private static void AllThere(Figures.Report report, string[] names)
    {
        var json = JsonDocument.Parse(report.Json()).RootElement;
        foreach (var name in names)
        {
            var figure = json.GetProperty(name);
            Assert.Equal(["value", "low", "high", "n"], figure.EnumerateObject().Select(p => p.Name).Take(4));
            if (figure.GetProperty("value").ValueKind == JsonValueKind.Null) continue;
            Assert.True(double.IsFinite(figure.GetProperty("value").GetDouble()), name);
            Assert.Contains(name, report.Table(), StringComparison.Ordinal);
        }
        Assert.True(json.GetProperty("baselines").EnumerateObject().Any());
    }
}
