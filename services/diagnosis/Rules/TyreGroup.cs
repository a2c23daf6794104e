using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>Tyres of one axle that share a condition.</summary>
internal static class TyreGroup
{
    public static IReadOnlyList<TyreFigures> On(VehicleFigures figures, Axle axle, Func<TyreFigures, bool> condition) =>
        [.. figures.Tyres.Where(t => t.Position.Axle == axle.Number && condition(t)).OrderBy(t => t.Position)];

    /// <summary>Tyre with the largest figure; of equal figures the surer one. Null when none has it.</summary>
    public static TyreFigures? Worst(IReadOnlyList<TyreFigures> tyres, Func<TyreFigures, Estimate?> figure) =>
        tyres.Where(t => figure(t) is not null).MaxBy(t => (Math.Abs(figure(t)!.Value.Value), -figure(t)!.Value.StandardError));

    public static Side? CommonSide(IReadOnlyList<TyreFigures> tyres) =>
        tyres.All(t => t.Position.Side == tyres[0].Position.Side) ? tyres[0].Position.Side : null;

    public static Dual? CommonDual(Axle axle, IReadOnlyList<TyreFigures> tyres) =>
        axle.Duals && tyres.All(t => t.Position.Dual == tyres[0].Position.Dual) ? tyres[0].Position.Dual : null;

    /// <summary><c>left steer tyre and right steer tyre</c>.</summary>
    public static string Words(Vehicle vehicle, IReadOnlyList<TyreFigures> tyres)
    {
        var words = tyres.Select(t => TradeWords.Tyre(vehicle, t.Position)).ToList();
        return words.Count == 1 ? words[0] : $"{string.Join(", ", words[..^1])} and {words[^1]}";
    }
}
