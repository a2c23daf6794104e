using System.Globalization;

namespace WearWatch.Diagnosis.Tread;

/// <summary>What a depth was meant to read, had a hand slipped on the keys: two digits transposed, or the decimal point dropped or moved.</summary>
internal static class TypingSlips
{
    /// <summary>Shares of mistyped depths; the rest can be anything. From memory.</summary>
    private const double Transposed = 0.3, PointMoved = 0.2;

    public const double Anything = 1 - Transposed - PointMoved;

    /// <summary>Depths that may have been meant, mm, each with its share.</summary>
    /// <param name="readMm">Depth as stored, mm.</param>
    /// <param name="stepMm">Step of the gauge, mm: its digits are those of the number of steps.</param>
    public static IReadOnlyList<(double MeantMm, double Share)> Of(double readMm, double stepMm)
    {
        // Counts of 1/32 inch are whole numbers on the gauge; mm have the decimals of the step.
        var inches = stepMm > 0.15 && Math.Abs(stepMm / GaugeNoise.ThirtySecondInchMm - Math.Round(stepMm / GaugeNoise.ThirtySecondInchMm)) < 0.01;
        var unit = inches ? GaugeNoise.ThirtySecondInchMm : 1;
        var decimals = inches || stepMm >= 0.95 ? 0 : stepMm >= 0.095 ? 1 : 2;
        var text = (readMm / unit).ToString($"F{decimals}", CultureInfo.InvariantCulture);
        var digits = text.Replace(".", "", StringComparison.Ordinal);
        List<double> swaps = [];
        for (var i = 0; i + 1 < digits.Length; i++)
        {
            if (digits[i] == digits[i + 1]) continue;
            var swapped = $"{digits[..i]}{digits[i + 1]}{digits[i]}{digits[(i + 2)..]}";
            swaps.Add(double.Parse(swapped, CultureInfo.InvariantCulture) / Math.Pow(10, decimals) * unit);
        }
        List<(double, double)> meant = [.. swaps.Select(s => (s, Transposed / swaps.Count))];
        if (decimals > 0 || readMm / unit >= 10) meant.AddRange([(readMm / 10, PointMoved / 2), (readMm * 10, PointMoved / 2)]);
        return meant;
    }
}
