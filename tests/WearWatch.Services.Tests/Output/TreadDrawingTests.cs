using WearWatch.Contracts.V1;
using WearWatch.Output;

namespace WearWatch.Services.Tests.Output;

public class TreadDrawingTests
{
    private static TyreDiagnosis Tyre() => new()
    {
        Position = "1L",
        LimitMm = 1.6,
        GoverningGroove = 1,
        DepthMm = new() { Value = 4, Low = 3.8, High = 4.2, Unit = "mm" },
        RemainingKm = new() { Value = 20_000, Low = 15_000, High = 30_000, Unit = "km" },
        Grooves = { new TreadGroove { Groove = 1, DepthMm = 4 }, new TreadGroove { Groove = 2, DepthMm = 6 }, new TreadGroove { Groove = 3, DepthMm = 8 } },
        Points = { new WearPoint { DistanceKm = 100_000, DepthMm = 8 }, new WearPoint { DistanceKm = 120_000, DepthMm = 6 }, new WearPoint { DistanceKm = 140_000, DepthMm = 4 } },
    };

    [Fact]
    public void The_tread_is_drawn_to_one_scale_with_the_limit_through_every_groove()
    {
        var bars = TreadDrawing.Lines(Tyre(), 8).Skip(1).Take(3).ToList();
        // 64 columns for 8 mm: 8 a mm; the limit of 1.6 mm stands in the 13th column of the bars.
        Assert.Equal(new[] { 32, 48, 64 }, bars.Select(b => b.Count(c => c is '=' or '|')));
        Assert.All(bars, b => Assert.Equal(8 + 12, b.IndexOf('|')));
        Assert.StartsWith(" out  1 ", bars[0]);
        Assert.StartsWith("  in  3 ", bars[2]);
    }

    [Fact]
    public void The_fan_opens_from_the_last_reading_and_reaches_the_limit_between_its_bounds()
    {
        var lines = TreadDrawing.Lines(Tyre(), 8).Skip(5).Take(8).ToList();
        Assert.Equal(3, lines.Sum(l => l.Count(c => c == 'o')));
        var limit = lines[^1];
        Assert.Contains("1.6", limit);
        // 100 000 to 170 000 km on 64 columns: the middle meets the limit at 160 000 km, and the fan is open there.
        var meets = limit.IndexOf('*') - 9;
        Assert.InRange(meets, (int)(64 * 0.78), (int)(64 * 0.87));
        Assert.InRange(limit.IndexOf(':') - 9, (int)(64 * 0.7), meets - 1);
    }

    [Fact]
    public void Every_line_is_plain_and_fits_80_columns()
    {
        var lines = TreadDrawing.Lines(Tyre(), 30);
        Assert.NotEmpty(lines);
        Assert.All(lines, l => Assert.True(l.Length <= 80 && l.All(c => c is >= ' ' and <= '~'), l));
    }

    [Fact]
    public void A_tyre_below_its_limit_and_one_without_readings_are_drawn_as_far_as_they_are_known()
    {
        var worn = Tyre();
        worn.RemainingKm = new() { Value = 0, Low = 0, High = 0, Unit = "km" };
        worn.Points[2].DepthMm = 1.2;
        Assert.DoesNotContain(TreadDrawing.Lines(worn, 8).Skip(5), l => l.StartsWith("        ", StringComparison.Ordinal) && l.Contains('*'));
        Assert.Empty(TreadDrawing.Lines(new TyreDiagnosis { Position = "2L" }, 8));
    }
}
