using System.Globalization;
using Google.Protobuf;
using Google.Protobuf.WellKnownTypes;
using WearWatch.Contracts.V1;
using WearWatch.Hosting;
using WearWatch.Storage;
using WearWatch.Storage.Facts;

namespace WearWatch.Ingest;

/// <summary>What was held or refused, and the counts.</summary>
internal sealed class SetAside(SetAsideReader reader)
{
    public async Task<ListSetAsideResponse> List(ListSetAsideRequest request, CancellationToken cancel)
    {
        if (request.PageSize is < 0 or > Limits.PageMost) throw new RequestRefused(RefusedBecause.Invalid, "page_size", $"must be 0 to {Limits.PageMost}");
        if (request.Outcome is not (Outcome.Unspecified or Outcome.Held or Outcome.Refused)) throw new RequestRefused(RefusedBecause.Invalid, "outcome", "must be held, refused or unspecified");
        var size = request.PageSize == 0 ? Limits.PageDefault : request.PageSize;
        var rows = await reader.List(request.DepotId, request.Outcome != Outcome.Refused, request.Outcome != Outcome.Held, Parse(request.PageToken), size + 1, cancel);
        var response = new ListSetAsideResponse { Items = { rows.Take(size).Select(ToContract) } };
        if (rows.Count > size) response.NextPageToken = Token(rows[size - 1]);
        return response;
    }

    public async Task<GetIngestStatusResponse> Status(CancellationToken cancel)
    {
        var counts = await reader.Count(cancel);
        return new GetIngestStatusResponse
        {
            Vehicles = counts.Vehicles,
            Surveys = counts.Surveys,
            Readings = counts.Readings,
            SteeringChunks = counts.Chunks,
            SteeringSamples = counts.Samples,
            Held = counts.Held,
            Refused = counts.Refused,
            Due = counts.Due,
        };
    }

    private static Contracts.V1.SetAside ToContract(SetAsideRow row) => new()
    {
        Id = row.Id,
        DepotId = row.Depot,
        VehicleId = row.VehicleId,
        Kind = row.Kind,
        Outcome = row.Held ? Outcome.Held : Outcome.Refused,
        ReceivedAt = Timestamp.FromDateTime(DateTime.SpecifyKind(row.ReceivedAt, DateTimeKind.Utc)),
        Remarks = { FactJson.Read<List<Storage.Facts.Remark>>(row.Remarks).Select(RecordFacts.ToContract) },
        ContentJson = JsonFormatter.Default.Format(row.Kind == FactKind.SteeringChunk ? SteeringChunk.Parser.ParseFrom(row.Sent) : Fact.Parser.ParseFrom(row.Sent)),
    };

    // Time in ticks, order of arrival, held or refused.
    private static string Token(SetAsideRow row) => string.Create(CultureInfo.InvariantCulture, $"{row.ReceivedAt.Ticks}.{row.Seq}.{(row.Held ? 1 : 0)}");

    private static (DateTime, long, bool)? Parse(string token)
    {
        if (token.Length == 0) return null;
        var parts = token.Split('.');
        if (parts.Length == 3 && long.TryParse(parts[0], CultureInfo.InvariantCulture, out var ticks) && ticks >= 0 && ticks <= DateTime.MaxValue.Ticks
            && long.TryParse(parts[1], CultureInfo.InvariantCulture, out var seq) && parts[2] is "0" or "1")
            return (new DateTime(ticks, DateTimeKind.Utc), seq, parts[2] == "1");
        throw new RequestRefused(RefusedBecause.Invalid, "page_token", "is not one that this service gave");
    }
}
