using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Geometry;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Causes;

public enum ObservableKind { SteeringPull, WheelAngle, Rate, EdgeSlope, Feather }

/// <summary>One figure that both hangs on the state and on shared unknowns.</summary>
/// <param name="Kind">Steering pull (N·m), wheel angle (deg) or feather (mm).</param>
/// <param name="Tyre">Index into the model's positions; −1 for steering.</param>
/// <param name="Value">In the kind's unit.</param>
/// <param name="Variance">Of the reading and of what stays unexplained, squared unit.</param>
/// <param name="WildSd">SD of a wild reading about zero, in the unit.</param>
public readonly record struct Observable(ObservableKind Kind, int Tyre, double Value, double Variance, double WildSd);

/// <summary>Wear of one place before and after an onset, as share of its normal rate.</summary>
/// <param name="Kind">Rate, or edge slope.</param>
/// <param name="Tyre">Index into the model's positions.</param>
/// <param name="Evidence">What was read of both slopes.</param>
/// <param name="RestSd">What stays unexplained and a place keeps, share of its wear.</param>
/// <param name="AxleSd">The same that both sides of an axle share.</param>
/// <param name="VehicleSd">The same that the whole vehicle shares: its driver, its goods, and what is not known of normal wear.</param>
/// <param name="NormalEdge">Edge slope per unit of wear that is normal for the place and still in the figures.</param>
public readonly record struct WearObservable(ObservableKind Kind, int Tyre, SlopeEvidence Evidence, double RestSd, double AxleSd, double VehicleSd, double NormalEdge);

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
        for (var i = 0; i < model.Positions.Count; i++)
            if (model.Figures.At(model.Positions[i])?.FeatherMm is { } feather)
                rows.Add(Row(ObservableKind.Feather, i, feather, Sensitivities.FeatherRest + 0.2 * StaleWear(model), 0.8));
        return rows;
    }

    /// <summary>Wear around one onset; figures without a history hold for the time since.</summary>
    public static IReadOnlyList<WearObservable> Wear(VehicleModel model, int onset) =>
        model.Figures.Wear is { } history ? [.. Dated(model, history, onset).Where(w => w.Evidence.Tells)] : Undated(model);

    private static IEnumerable<WearObservable> Dated(VehicleModel model, VehicleWearHistory history, int onset)
    {
        for (var i = 0; i < model.Positions.Count; i++)
        {
            if (history.At(model.Positions[i]) is not { } place) continue;
            var (normal, wear) = (place.NormalRateMmPer1000Km, place.ByOnset[onset]);
            var vehicle = Math.Sqrt(Math.Pow(Math.Max(Sensitivities.LogRateVehicle, place.BetweenLogSd), 2) + Math.Pow(place.NormalLogRateSd, 2));
            var axle = model.Figures.Vehicle.AxleAt(model.Positions[i].Axle) is { Lifting: true } ? Sensitivities.LogRateLifting : Sensitivities.LogRateAxle;
            yield return new(ObservableKind.Rate, i, wear.Rate.InUnitsOf(normal), Sensitivities.LogRatePlace, axle, vehicle, 0);
            yield return new(ObservableKind.EdgeSlope, i, wear.Edge.InUnitsOf(normal), Sensitivities.EdgePlace, axle, vehicle, place.NormalEdgePerMm);
        }
    }

    private static List<WearObservable> Undated(VehicleModel model)
    {
        var rows = new List<WearObservable>();
        var stale = StaleWear(model);
        for (var i = 0; i < model.Positions.Count; i++)
        {
            if (model.Figures.At(model.Positions[i]) is not { } tyre) continue;
            var normal = NormalRate(model, tyre);
            if (tyre.LogRateRatio is { } log && Math.Exp(log.Value) is var ratio)
                rows.Add(new(ObservableKind.Rate, i, SlopeEvidence.AfterOnly(ratio, ratio * log.StandardError), Math.Max(Sensitivities.LogRateRest, 0.3 * stale), 0, Sensitivities.LogRateVehicle, 0));
            if (tyre.EdgeSlopeMmPer1000Km is { } slope)
                rows.Add(new(ObservableKind.EdgeSlope, i, SlopeEvidence.AfterOnly(slope.Value / normal, slope.StandardError / normal), Math.Max(Sensitivities.EdgeRest, 0.4 * stale), 0, 0, 0));
        }
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
