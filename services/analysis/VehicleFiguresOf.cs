using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Changes;
using WearWatch.Diagnosis.Chassis;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Wear;
using WearWatch.Storage.Facts;

namespace WearWatch.Analysis;

/// <summary>Brings a vehicle's facts into the form the computation takes.</summary>
internal static class VehicleFiguresOf
{
    /// <summary>The vehicle as the computation takes it: what contradicts itself in its chassis data is replaced, and said.</summary>
    public static (VehicleFacts Vehicle, IReadOnlyList<CannotTell> Problems) Checked(VehicleFacts v, DepotSettings? settings)
    {
        var check = ChassisCheck.Of(v.Vehicle, [.. settings?.Tolerances.Select(t => t.Body) ?? []]);
        return (v with { Vehicle = check.Vehicle }, check.Problems);
    }

    public static VehicleTread Tread(VehicleFacts v, DepotSettings? settings) => new()
    {
        Vehicle = v.Vehicle,
        Depot = v.Depot,
        // A survey that is held counts too, but only as far as its most probable explanation carries it.
        Surveys = [.. v.Surveys.Concat(v.HeldSurveys).Select(s => new StoredSurvey(s.FactId, s.Body))],
        Fittings = [.. v.Fittings.Select(f => f.Body)],
        Tyres = [.. v.Tyres.Select(t => t.Body)],
        AdjustedAt = v.WorkshopRecords.LastOrDefault(w => w.Body.Result == WorkshopResult.Adjusted || w.Body.Angles.Any(a => a.AfterDeg is not null))?.At,
        Limits = Limits(settings),
        Settings = [.. settings?.Settings.Select(s => s.Body) ?? []],
    };

    public static IReadOnlyList<DepthLimitFact> Limits(DepotSettings? settings) => [.. settings?.Limits.Select(l => l.Body) ?? []];

    public static VehicleFigures Figures(VehicleFacts v, DepotSettings? settings, VehicleWearResult wear, SteeringFigures? steering, DateOnly asOf, IReadOnlyList<DatedChange>? changes = null) => new()
    {
        Vehicle = v.Vehicle,
        Depot = v.Depot,
        AsOf = asOf,
        Tyres = wear.Tyres,
        Wear = wear.History,
        Steering = steering,
        Changes = changes ?? [],
        Route = v.Route,
        DriverReports = [.. v.DriverReports.Select(r => r.Body)],
        WorkshopRecords = [.. v.WorkshopRecords.Select(r => r.Body)],
        Tolerances = [.. settings?.Tolerances.Select(t => t.Body).Where(t => t.From <= asOf && t.PlusMinus > 0) ?? []],
    };
}
