using WearWatch.Storage.Facts;

namespace WearWatch.Storage.Streams;

/// <summary>What is stored at a chunk's sequence and on either side of it.</summary>
public sealed record ChunkNeighbours
{
    public required long Sequence { get; init; }
    public byte[]? ContentHash { get; init; }
    public DateTime? EndBefore { get; init; }
    public DateTime? StartAfter { get; init; }
}

/// <summary>Decides of each chunk of a group whether it is new, known, another content or out of time order.</summary>
public static class ChunkJudge
{
    /// <summary>Two sample clocks that meet may differ by rounding; s.</summary>
    private static readonly TimeSpan Rounding = TimeSpan.FromMilliseconds(1);

    /// <returns>The chunks to store, and an answer for every chunk in the order given.</returns>
    public static (List<ChunkRow> Accepted, List<ChunkAnswer> Answers) Judge(
        IReadOnlyList<ChunkRow> chunks, IReadOnlyDictionary<long, ChunkNeighbours> stored)
    {
        var accepted = new SortedList<long, ChunkRow>();
        var answers = new List<ChunkAnswer>(chunks.Count);
        foreach (var chunk in chunks)
        {
            var hash = accepted.GetValueOrDefault(chunk.Sequence)?.ContentHash ?? stored[chunk.Sequence].ContentHash;
            if (chunk.Refusals.Count > 0) answers.Add(new(chunk.Sequence, false, false, chunk.Refusals));
            else if (hash is not null && hash.AsSpan().SequenceEqual(chunk.ContentHash)) answers.Add(new(chunk.Sequence, true, true, []));
            else if (hash is not null) answers.Add(Refused(chunk, "id_in_use", "chunk.sequence", $"chunk {chunk.Sequence} is stored with other content; both are kept"));
            else if (OutOfOrder(chunk, stored[chunk.Sequence], accepted) is { } reason) answers.Add(Refused(chunk, "time_back", "chunk.start", reason));
            else
            {
                accepted.Add(chunk.Sequence, chunk);
                answers.Add(new(chunk.Sequence, true, false, []));
            }
        }
        return ([.. accepted.Values], answers);
    }

    private static ChunkAnswer Refused(ChunkRow chunk, string code, string field, string message) =>
        new(chunk.Sequence, false, false, [new Remark(code, field, message)]);

    private static string? OutOfOrder(ChunkRow chunk, ChunkNeighbours stored, SortedList<long, ChunkRow> accepted)
    {
        var before = accepted.Values.LastOrDefault(c => c.Sequence < chunk.Sequence)?.EndAt.UtcDateTime;
        var after = accepted.Values.FirstOrDefault(c => c.Sequence > chunk.Sequence)?.StartAt.UtcDateTime;
        if (stored.EndBefore > before || before is null) before = stored.EndBefore;
        if (stored.StartAfter < after || after is null) after = stored.StartAfter;
        if (before is { } end && chunk.StartAt.UtcDateTime < end - Rounding) return $"starts before the chunk before it ends ({end:O})";
        if (after is { } start && chunk.EndAt.UtcDateTime > start + Rounding) return $"ends after the chunk after it starts ({start:O})";
        return null;
    }
}
