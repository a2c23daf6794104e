using System.Security.Cryptography;
using System.Text;
using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;
using WearWatch.Diagnosis.Unusual;
using WearWatch.Diagnosis.Wear;
using WearWatch.Storage.Analysis;
using WearWatch.Storage.Facts;

namespace WearWatch.Analysis;

/// <summary>Makes fleet snapshots from all facts up to a day; a function of those facts alone.</summary>
internal sealed class FleetFitting(FactReader facts, RunStore runs, TimeProvider clock)
{
    /// <summary>Workshop records older than this, in days before the as-of date, no longer anchor the steering's zero.</summary>
    private const int InOrderDays = 180;

    /// <summary>Vehicles of a class from which its fault rates are learnt, at most.</summary>
    private const int FaultSample = 150;

    /// <summary>Straight runs that suffice to tell how a vehicle steers now.</summary>
    private const int PresentRuns = 20;

    /// <summary>Marks the vehicle as it was before; no id may hold a blank.</summary>
    private const string AsItWas = " before";

    /// <summary>The snapshot as of a day, or as of the newest fact (never in the future) where none is given.</summary>
    /// <returns>The snapshot, and how many vehicles and straight runs it rests on.</returns>
    public async Task<(FleetSnapshot Snapshot, int Vehicles, int Runs)> Make(DateOnly? asOf, CancellationToken cancel)
    {
        var fleet = await facts.LoadFleet(asOf, cancel);
        var settings = await facts.LoadSettings(cancel);
        var day = asOf ?? AsOf(fleet);
        var straight = await runs.Fleet(day.AddDays(1).ToDateTime(TimeOnly.MinValue, DateTimeKind.Utc), cancel);
        var studies = await runs.Studies(cancel);
        var snapshot = await Task.Run(() => Fit([.. fleet.Select(v => VehicleFiguresOf.Checked(v, settings.GetValueOrDefault(v.Depot.DepotId)).Vehicle)], settings, straight, studies, day), cancel);
        return (snapshot, fleet.Count, straight.Count);
    }

    private DateOnly AsOf(IReadOnlyList<VehicleFacts> fleet)
    {
        var newest = fleet.Max(v => v.FactsThrough) ?? DateTimeOffset.UnixEpoch;
        var now = clock.GetUtcNow();
        return DateOnly.FromDateTime((newest < now ? newest : now).UtcDateTime);
    }

    private static FleetSnapshot Fit(IReadOnlyList<VehicleFacts> fleet, IReadOnlyDictionary<string, DepotSettings> settings, IReadOnlyList<StraightRun> straight, IReadOnlyList<VehicleSteeringStudy> studies, DateOnly day)
    {
        var torque = TorqueKinds(straight, studies);
        var roads = Roads(fleet, straight, torque, day);
        var tread = fleet.Select(v => VehicleFiguresOf.Tread(v, settings.GetValueOrDefault(v.Depot.DepotId))).ToList();
        var wear = FleetWear.Fit(tread, day);
        var figures = fleet.AsParallel().AsOrdered()
            .Select((v, i) => VehicleFiguresOf.Figures(v, settings.GetValueOrDefault(v.Depot.DepotId), VehicleWear.Estimate(tread[i], wear, day), roads.Of(v.Vehicle.VehicleId), day))
            .ToList();
        return new FleetSnapshot { AsOf = day, Wear = wear, Roads = roads, Unusual = UnusualVehicles.Fit(figures), Faults = Faults(figures), Rubs = HandRubs.Fit(tread), Changes = VehicleChangesOf.Fleet(fleet, straight.ToLookup(r => r.VehicleId), torque, roads, studies.ToLookup(s => s.VehicleId)) };
    }

    /// <summary>Fault rates from a sample of each class, the same whatever the order of the fleet.</summary>
    private static FaultRates Faults(IReadOnlyList<VehicleFigures> figures) => FaultRates.Fit(
    [
        .. figures.GroupBy(f => f.Vehicle.Class)
            .SelectMany(c => c.OrderBy(f => SHA256.HashData(Encoding.UTF8.GetBytes(f.Vehicle.VehicleId)), Comparer<byte[]>.Create((a, b) => a.AsSpan().SequenceCompareTo(b))).Take(FaultSample))
            .AsParallel().AsOrdered().Select(f => (f.Vehicle.Class, CauseEstimate.Judge(f, FaultPriors.Default))),
    ]);

