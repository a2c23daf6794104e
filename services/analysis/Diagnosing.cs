using Microsoft.Extensions.Logging;
using Npgsql;
using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Money;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Steering;
using WearWatch.Diagnosis.Tread;
using WearWatch.Diagnosis.Wear;
using WearWatch.Storage;
using WearWatch.Storage.Analysis;
using WearWatch.Storage.Facts;

namespace WearWatch.Analysis;

/// <summary>Diagnoses due vehicles on the latest fleet snapshot and publishes what was found.</summary>
internal sealed partial class Diagnosing(FactReader facts, FleetFitStore fits, DiagnosisStore store, RunStore runs, FleetFitting fitting, TimeProvider clock, ILogger<Diagnosing> log)
{
    /// <summary>Raised when any stage of the diagnosis changes, so that every vehicle becomes due.</summary>
    public const string Method = "diagnosis-5";

    private const int Batch = 16;

    private (long Id, FleetSnapshot Snapshot)? _latest;

    /// <returns>How many vehicles were diagnosed.</returns>
    public async Task<int> Some(CancellationToken cancel)
    {
        if (await Latest(cancel) is not { } fit) return 0;
        await using var claim = await store.Claim(fit.Id, Method, Batch, cancel);
        if (claim.Due.Count == 0) return 0;
        var settings = await facts.LoadSettings(cancel);
        foreach (var due in claim.Due)
        {
            try
            {
                if (await facts.LoadVehicle(due.VehicleId, null, cancel) is not { } vehicle) throw new InvalidDataException("the vehicle has no record that holds");
                var open = await claim.OpenFindings(due, cancel);
                var since = await Since(vehicle.Vehicle.VehicleId, [.. settings.Keys], fit.Snapshot, cancel);
                var study = await runs.StudyOf(vehicle.Vehicle.VehicleId, [.. settings.Keys], cancel);
                var result = await Task.Run(() => Of(vehicle, settings.GetValueOrDefault(vehicle.Depot.DepotId), fit.Snapshot, fit.Id, since, study), cancel);
                await claim.Publish(Publication.Of(due, result, open, clock.GetUtcNow()), cancel);
            }
            catch (Exception failure) when (failure is not (OperationCanceledException or NpgsqlException))
            {
                // The rest of the claim is given back; this vehicle waits until something about it changes.
                await claim.DisposeAsync();
                DiagnosisFailed(log, due.VehicleId, failure);
                await store.Failed(due, fit.Id, Method, failure.Message, cancel);
                return 1;
            }
        }
        await claim.Commit(cancel);
        return claim.Due.Count;
    }

    /// <summary>A diagnosis as of a day, from the facts up to it, fleet snapshot included; nothing is stored.</summary>
    /// <returns>Null where the vehicle was not known by then.</returns>
    public async Task<VehicleDiagnosis?> AsOf(string vehicleId, DateOnly day, CancellationToken cancel)
    {
        if (await facts.LoadVehicle(vehicleId, day, cancel) is not { } vehicle) return null;
        var (snapshot, _, _) = await fitting.Make(day, cancel);
        var settings = await facts.LoadSettings(cancel);
        return await Task.Run(() => Of(vehicle, settings.GetValueOrDefault(vehicle.Depot.DepotId), snapshot, 0, [], null), cancel);
    }

    /// <summary>Straight runs that came after the fit saw the vehicle's last one.</summary>
    private async Task<IReadOnlyList<StraightRun>> Since(string vehicleId, string[] depots, FleetSnapshot fleet, CancellationToken cancel) =>
        fleet.Changes.FirstOrDefault(c => c.VehicleId == vehicleId) is { Now.Count: > 0 } then
            ? await runs.Since(vehicleId, depots, then.Now.Min(n => n.Through).UtcDateTime, cancel)
            : [];

    private static VehicleDiagnosis Of(VehicleFacts recorded, DepotSettings? settings, FleetSnapshot fleet, long fit, IReadOnlyList<StraightRun> since, VehicleSteeringStudy? study)
    {
        var (vehicle, problems) = VehicleFiguresOf.Checked(recorded, settings);
        var day = vehicle.FactsThrough is { } through && DateOnly.FromDateTime(through.UtcDateTime) > fleet.AsOf && fit != 0 ? DateOnly.FromDateTime(through.UtcDateTime) : fleet.AsOf;
        var tread = VehicleFiguresOf.Tread(vehicle, settings);
        var wear = VehicleWear.Estimate(tread, fleet.Wear, day);
        var changes = VehicleChangesOf.Vehicle(vehicle, tread, fleet, since, study, day);
        var figures = VehicleFiguresOf.Figures(vehicle, settings, wear, fleet.Roads.Of(vehicle.Vehicle.VehicleId), day, changes) with
        {
            Study = study,
            Tyres = HandRubs.Weighed(wear.Tyres, tread, fleet.Rubs),
        };
        var verdict = CauseEstimate.Judge(figures, fleet.Faults.Of(vehicle.Vehicle.Class));
        var inputs = MoneyInputs.For(vehicle.Vehicle, vehicle.Depot, [.. settings?.Prices.Select(p => p.Body) ?? []], [.. settings?.Settings.Select(s => s.Body) ?? []], day);
        var cost = CostOfWaiting.Of(figures, verdict, inputs);
        IEnumerable<Finding> findings = GeometryRules.Find(figures);
        findings = findings.Select(f => FastWearRule.Explained(f, figures, verdict));
        if (fleet.Unusual.Judge(figures) is { } unusual) findings = findings.Append(unusual);
        return new VehicleDiagnosis
        {
            Figures = figures,
            ChassisProblems = problems,
            Wear = wear,
            Verdict = verdict,
            Cost = cost,
            NetBenefit = NetBenefit.Of(vehicle.Vehicle, day, cost, inputs),
            JobPrice = inputs.JobPrice,
            Findings = [.. findings],
            UnsafeTyres = UnsafeTyres.Of(vehicle.Vehicle, vehicle.Depot, [.. vehicle.Surveys.Select(s => new RecordedSurvey(s.FactId, s.Body, false)), .. vehicle.HeldSurveys.Select(s => new RecordedSurvey(s.FactId, s.Body, true))], [.. vehicle.Fittings.Select(f => f.Body)], VehicleFiguresOf.Limits(settings)),
            FleetFit = fit,
            Study = study,
            Answers = vehicle.Answers,
            Use = VehicleUse.Of([.. vehicle.Surveys.Select(s => s.Body)], wear.KmPerWeek),
            Surveys = vehicle.Surveys.Concat(vehicle.HeldSurveys).GroupBy(s => s.FactId).ToDictionary(g => g.Key, g => (DateOnly.FromDateTime(g.First().At.UtcDateTime), g.First().Body.ResolutionMm)),
            FactsThrough = vehicle.FactsThrough,
        };
    }

    /// <summary>The latest fleet snapshot; null where none of this method was made yet.</summary>
    public async Task<(long Id, FleetSnapshot Snapshot)?> Latest(CancellationToken cancel)
    {
        // A snapshot of an older method is not read; the worker makes a new one.
        if (await fits.Latest(cancel) is not { } latest || latest.Method != Method) return null;
        if (_latest?.Id != latest.FleetFit) _latest = (latest.FleetFit, FactJson.Read<FleetSnapshot>(await fits.Body(latest.FleetFit, cancel)));
        return _latest;
    }

    [LoggerMessage(Level = LogLevel.Error, Message = "Vehicle {Vehicle} could not be diagnosed")]
    private static partial void DiagnosisFailed(ILogger log, string vehicle, Exception failure);
}
