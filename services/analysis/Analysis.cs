using System.Globalization;
using Google.Protobuf;
using Google.Protobuf.WellKnownTypes;
using Grpc.Core;
using WearWatch.Contracts.V1;
using WearWatch.Hosting;
using WearWatch.Storage.Analysis;

namespace WearWatch.Analysis;

/// <summary>The analysis service's RPCs: they read what the worker published.</summary>
internal sealed class Analysis(DiagnosisStore store, FleetFitStore fits, Diagnosing diagnosing) : AnalysisService.AnalysisServiceBase
{
    private const int DefaultPage = 100;
    private const int LargestPage = 500;

    private static readonly JsonParser s_json = new(JsonParser.Settings.Default.WithIgnoreUnknownFields(true));

    public override async Task<GetDiagnosisResponse> GetDiagnosis(GetDiagnosisRequest request, ServerCallContext context)
    {
        if (request.VehicleId.Length == 0) throw new RequestRefused(RefusedBecause.Invalid, "vehicle_id", "vehicle_id is missing");
        if (request.AsOf.Length == 0)
        {
            var body = await store.Body(request.VehicleId, context.CancellationToken)
                ?? throw new RequestRefused(RefusedBecause.NotFound, "vehicle_id", $"vehicle '{request.VehicleId}' is not known here, or not yet analysed");
            return new GetDiagnosisResponse { Diagnosis = s_json.Parse<Contracts.V1.Diagnosis>(body) };
        }
        if (!DateOnly.TryParseExact(request.AsOf, "yyyy-MM-dd", CultureInfo.InvariantCulture, DateTimeStyles.None, out var day))
            throw new RequestRefused(RefusedBecause.Invalid, "as_of", $"'{request.AsOf}' is not a date such as 2026-03-02");
        var past = await diagnosing.AsOf(request.VehicleId, day, context.CancellationToken)
            ?? throw new RequestRefused(RefusedBecause.NotFound, "vehicle_id", $"vehicle '{request.VehicleId}' was not known on {request.AsOf}");
        var diagnosis = DiagnosisMessage.Of(past);
        diagnosis.Findings.Add(past.Findings.Select(f => DiagnosisMessage.Of(f, past.Figures)));
        return new GetDiagnosisResponse { Diagnosis = diagnosis, BelowLimit = { past.UnsafeTyres.Select(u => TyreMessage.Of(u, past)) } };
    }

    public override async Task<ListFindingsResponse> ListFindings(ListFindingsRequest request, ServerCallContext context)
    {
        if (request.PageSize is < 0 or > LargestPage) throw new RequestRefused(RefusedBecause.Invalid, "page_size", $"page_size must lie in 0 to {LargestPage}");
        var offset = 0;
        if (request.PageToken.Length > 0 && (!int.TryParse(request.PageToken, NumberStyles.None, CultureInfo.InvariantCulture, out offset) || offset <= 0))
            throw new RequestRefused(RefusedBecause.Invalid, "page_token", "this page_token was not given by ListFindings");
        var size = request.PageSize == 0 ? DefaultPage : request.PageSize;
        var bodies = await store.Findings(request.DepotId, [.. request.Kinds], offset, size + 1, context.CancellationToken);
        var response = new ListFindingsResponse();
        response.Findings.Add(bodies.Take(size).Select(s_json.Parse<Finding>));
        if (bodies.Count > size) response.NextPageToken = (offset + size).ToString(CultureInfo.InvariantCulture);
        return response;
    }

    public override async Task<GetReaderStudyResponse> GetReaderStudy(GetReaderStudyRequest request, ServerCallContext context) =>
        ReaderStudyMessage.Of(await diagnosing.Latest(context.CancellationToken) ?? throw new RequestRefused(RefusedBecause.NotFound, "", "no fleet-wide snapshot was made yet"));

    public override async Task<GetAnalysisStatusResponse> GetAnalysisStatus(GetAnalysisStatusRequest request, ServerCallContext context)
    {
        var latest = await fits.Latest(context.CancellationToken);
        // A snapshot that no longer matches the facts makes every vehicle due; so does having none.
        var mark = await fits.FactsMark(context.CancellationToken);
        var stale = latest is null ? !mark.StartsWith("0/", StringComparison.Ordinal) : latest.FactsMark != mark || latest.Method != Diagnosing.Method;
        var counts = await store.Counts(stale ? long.MaxValue : latest?.FleetFit ?? 0, Diagnosing.Method, context.CancellationToken);
        return new GetAnalysisStatusResponse
        {
            Due = counts.Due,
            Analysed = counts.Analysed,
            FleetFit = latest?.FleetFit ?? 0,
            FleetFitAt = latest is null ? null : Timestamp.FromDateTime(DateTime.SpecifyKind(latest.MadeAt, DateTimeKind.Utc)),
            OpenFindings = counts.OpenFindings,
            ChunksToReduce = (long)counts.ChunksToReduce,
            Failed = counts.Failed,
        };
    }
}
