using WearWatch.Diagnosis.Changes;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Steering;
using WearWatch.Diagnosis.Tread;
using WearWatch.Diagnosis.Wear;
using WearWatch.Storage.Facts;

namespace WearWatch.Analysis;

/// <summary>Brings facts and runs into the form that the dating of changes takes.</summary>
internal static class VehicleChangesOf
{
    /// <summary>Steering changes of every vehicle with straight runs, on the roads of a fit.</summary>
    public static IReadOnlyList<VehicleChanges> Fleet(IReadOnlyList<VehicleFacts> fleet, ILookup<string, StraightRun> runs, IReadOnlyDictionary<string, TorqueKind> torque, RoadFit roads, ILookup<string, VehicleSteeringStudy> studies)
    {
        var series = new SteeringSeries(roads);
        return [.. fleet.Where(v => runs.Contains(v.Vehicle.VehicleId)).AsParallel().AsOrdered()
            .Select(v => series.Read(Road(v, torque.GetValueOrDefault(v.Vehicle.VehicleId)), [.. runs[v.Vehicle.VehicleId]], Events(v, studies[v.Vehicle.VehicleId].SelectMany(s => s.KerbStrikes))))];
    }

    /// <summary>All changes of one vehicle: those of the fleet fit, what its runs since then raise, and those of its wear.</summary>
    /// <param name="vehicle">Its facts.</param>
    /// <param name="tread">Its surveys.</param>
    /// <param name="fleet">The fit it is judged on.</param>
    /// <param name="since">Runs that came after the fit.</param>
    /// <param name="study">What its streams told beside their runs.</param>
    /// <param name="day">As-of date.</param>
    public static IReadOnlyList<DatedChange> Vehicle(VehicleFacts vehicle, VehicleTread tread, FleetSnapshot fleet, IReadOnlyList<StraightRun> since, VehicleSteeringStudy? study, DateOnly day)
    {
        var events = Events(vehicle, study?.KerbStrikes ?? []);
        var then = fleet.Changes.FirstOrDefault(c => c.VehicleId == vehicle.Vehicle.VehicleId);
        var raised = then is null || since.Count == 0 ? []
            : new SteeringSeries(fleet.Roads).Watch(Road(vehicle, then.Torque), then, since, events, vehicle.Vehicle.KmPerWeek is { } km and > 0 ? km : UsualUse.KmPerWeek(vehicle.Vehicle.Class));
        var wear = WearSeries.Of(tread, fleet.Wear, day, events).SelectMany(ChangeDating.Find);
        return [.. (then?.Changes ?? []).Concat(raised).Concat(wear).OrderBy(c => c.Likely).ThenBy(c => c.Quantity).ThenBy(c => c.Axle)];
    }

    private static RoadVehicle Road(VehicleFacts v, TorqueKind torque) => new(v.Vehicle.VehicleId, v.Vehicle.Class, v.Depot.TrafficSide, torque);

    private static IReadOnlyList<ChangeEvent> Events(VehicleFacts v, IEnumerable<KerbStrikeCandidate> strikes) =>
        ChangeEvents.Of(v.Vehicle, v.Fittings.Select(f => (f.FactId, f.Body)), v.WorkshopRecords.Select(w => (w.FactId, w.Body)), strikes);
}