    /// <summary>
    /// Roads keep their bank, a vehicle does not keep its alignment. So each vehicle enters twice: as it is now (the last
    /// weeks, but never from before an alignment) and as it was, which only helps to measure the roads.
    /// </summary>
    private static RoadFit Roads(IReadOnlyList<VehicleFacts> fleet, IReadOnlyList<StraightRun> straight, Dictionary<string, TorqueKind> torque, DateOnly day)
    {
        var runs = new List<StraightRun>(straight.Count);
        var vehicles = new List<RoadVehicle>();
        var byVehicle = straight.ToLookup(r => r.VehicleId);
        foreach (var v in fleet)
        {
            var now = RoadVehicle(v, torque.GetValueOrDefault(v.Vehicle.VehicleId), day);
            vehicles.Add(now);
            var since = PresentSince(v, byVehicle[now.VehicleId], day);
            var before = now with { VehicleId = now.VehicleId + AsItWas, FoundInOrder = false, SameAs = now.VehicleId };
            foreach (var run in byVehicle[now.VehicleId]) runs.Add(run.Start >= since ? run : run with { VehicleId = before.VehicleId });
            if (byVehicle[now.VehicleId].Any(r => r.Start < since)) vehicles.Add(before);
        }
        var fit = RoadModel.Fit(runs, vehicles);
        var was = fit.Vehicles.Where(v => v.VehicleId.EndsWith(AsItWas, StringComparison.Ordinal)).ToDictionary(v => v.VehicleId);
        return fit with { Vehicles = [.. fit.Vehicles.Where(v => !was.ContainsKey(v.VehicleId)).Select(AtLastTrip).Select(v => was.TryGetValue(v.VehicleId + AsItWas, out var before) ? Changed(v, before, DaysAgo(byVehicle[v.VehicleId].Min(r => r.Start), day)) : v)] };
    }

    private static SteeringFigures AtLastTrip(SteeringFigures v) => v with { SteeringPullNm = v.SteeringPullLatestNm, OffCentreDeg = v.OffCentreLatestDeg };

    private static double DaysAgo(DateTimeOffset time, DateOnly day) => (new DateTimeOffset(day, TimeOnly.MinValue, TimeSpan.Zero) - time).TotalDays;

    private static SteeringFigures Changed(SteeringFigures now, SteeringFigures before, double earliest)
    {
        static Estimate? Less(Estimate? a, Estimate? b) => a is { } x && b is { } y ? x - y : null;
        return before.Runs < PresentRuns ? now : now with
        {
            SteeringPullChangeNm = Less(now.SteeringPullNm, before.SteeringPullNm),
            OffCentreChangeDeg = Less(now.OffCentreDeg, before.OffCentreDeg),
            EarliestDaysAgo = earliest,
        };
    }

    private static DateTimeOffset PresentSince(VehicleFacts v, IEnumerable<StraightRun> runs, DateOnly day)
    {
        var alignment = v.WorkshopRecords.LastOrDefault(w => w.Body.Result == WorkshopResult.Adjusted)?.At ?? DateTimeOffset.MinValue;
        var window = new DateTimeOffset(day.AddDays(-SteeringFigures.PresentDays), TimeOnly.MinValue, TimeSpan.Zero);
        // A vehicle that hardly drove of late is judged on what there is since its alignment.
        var since = runs.Count(r => r.Start >= window) >= PresentRuns ? window : DateTimeOffset.MinValue;
        return since > alignment ? since : alignment;
    }

    private static RoadVehicle RoadVehicle(VehicleFacts v, TorqueKind torque, DateOnly day) =>
        new(v.Vehicle.VehicleId, v.Vehicle.Class, v.Depot.TrafficSide, torque, FoundInOrder(v, day));

    private static bool FoundInOrder(VehicleFacts v, DateOnly day) =>
        v.WorkshopRecords.LastOrDefault() is { Body.Result: WorkshopResult.InOrder } last && last.At >= new DateTimeOffset(day.AddDays(-InOrderDays), TimeOnly.MinValue, TimeSpan.Zero);

    /// <summary>What each vehicle's torque is: the sum where assist was logged beside it, else the torsion bar alone; never a raw number.</summary>
    private static Dictionary<string, TorqueKind> TorqueKinds(IReadOnlyList<StraightRun> straight, IReadOnlyList<VehicleSteeringStudy> studies)
    {
        var kinds = studies.GroupBy(s => s.VehicleId).ToDictionary(g => g.Key, g => g.Any(s => s.ChannelsPresent.Contains(SteeringChannel.DriverTorque)) ? TorqueKind.UnknownUnit : TorqueKind.None);
        foreach (var vehicle in straight.Where(r => r.TorqueNm is not null).GroupBy(r => r.VehicleId))
            kinds[vehicle.Key] = vehicle.Count(r => r.TorqueIncludesAssist) * 2 > vehicle.Count() ? TorqueKind.Total : TorqueKind.TorsionBar;
        return kinds;
    }
}
