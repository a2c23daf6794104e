using System.Collections.Concurrent;
using Grpc.Core;
using WearWatch.Contracts.V1;

namespace WearWatch.Import;

/// <summary>What became of one file of the folder.</summary>
internal sealed record FileOutcome(string File)
{
    public int Stored { get; set; }
    public int Known { get; set; }
    public int Held { get; set; }
    public int Refused { get; set; }
    public long Samples { get; set; }
    /// <summary>Reasons of what was held or refused, and matters of safety.</summary>
    public List<string> Reasons { get; } = [];
}

/// <summary>Sends an import folder through the gRPC door, facts first, then steering samples.</summary>
internal static class ImportFolder
{
    /// <summary>Facts a call.</summary>
    private const int BatchFacts = 200;

    /// <summary>Characters kept of a row that could not be read.</summary>
    private const int TextMost = 500;

    /// <summary>Steering streams under way at once.</summary>
    private const int Streams = 2;

    /// <param name="folder">The folder, as demo-data/README.md describes it.</param>
    /// <param name="ingest">The door.</param>
    /// <param name="progress">Told after each step: what is being read, and the share done (0 to 1).</param>
    /// <param name="cancel">Stops between calls; what was acknowledged stays.</param>
    public static async Task<List<FileOutcome>> Run(string folder, IngestService.IngestServiceClient ingest, Action<string, double> progress, CancellationToken cancel)
    {
        var facts = new FolderFacts(folder);
        var outcomes = new List<FileOutcome>();
        foreach (var (file, rows) in facts.Files())
        {
            progress(file, 0);
            if (rows.Count > 0) outcomes.Add(await SendFacts(file, rows, ingest, cancel));
        }
        var streams = SteeringFile.List(folder, facts);
        if (streams.Count > 0) outcomes.Add(await SendSteering(streams, ingest, progress, cancel));
        foreach (var problem in facts.Problems)
        {
            var outcome = outcomes.FirstOrDefault(o => o.File == problem.File);
            if (outcome is null) outcomes.Add(outcome = new FileOutcome(problem.File));
            outcome.Refused++;
            outcome.Reasons.Add(problem.Line > 0 ? $"line {problem.Line}{Named(problem.Column)}: {problem.Message}" : problem.Message);
        }
        await KeepUnread(facts, ingest, cancel);
        return outcomes;
    }

    /// <summary>Rows that could not be read are sent as such, so that the service keeps them with their reasons.</summary>
    private static async Task KeepUnread(FolderFacts facts, IngestService.IngestServiceClient ingest, CancellationToken cancel)
    {
        foreach (var batch in facts.Problems.Select(p => Unread(p, facts.FirstDepot)).Chunk(BatchFacts))
            await ingest.RecordFactsAsync(new RecordFactsRequest { Facts = { batch } }, deadline: DateTime.UtcNow.AddMinutes(2), cancellationToken: cancel);
    }

    private static Fact Unread(RowProblem problem, string depot) => new()
    {
        Id = problem.Id.Length > 0 ? problem.Id : $"{Named(problem.File.Replace('/', ':'), problem.Line)}",
        DepotId = depot,
        UnreadRow = new UnreadRow { File = problem.File, Line = problem.Line, Column = problem.Column, Reason = problem.Message, Text = problem.Text.Length > TextMost ? problem.Text[..TextMost] : problem.Text },
    };

    private static string Named(string file, int line) => line > 0 ? $"{file}:{line}" : file;

    private static string Named(string column) => column.Length > 0 ? $", {column}" : "";

    private static async Task<FileOutcome> SendFacts(string file, IReadOnlyList<Fact> facts, IngestService.IngestServiceClient ingest, CancellationToken cancel)
    {
        var outcome = new FileOutcome(file);
        foreach (var batch in facts.Chunk(BatchFacts))
        {
            var request = new RecordFactsRequest();
            request.Facts.Add(batch);
            var response = await ingest.RecordFactsAsync(request, deadline: DateTime.UtcNow.AddMinutes(2), cancellationToken: cancel);
            foreach (var answer in response.Answers) Count(outcome, answer.Id, answer.Outcome, answer.Known, answer.Remarks, 0);
        }
        return outcome;
    }

    private static void Count(FileOutcome outcome, string id, Outcome result, bool known, IEnumerable<Remark> remarks, long samples)
    {
        if (known) outcome.Known++;
        else if (result == Outcome.Stored)
        {
            outcome.Stored++;
            outcome.Samples += samples;
        }
        if (result == Outcome.Held) outcome.Held++;
        if (result == Outcome.Refused) outcome.Refused++;
        if (known && result != Outcome.Refused) return;
        foreach (var remark in remarks.Where(r => result != Outcome.Stored || r.Safety)) outcome.Reasons.Add($"{id}: {remark.Message}");
    }

    private static async Task<FileOutcome> SendSteering(List<SteeringFile> files, IngestService.IngestServiceClient ingest, Action<string, double> progress, CancellationToken cancel)
    {
        var outcome = new FileOutcome("steering/");
        var done = 0;
        var queue = new ConcurrentQueue<SteeringFile>(files);
        await Task.WhenAll(Enumerable.Range(0, Streams).Select(_ => Task.Run(async () =>
        {
            while (queue.TryDequeue(out var file))
            {
                await SendStream(file, ingest, outcome, cancel);
                lock (outcome) progress("steering samples", ++done / (double)files.Count);
            }
        }, cancel)));
        return outcome;
    }

    private static async Task SendStream(SteeringFile file, IngestService.IngestServiceClient ingest, FileOutcome outcome, CancellationToken cancel)
    {
        try
        {
            // A file that breaks off halfway is refused whole: its samples are read before any is sent.
            var chunks = file.Chunks();
            using var call = ingest.StreamSteering(deadline: DateTime.UtcNow.AddMinutes(10), cancellationToken: cancel);
            var samples = new ConcurrentDictionary<long, int>();
            var answers = Task.Run(async () =>
            {
                await foreach (var answer in call.ResponseStream.ReadAllAsync(cancel))
                {
                    lock (outcome) Count(outcome, $"{file.File} chunk {answer.Sequence}", answer.Outcome, answer.Known, answer.Remarks, samples.GetValueOrDefault(answer.Sequence));
                }
            }, cancel);
            try
            {
                await call.RequestStream.WriteAsync(new StreamSteeringRequest { Header = file.Header }, cancel);
                foreach (var chunk in chunks)
                {
                    samples[chunk.Sequence] = Math.Max(chunk.Columns[0].Values.Count, chunk.Columns[0].PreciseValues.Count);
                    await call.RequestStream.WriteAsync(new StreamSteeringRequest { Chunk = chunk }, cancel);
                }
                await call.RequestStream.CompleteAsync();
            }
            catch (RpcException)
            {
                // The stream ended while it was being written: why, the answers' end tells.
                await answers;
                throw;
            }
            await answers;
        }
        catch (InvalidDataException broken)
        {
            Refuse(outcome, file, broken.Message);
        }
        catch (RpcException refused) when (refused.StatusCode is StatusCode.InvalidArgument or StatusCode.NotFound or StatusCode.AlreadyExists)
        {
            Refuse(outcome, file, refused.Status.Detail);
        }
    }

    private static void Refuse(FileOutcome outcome, SteeringFile file, string reason)
    {
        lock (outcome)
        {
            outcome.Refused++;
            outcome.Reasons.Add($"{file.File}: {reason}");
        }
    }
}
