using WearWatch.Contracts.V1;
using WearWatch.Hosting;
using WearWatch.Storage;
using WearWatch.Storage.Facts;

namespace WearWatch.Ingest;

/// <summary>One fact as it was sent, for a person who wants to look at it or correct it.</summary>
internal sealed class FindFact(FactFinder finder)
{
    public async Task<GetFactResponse> Handle(GetFactRequest request, CancellationToken cancel)
    {
        if (request.Id.Length == 0) throw new RequestRefused(RefusedBecause.Invalid, "id", "id is missing");
        var found = await finder.Find(request.Id, request.DepotId, cancel);
        if (found.Count == 0) throw new RequestRefused(RefusedBecause.NotFound, "id", $"there is no fact '{request.Id}'{(request.DepotId.Length > 0 ? $" of depot {request.DepotId}" : "")}");
        if (found.Count > 1) throw new RequestRefused(RefusedBecause.Invalid, "depot_id", $"depots {string.Join(", ", found.Select(f => f.Depot))} each have a fact '{request.Id}'; say which");
        var fact = found[0];
        return new GetFactResponse
        {
            Fact = Fact.Parser.ParseFrom(fact.Sent),
            Outcome = fact.Held ? Outcome.Held : Outcome.Stored,
            Holds = fact.Holds,
            Remarks = { FactJson.Read<List<Storage.Facts.Remark>>(fact.Remarks).Select(RecordFacts.ToContract) },
        };
    }
}
