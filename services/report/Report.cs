using System.Globalization;
using Google.Protobuf;
using Google.Protobuf.WellKnownTypes;
using Grpc.Core;
using WearWatch.Contracts.V1;
using WearWatch.Hosting;
using WearWatch.Storage.Report;

namespace WearWatch.Report;

/// <summary>The report service: Monday's list and the vehicle report, from what analysis published.</summary>
internal sealed class Report(WorklistStore store) : ReportService.ReportServiceBase
{
    private const int DefaultPage = 100;
    private const int LargestPage = 500;

    public const string Notice =
        "Estimate from limited data; not an inspection. Do not drive on a tyre below the limit or damaged. Use rated stands and chocks, deflate before demounting. "
        + "Follow the maker's procedures; local codes and licensed practice come first.";

    private static readonly JsonParser s_json = new(JsonParser.Settings.Default.WithIgnoreUnknownFields(true));

    public override async Task<GetWorklistResponse> GetWorklist(GetWorklistRequest request, ServerCallContext context)
    {
        if (request.PageSize is < 0 or > LargestPage) throw new RequestRefused(RefusedBecause.Invalid, "page_size", $"page_size must lie in 0 to {LargestPage}");
        if (!System.Enum.IsDefined(request.Sort)) throw new RequestRefused(RefusedBecause.Invalid, "sort", "unknown sort");
        var cancel = context.CancellationToken;
        var size = request.PageSize == 0 ? DefaultPage : request.PageSize;
        var (head, after) = request.PageToken.Length > 0 ? await Continued(request.PageToken, cancel) : (await Current(request.DepotId, request.Sort, cancel), 0);
        var response = new GetWorklistResponse { Notice = Notice, Total = head.Total, AsOf = head.AsOf.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture) };
        var rows = await store.Rows(head.WorklistId, after, size, cancel);
        response.Vehicles.Add(rows.Select(r => s_json.Parse<WorklistRow>(r.Body)));
        if (rows.Count == size && after + size < head.Total) response.NextPageToken = string.Create(CultureInfo.InvariantCulture, $"{head.WorklistId}.{after + size}");
        if (request.PageToken.Length == 0) await AddSideLists(response, request.DepotId, cancel);
        return response;
    }

    private async Task<(WorklistHead, int)> Continued(string token, CancellationToken cancel)
    {
        var parts = token.Split('.');
        if (parts.Length == 2 && long.TryParse(parts[0], NumberStyles.None, CultureInfo.InvariantCulture, out var id) && int.TryParse(parts[1], NumberStyles.None, CultureInfo.InvariantCulture, out var after)
            && await store.Head(id, cancel) is { } head)
        {
            return (head, after);
        }
        throw new RequestRefused(RefusedBecause.Invalid, "page_token", "this page_token was not given by GetWorklist");
    }

    /// <summary>The kept worklist if nothing changed since, else a new one.</summary>
    private async Task<WorklistHead> Current(string depot, WorklistSort sort, CancellationToken cancel)
    {
        var mark = await store.Mark(depot, cancel);
        if (await store.Latest(depot, sort.ToString(), cancel) is { } latest && latest.Mark == mark) return latest;
        var diagnoses = (await store.Diagnoses(depot, cancel)).Select(d => s_json.Parse<Contracts.V1.Diagnosis>(d.Body)).ToList();
        var asOf = diagnoses.Count == 0 ? DateOnly.MinValue : diagnoses.Max(d => DateOnly.ParseExact(d.AsOf, "yyyy-MM-dd", CultureInfo.InvariantCulture));
        var snoozed = await store.Snoozed(asOf, cancel);
        var bounds = await store.Setting("holding_torque_bound", asOf, cancel);
        var rows = WorklistRanking.Rank(diagnoses.Where(d => !snoozed.Contains(d.VehicleId)), d => bounds.GetValueOrDefault(d, WorklistRanking.DefaultHoldingTorqueBoundNm), sort);
        var entries = rows.Select(r => new WorklistEntry { Rank = (int)r.Rank, Depot = r.Depot, VehicleId = r.VehicleId, ListedBecause = r.ListedBecause.ToString(), Body = JsonFormatter.Default.Format(r) }).ToList();
        return await store.Keep(depot, sort.ToString(), asOf, mark, entries, cancel);
    }

    private async Task AddSideLists(GetWorklistResponse response, string depot, CancellationToken cancel)
    {
        response.BelowLimit.Add((await store.UnsafeTyres(depot, "", cancel)).Select(Unsafe));
        var diagnoses = (await store.Diagnoses(depot, cancel)).Select(d => s_json.Parse<Contracts.V1.Diagnosis>(d.Body));
        response.GaugeFirst.Add(WorklistRanking.GaugeFirst(diagnoses));
        foreach (var row in await store.OtherMatters(depot, cancel))
        {
            var finding = s_json.Parse<Finding>(row.Body);
            response.OtherMatters.Add(new OtherMatter { VehicleId = row.VehicleId, Depot = row.Depot, FindingId = row.FindingId, Kind = finding.Kind, Sentence = finding.Sentence, FirstCheck = finding.FirstCheck });
        }
    }

    public override async Task<GetVehicleReportResponse> GetVehicleReport(GetVehicleReportRequest request, ServerCallContext context)
    {
        if (request.VehicleId.Length == 0) throw new RequestRefused(RefusedBecause.Invalid, "vehicle_id", "vehicle_id is missing");
        var body = await store.Diagnosis(request.VehicleId, context.CancellationToken)
            ?? throw new RequestRefused(RefusedBecause.NotFound, "vehicle_id", $"vehicle '{request.VehicleId}' is not known here, or not yet analysed");
        var response = new GetVehicleReportResponse { Diagnosis = s_json.Parse<Contracts.V1.Diagnosis>(body), Notice = Notice };
        response.BelowLimit.Add((await store.UnsafeTyres("", request.VehicleId, context.CancellationToken)).Select(Unsafe));
        return response;
    }

    public override async Task<GetReportStatusResponse> GetReportStatus(GetReportStatusRequest request, ServerCallContext context)
    {
        var head = await Current("", WorklistSort.Unspecified, context.CancellationToken);
        var rows = await store.Rows(head.WorklistId, 0, int.MaxValue, context.CancellationToken);
        return new GetReportStatusResponse
        {
            Vehicles = head.Total,
            Listed = rows.Count(r => r.ListedBecause != nameof(ListedBecause.NotYet)),
            BelowLimit = (await store.UnsafeTyres("", "", context.CancellationToken)).Count,
        };
    }

    private static UnsafeTyre Unsafe(UnsafeTyreRow row)
    {
        var tyre = new UnsafeTyre
        {
            VehicleId = row.VehicleId,
            Depot = row.Depot,
            Position = row.Position,
            LimitSource = row.LimitSource,
            SurveyId = row.SurveyId,
            MeasuredAt = Timestamp.FromDateTime(row.MeasuredAt.ToUniversalTime()),
            Held = row.Held,
            Sentence = row.Sentence,
            ShownTo = row.ShownTo ?? "",
        };
        if (row.DepthMm is { } depth) tyre.DepthMm = depth;
        if (row.LimitMm is { } limit) tyre.LimitMm = limit;
        return tyre;
    }
}
