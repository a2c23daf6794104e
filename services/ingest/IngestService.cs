using Grpc.Core;
using WearWatch.Contracts.V1;

namespace WearWatch.Ingest;

/// <summary>The gRPC door for facts; each method hands over to the file of its name.</summary>
internal sealed class IngestService(RecordFacts record, StreamSteering steering, SetAside aside, FindFact find) : Contracts.V1.IngestService.IngestServiceBase
{
    public override Task<RecordFactsResponse> RecordFacts(RecordFactsRequest request, ServerCallContext context) =>
        record.Handle(request, context.CancellationToken);

    public override Task StreamSteering(IAsyncStreamReader<StreamSteeringRequest> requestStream, IServerStreamWriter<StreamSteeringResponse> responseStream, ServerCallContext context) =>
        steering.Handle(requestStream, responseStream, context.CancellationToken);

    public override Task<GetStreamProgressResponse> GetStreamProgress(GetStreamProgressRequest request, ServerCallContext context) =>
        steering.Progress(request, context.CancellationToken);

    public override Task<ListSetAsideResponse> ListSetAside(ListSetAsideRequest request, ServerCallContext context) =>
        aside.List(request, context.CancellationToken);

    public override Task<GetFactResponse> GetFact(GetFactRequest request, ServerCallContext context) =>
        find.Handle(request, context.CancellationToken);

    public override Task<GetIngestStatusResponse> GetIngestStatus(GetIngestStatusRequest request, ServerCallContext context) =>
        aside.Status(context.CancellationToken);
}
