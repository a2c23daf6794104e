using System.Threading.Channels;
using Grpc.Core;
using WearWatch.Contracts.V1;
using WearWatch.Hosting;
using WearWatch.Storage.Streams;
using Outcome = WearWatch.Contracts.V1.Outcome;

namespace WearWatch.Ingest;

/// <summary>
/// The steering stream: chunks are read and encoded while earlier ones are being committed in groups. The queue
/// between the two is bounded, so a slow database or a sender that does not read its answers slows the reading down.
/// </summary>
internal sealed class StreamSteering(StreamStore streams, ChunkWriter writer, TimeProvider clock)
{
    public async Task Handle(IAsyncStreamReader<StreamSteeringRequest> requests, IServerStreamWriter<StreamSteeringResponse> responses, CancellationToken cancel)
    {
        var stream = await Begin(requests, cancel);
        var queue = System.Threading.Channels.Channel.CreateBounded<Task<ChunkRow>>(new BoundedChannelOptions(Limits.ChunksInFlight) { SingleReader = true, SingleWriter = true });
        using var stop = CancellationTokenSource.CreateLinkedTokenSource(cancel);
        var committing = Commit(stream, queue.Reader, responses, stop);
        try
        {
            await Read(requests, stream, queue.Writer, stop.Token);
        }
        catch (Exception) when (committing.IsFaulted)
        {
            await committing; // the reason is there: the reading was only stopped
        }
        finally
        {
            // What came before a broken message is still committed and answered, unless the sender is gone.
            queue.Writer.TryComplete();
            if (!committing.IsFaulted) await committing;
        }
    }

    public async Task<GetStreamProgressResponse> Progress(GetStreamProgressRequest request, CancellationToken cancel)
    {
        var through = await streams.Progress(request.DepotId, request.StreamId, cancel)
            ?? throw new RequestRefused(RefusedBecause.NotFound, "stream_id", $"depot {request.DepotId} never began a stream {request.StreamId}");
        return new GetStreamProgressResponse { CommittedThrough = through };
    }

    private async Task<DeclaredStream> Begin(IAsyncStreamReader<StreamSteeringRequest> requests, CancellationToken cancel)
    {
        if (!await requests.MoveNext(cancel) || requests.Current.MessageCase != StreamSteeringRequest.MessageOneofCase.Header)
            throw new RequestRefused(RefusedBecause.Invalid, "header", "the first message of a stream is its header");
        var stream = StreamHeaders.Read(requests.Current.Header);
        if (!await streams.VehicleIsKnown(stream.Row.VehicleId, cancel))
            throw new RequestRefused(RefusedBecause.NotFound, "header.vehicle_id", $"vehicle {stream.Row.VehicleId} is not known; send its vehicle fact first");
        if (await streams.Begin(stream.Row, cancel) == StreamBegun.OtherHeader)
            throw new RequestRefused(RefusedBecause.AlreadyExists, "header.stream_id", $"stream {stream.Row.StreamId} was begun with another header");
        return stream;
    }

    private async Task Read(IAsyncStreamReader<StreamSteeringRequest> requests, DeclaredStream stream, ChannelWriter<Task<ChunkRow>> queue, CancellationToken cancel)
    {
        while (await requests.MoveNext(cancel))
        {
            if (requests.Current.MessageCase != StreamSteeringRequest.MessageOneofCase.Chunk)
                throw new RequestRefused(RefusedBecause.Invalid, "chunk", "after its header a stream holds chunks only");
            var chunk = requests.Current.Chunk;
            await queue.WriteAsync(Task.Run(() => StreamChunks.Prepare(chunk, stream, clock.GetUtcNow()), cancel), cancel);
        }
    }

    private async Task Commit(DeclaredStream stream, ChannelReader<Task<ChunkRow>> queue, IServerStreamWriter<StreamSteeringResponse> responses, CancellationTokenSource stop)
    {
        try
        {
            while (await Group(queue, stop.Token) is { Count: > 0 } group)
            {
                var committed = await writer.CopyChunks(stream.Row, group, stop.Token);
                foreach (var answer in committed.Answers) await responses.WriteAsync(ToContract(answer, committed.CommittedThrough), stop.Token);
            }
        }
        catch
        {
            await stop.CancelAsync(); // nothing can be stored: stop reading too
            throw;
        }
    }

    /// <summary>The next chunks to commit together: as many as come within the wait. Empty at the end of the stream.</summary>
    private static async Task<IReadOnlyList<ChunkRow>> Group(ChannelReader<Task<ChunkRow>> queue, CancellationToken cancel)
    {
        var group = new List<ChunkRow>();
        if (!await queue.WaitToReadAsync(cancel)) return group;
        using var wait = CancellationTokenSource.CreateLinkedTokenSource(cancel);
        wait.CancelAfter(Limits.CommitWait);
        try
        {
            while (group.Count < Limits.ChunksPerCommit && await queue.WaitToReadAsync(wait.Token))
            {
                while (group.Count < Limits.ChunksPerCommit && queue.TryRead(out var chunk)) group.Add(await chunk);
            }
        }
        catch (OperationCanceledException) when (group.Count > 0 && !cancel.IsCancellationRequested)
        {
            // The wait is over; what has come is committed.
        }
        return group;
    }

    private static StreamSteeringResponse ToContract(ChunkAnswer answer, long through) => new()
    {
        Sequence = answer.Sequence,
        Outcome = answer.Stored ? Outcome.Stored : Outcome.Refused,
        Known = answer.Known,
        Remarks = { answer.Remarks.Select(RecordFacts.ToContract) },
        CommittedThrough = through,
    };
}
