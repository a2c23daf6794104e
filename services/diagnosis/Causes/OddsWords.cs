using System.Globalization;
using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Causes;

/// <summary>How the most probable angle stands against its rivals: 'front total toe 8 to 1 over one-way turning'.</summary>
internal static class OddsWords
{
    /// <summary>Angles less probable than this are not argued about.</summary>
    private const double WorthArguing = 0.05;

    /// <summary>The share kept for the unforeseen bounds what odds mean.</summary>
    private const double MostOdds = 50;

    private const int Rivals = 2;

    public static IReadOnlyList<string> Of(IReadOnlyList<Cause> causes, double misaligned)
    {
        if (causes.FirstOrDefault(c => c.Quantity.IsAngle()) is not { } angle || angle.Probability < WorthArguing) return [];
        var rivals = causes.Where(c => c != angle).OrderByDescending(c => c.Probability).Take(Rivals).Where(c => c.Probability > 0.005).Select(c => Odds(angle, c.Probability, Name(c)));
        return [.. rivals, Odds(angle, 1 - misaligned, "every angle in order")];
    }

    private static string Odds(Cause angle, double rival, string name)
    {
        var (ratio, over) = angle.Probability >= rival ? (angle.Probability / rival, "over") : (rival / angle.Probability, "under");
        var words = ratio < 1.25 ? "even with" : ratio > MostOdds ? $"more than {MostOdds:0} to 1 {over}" : string.Create(CultureInfo.InvariantCulture, $"{(ratio < 3 ? Math.Round(ratio, 1) : Math.Round(ratio)):0.#} to 1 {over}");
        return $"{Name(angle)} {words} {name}";
    }

    public static string Name(Cause c) => Name(c.Quantity) + (c.Axle is { } axle && c.Quantity != Quantity.FrontTotalToe ? $" of axle {axle}" : "") + c.Side switch { Side.Left => " left", Side.Right => " right", _ => "" };

    private static string Name(Quantity quantity) => quantity switch
    {
        Quantity.FrontTotalToe => "front total toe",
        Quantity.RearTotalToe => "total toe",
        Quantity.CamberSplit => "camber split",
        Quantity.CasterSplit => "caster split",
        Quantity.TandemSkew => "tandem skew",
        Quantity.TrailerSkew => "trailer skew",
        Quantity.Drag => "a dragging brake",
        Quantity.Damper => "a worn damper",
        Quantity.Duty => "one-way turning",
        Quantity.SensorZeroOrFrontToeSplit => "the sensor's zero or unequal front toe",
        _ => quantity.ToString().ToLowerInvariant(),
    };
}
