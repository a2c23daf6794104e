using WearWatch.Diagnosis.Facts;

namespace WearWatch.Storage.Facts;

/// <summary>Puts stored facts, sorted by time, together into what is known of a vehicle or a depot.</summary>
internal static class VehicleAssembly
{
    /// <returns>Null where no vehicle fact or no depot holds yet.</returns>
    public static VehicleFacts? Of(RevisionRow revision, IReadOnlyList<FactText> rows, DateOnly? asOf)
    {
        var vehicles = List<Vehicle>(rows, FactKind.Vehicle).Where(v => v.Body.VehicleId == revision.VehicleId).ToList();
        if (vehicles.Count == 0) return null;
        var today = asOf ?? DateOnly.FromDateTime(DateTime.UtcNow);
        // The last record in force; before the first one's date, the first.
        var vehicle = vehicles.LastOrDefault(v => v.Body.From is not { } from || from <= today) ?? vehicles[0];
        var depot = List<Depot>(rows, FactKind.Depot).LastOrDefault(d => d.Body.DepotId == vehicle.Body.Depot);
        if (depot is null) return null;
        var decisions = List<Decision>(rows, FactKind.Decision);
        var tread = AnsweredSurveys.Of(List<TreadSurvey>(rows, FactKind.Survey), List<TreadSurvey>(rows, FactKind.Survey, held: true), List<FittingRecord>(rows, FactKind.Fitting), decisions);

        return new VehicleFacts
        {
            Vehicle = vehicle.Body,
            Depot = depot.Body,
            Revision = revision.Revision,
            Surveys = tread.Surveys,
            HeldSurveys = tread.Held,
            Fittings = tread.Fittings,
            Answers = tread.Answers,
            Tyres = List<Tyre>(rows, FactKind.Tyre),
            DriverReports = List<DriverReport>(rows, FactKind.DriverReport),
            WorkshopRecords = List<WorkshopRecord>(rows, FactKind.WorkshopRecord),
            Routes = List<UsualRoute>(rows, FactKind.UsualRoute),
            Couplings = List<Coupling>(rows, FactKind.Coupling),
            Decisions = decisions,
            FactsThrough = Newest(rows, revision.ChunksThrough),
        };
    }

    public static IReadOnlyList<VehicleFacts> Fleet(IEnumerable<RevisionRow> revisions, IReadOnlyList<FactText> rows, DateOnly? asOf)
    {
        var own = rows.Where(r => r.VehicleId is not null).ToLookup(r => r.VehicleId!);
        var pulled = rows.Where(r => r.TractorId is not null).ToLookup(r => r.TractorId!);
        var depots = rows.Where(r => r.Kind == FactKind.Depot).ToLookup(r => r.Depot);
        var tyres = rows.Where(r => r.Kind == FactKind.Tyre).ToLookup(r => r.TyreId!);
        var fleet = new List<VehicleFacts>();
        foreach (var revision in revisions)
        {
            var mine = own[revision.VehicleId].ToList();
            var homes = mine.Where(r => r.Kind == FactKind.Vehicle).Select(r => r.Depot).Distinct();
            var named = mine.Where(r => r.Kind == FactKind.Fitting && r.TyreId is not null).Select(r => r.TyreId!).Distinct();
            var all = mine.Concat(pulled[revision.VehicleId]).Concat(homes.SelectMany(d => depots[d])).Concat(named.SelectMany(t => tyres[t]))
                .OrderBy(r => r.At).ThenBy(r => r.Seq).ToList();
            if (Of(revision, all, asOf) is { } facts) fleet.Add(facts);
        }
        return fleet;
    }

    public static DepotSettings Settings(IReadOnlyList<FactText> rows, long revision) => new()
    {
        Depot = List<Depot>(rows, FactKind.Depot)[^1].Body,
        Revision = revision,
        Prices = List<Price>(rows, FactKind.Price),
        Limits = List<DepthLimitFact>(rows, FactKind.DepthLimit),
        Tolerances = List<ToleranceFact>(rows, FactKind.Tolerance),
        Settings = List<OperatorSetting>(rows, FactKind.Setting),
        Decisions = List<Decision>(rows, FactKind.Decision),
    };

    private static List<Dated<T>> List<T>(IEnumerable<FactText> rows, string kind, bool held = false) =>
        rows.Where(r => r.Kind == kind && r.Held == held).Select(r => r.As<T>()).ToList();

    /// <summary>Newest of what happened to the vehicle; settings and dated master data do not count.</summary>
    private static DateTimeOffset? Newest(IEnumerable<FactText> rows, DateTime? chunksThrough)
    {
        var happened = rows
            .Where(r => r.Kind is FactKind.Survey or FactKind.Fitting or FactKind.DriverReport or FactKind.WorkshopRecord)
            .Select(r => (DateTime?)r.At).Append(chunksThrough).Max();
        return happened is { } at ? new DateTimeOffset(DateTime.SpecifyKind(at, DateTimeKind.Utc)) : null;
    }
}
