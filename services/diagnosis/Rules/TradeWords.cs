using System.Globalization;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Rules;

/// <summary>Figures, tyres and axles in the words a technician uses.</summary>
internal static class TradeWords
{
    public const string PerDistance = "mm per 1000 km";

    /// <summary>A number with fixed decimals, never '-0.0'.</summary>
    public static string Number(double value, int decimals)
    {
        var text = value.ToString("F" + decimals.ToString(CultureInfo.InvariantCulture), CultureInfo.InvariantCulture);
        return text.StartsWith('-') && text.AsSpan(1).IndexOfAnyExcept('0', '.') < 0 ? text[1..] : text;
    }

    /// <summary><c>90 % 0.030 to 0.090</c>.</summary>
    public static string Range(Estimate figure, int decimals) => $"90 % {Number(figure.Low, decimals)} to {Number(figure.High, decimals)}";

    /// <summary><c>0.062 mm per 1000 km (90 % 0.030 to 0.090)</c>.</summary>
    public static string Full(Estimate figure, int decimals, string unit) => $"{Number(figure.Value, decimals)} {unit} ({Range(figure, decimals)})";

    /// <summary><c>left 0.062, right 0.055 mm</c>, with 'not measured' where a side is missing.</summary>
    public static string LeftRight(Estimate? left, Estimate? right, int decimals, string unit) =>
        $"left {OrMissing(left, decimals)}, right {OrMissing(right, decimals)} {unit}";

    private static string OrMissing(Estimate? figure, int decimals) => figure is { } f ? Number(f.Value, decimals) : "not measured";

    public static string Word(this Side side) => side == Side.Left ? "left" : "right";

    public static Side Opposite(this Side side) => side == Side.Left ? Side.Right : Side.Left;

    /// <summary>Word for a direction, positive to the left.</summary>
    public static string Direction(double positiveLeft) => positiveLeft > 0 ? "left" : "right";

    /// <summary><c>left steer tyre</c>, <c>right outer tyre of axle 2</c>.</summary>
    public static string Tyre(Vehicle vehicle, Position position)
    {
        var dual = position.Dual switch { Dual.Outer => "outer ", Dual.Inner => "inner ", _ => "" };
        return OnlySteerAxle(vehicle, position.Axle)
            ? $"{position.Side.Word()} {dual}steer tyre"
            : $"{position.Side.Word()} {dual}tyre of axle {position.Axle}";
    }

    /// <summary><c>steer tyres</c>, <c>inner tyres of axle 2</c>.</summary>
    public static string Tyres(Vehicle vehicle, int axle, Dual dual)
    {
        var member = dual switch { Dual.Outer => "outer ", Dual.Inner => "inner ", _ => "" };
        return OnlySteerAxle(vehicle, axle) ? $"{member}steer tyres" : $"{member}tyres of axle {axle}";
    }

    /// <summary>Upper-cases the first letter of a sentence.</summary>
    public static string Sentence(string text) => text.Length == 0 ? text : char.ToUpperInvariant(text[0]) + text[1..];

    private static bool OnlySteerAxle(Vehicle vehicle, int axle) => vehicle.IsFront(axle) && vehicle.Axles.Count(a => vehicle.IsFront(a.Number)) == 1;
}
