using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Geometry;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Causes;

public enum ObservableKind { SteeringPull, WheelAngle, LogRate, EdgeSlope, Feather }

/// <summary>One figure that both hangs on the state and on shared unknowns.</summary>
/// <param name="Kind">What.</param>
/// <param name="Tyre">Index into the model's positions; −1 for steering.</param>
/// <param name="Value">N·m, deg, logarithm, share of the normal rate, or mm.</param>
/// <param name="Variance">Of the reading and of what stays unexplained, squared unit.</param>
/// <param name="WildSd">SD of a wild reading about zero, in the unit.</param>
public readonly record struct Observable(ObservableKind Kind, int Tyre, double Value, double Variance, double WildSd);

/// <summary>Turns a vehicle's figures into observables; what is null is left out.</summary>
public static class Observables
{
    public static IReadOnlyList<Observable> Of(VehicleModel model)
    {
        var rows = new List<Observable>();
        var steering = model.Figures.Steering;
        if (!model.IsTrailer && steering?.SteeringPullNm is { } pull)
            rows.Add(Row(ObservableKind.SteeringPull, -1, pull, Sensitivities.TorqueRest * Math.Max(0.3, model.AssistShare), 3 * Math.Max(0.3, model.AssistShare)));
        if (!model.IsTrailer && steering?.OffCentreDeg is { } angle)
            rows.Add(Row(ObservableKind.WheelAngle, -1, angle, Sensitivities.WheelAngleRest, 15));
        var stale = StaleWear(model);
        for (var i = 0; i < model.Positions.Count; i++)
            if (model.Figures.At(model.Positions[i]) is { } tyre) AddTyre(rows, model, i, tyre, stale);
        return rows;
    }

    /// <summary>Normal wear of a tyre's place, mm per 1000 km: its own rate with its departure taken out, else the class's.</summary>
    public static double NormalRate(VehicleModel model, TyreFigures? tyre)
    {
        if (tyre?.NormalRateMmPer1000Km is { } normal) return normal;
        if (tyre is { RateMmPer1000Km: { Value: > 0 } own, LogRateRatio: { } ratio }) return own.Value * Math.Exp(-ratio.Value);
        var axle = tyre?.Position.Axle ?? 2;
        return axle == 1 && !model.IsTrailer ? model.Class.FrontRate : model.Class.RearRate;
    }

    private static void AddTyre(List<Observable> rows, VehicleModel model, int index, TyreFigures tyre, double stale)
    {
        if (tyre.LogRateRatio is { } ratio)
            rows.Add(Row(ObservableKind.LogRate, index, ratio, Math.Max(Sensitivities.LogRateRest, 0.3 * stale), 1.5));
        if (tyre.EdgeSlopeMmPer1000Km is { } slope)
            rows.Add(Row(ObservableKind.EdgeSlope, index, slope * (1 / NormalRate(model, tyre)), Math.Max(Sensitivities.EdgeRest, 0.4 * stale), 2));
        if (tyre.FeatherMm is { } feather)
            rows.Add(Row(ObservableKind.Feather, index, feather, Sensitivities.FeatherRest + 0.2 * stale, 0.8));
    }

    private static Observable Row(ObservableKind kind, int tyre, Estimate estimate, double rest, double wildSd) =>
        new(kind, tyre, estimate.Value, estimate.StandardError * estimate.StandardError + rest * rest,
            Math.Sqrt(wildSd * wildSd + estimate.StandardError * estimate.StandardError));

    /// <summary>1 right after an adjustment, when the tread still shows the old angles, falling to 0 over four months (from memory).</summary>
    internal static double StaleWear(VehicleModel model)
    {
        var adjusted = model.Figures.WorkshopRecords
            .Where(r => r.Result == WorkshopResult.Adjusted || r.Angles.Any(a => a.AfterDeg is not null))
            .Select(r => model.Figures.AsOf.DayNumber - DateOnly.FromDateTime(r.At.UtcDateTime).DayNumber)
            .Where(days => days >= 0).DefaultIfEmpty(int.MaxValue).Min();
        return Math.Clamp(1 - adjusted / 120.0, 0, 1);
    }

    /// <summary>Outboard less inboard wear as share of the normal rate, and its derivatives by slip and by camber.</summary>
    internal static (double Value, double BySlip) EdgeOfSlip(double z) =>
        (Sensitivities.EdgeShare * WearMultiplier.Signed(z), Sensitivities.EdgeShare * WearMultiplier.SignedSlope(z));
}
