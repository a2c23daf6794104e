using System.Buffers.Binary;
using System.Globalization;
using System.Runtime.InteropServices;
using System.Security.Cryptography;
using Google.Protobuf;
using WearWatch.Contracts.V1;
using WearWatch.Diagnosis.Steering;
using WearWatch.Storage.Chunks;
using WearWatch.Storage.Streams;

namespace WearWatch.Ingest;

/// <summary>Checks one chunk against its stream's header, converts it to stored units and encodes it.</summary>
internal static class StreamChunks
{
    public static ChunkRow Prepare(SteeringChunk sent, DeclaredStream stream, DateTimeOffset now)
    {
        var problems = new Problems(now);
        if (sent.Sequence < 1) problems.Refuse("sequence", "chunk.sequence", "counts from 1");
        var start = problems.Time(sent.Start, "chunk.start");
        var samples = Length(sent, problems);
        var columns = Columns(sent, stream, samples, problems);
        return new ChunkRow
        {
            Sequence = sent.Sequence,
            StartAt = start,
            EndAt = start.AddSeconds(samples / stream.Row.RateHz),
            Samples = samples,
            ContentHash = Hash(sent),
            Excerpt = Excerpt(sent),
            Columns = problems.Any ? null : Encode(start, stream, columns),
            Refusals = problems.Refusals,
        };
    }

    private static byte[] Encode(DateTimeOffset start, DeclaredStream stream, List<SteeringColumn> columns)
    {
        var raw = stream.Channels.Values.Any(c => c.IsRaw);
        return ChunkCodec.Encode(new SteeringColumns(start, stream.Row.RateHz, columns, raw ? TorqueUnit.Raw : TorqueUnit.NewtonMetre)).Bytes;
    }

    private static int Count(Column column) => Math.Max(column.Values.Count, column.PreciseValues.Count);

    private static int Length(SteeringChunk sent, Problems p)
    {
        var samples = sent.Columns.Count == 0 ? 0 : Count(sent.Columns[0]);
        if (samples is 0 or > Limits.SamplesPerChunk) p.Refuse("samples_count", "chunk.columns", $"must hold 1 to {Limits.SamplesPerChunk} samples");
        for (var i = 1; i < sent.Columns.Count; i++)
        {
            if (Count(sent.Columns[i]) != samples) p.Refuse("lengths_differ", $"chunk.columns[{i}]", $"{sent.Columns[i].Channel} has {Count(sent.Columns[i])} samples, the first column {samples}");
        }
        return samples;
    }

    private static List<SteeringColumn> Columns(SteeringChunk sent, DeclaredStream stream, int samples, Problems p)
    {
        var columns = new List<SteeringColumn>(sent.Columns.Count);
        var seen = new HashSet<Channel>();
        for (var i = 0; i < sent.Columns.Count; i++)
        {
            var path = $"chunk.columns[{i}]";
            var column = sent.Columns[i];
            if (!stream.Channels.TryGetValue(column.Channel, out var declared)) p.Refuse("channel_not_declared", path, $"{column.Channel} is not in the stream's header");
            else if (!seen.Add(column.Channel)) p.Refuse("channel_twice", path, $"{column.Channel} comes twice");
            else if (!p.Any || Count(column) == samples) Read(column, declared, path, columns, p);
        }
        foreach (var missing in stream.Channels.Keys.Where(c => !seen.Contains(c))) p.Refuse("channel_missing", "chunk.columns", $"{missing} is in the header but not in the chunk");
        return columns;
    }

    private static void Read(Column sent, DeclaredChannel channel, string path, List<SteeringColumn> columns, Problems p)
    {
        var (given, other) = channel.Rule.IsPrecise ? (sent.PreciseValues.Count, sent.Values.Count) : (sent.Values.Count, sent.PreciseValues.Count);
        var field = channel.Rule.IsPrecise ? "precise_values" : "values";
        if (other > 0) p.Refuse("wrong_values", path, $"{channel.Channel} comes in {field} alone");
        else if (sent.Missing.Length > 0 && sent.Missing.Length != (given + 7) / 8) p.Refuse("missing_length", $"{path}.missing", $"must hold one bit a sample, {(given + 7) / 8} bytes");
        else if (channel.Rule.IsPrecise)
        {
            var values = new double[given];
            sent.PreciseValues.CopyTo(values, 0);
            Convert(values, sent.Missing.Span, channel, $"{path}.{field}", p);
            columns.Add(SteeringColumn.Of(channel.Rule.Stored, values, channel.Resolution));
        }
        else
        {
            var values = new float[given];
            sent.Values.CopyTo(values, 0);
            Convert(values, sent.Missing.Span, channel, $"{path}.{field}", p);
            columns.Add(SteeringColumn.Of(channel.Rule.Stored, values, channel.Resolution));
        }
    }

    /// <summary>Stored unit and NaN for missing, in place; the first wrong sample is named.</summary>
    private static void Convert<T>(Span<T> values, ReadOnlySpan<byte> missing, DeclaredChannel channel, string path, Problems p) where T : struct, System.Numerics.IBinaryFloatingPointIeee754<T>
    {
        var (least, most) = channel.IsRaw ? (-Limits.RawMost * channel.Resolution, Limits.RawMost * channel.Resolution) : (channel.Rule.Least, channel.Rule.Most);
        // A value at its bound may stand half a step beyond it.
        var (low, high, factor) = (T.CreateChecked(least - channel.Resolution / 2), T.CreateChecked(most + channel.Resolution / 2), T.CreateChecked(channel.Factor));
        for (var i = 0; i < values.Length; i++)
        {
            if (!missing.IsEmpty && (missing[i >> 3] >> (i & 7) & 1) == 1)
            {
                values[i] = T.NaN;
                continue;
            }
            var value = values[i] * factor;
            if (value >= low && value <= high) values[i] = value;
            else
            {
                var shown = string.Create(CultureInfo.InvariantCulture, $"{values[i]}");
                if (T.IsFinite(values[i])) p.Refuse("out_of_range", $"{path}[{i}]", string.Create(CultureInfo.InvariantCulture, $"{shown} is outside {least:0.###} to {most:0.###} of {channel.Channel} in stored units"));
                else p.Refuse("not_a_number", $"{path}[{i}]", $"{shown} is not a finite number; mark missing samples in missing");
                return;
            }
        }
    }

    /// <summary>What makes two sendings of a chunk the same: time and samples, whatever stands where a sample is missing.</summary>
    private static byte[] Hash(SteeringChunk sent)
    {
        using var hash = IncrementalHash.CreateHash(HashAlgorithmName.SHA256);
        Span<byte> head = stackalloc byte[20];
        BinaryPrimitives.WriteInt64LittleEndian(head, sent.Start?.Seconds ?? 0);
        BinaryPrimitives.WriteInt32LittleEndian(head[8..], sent.Start?.Nanos ?? 0);
        BinaryPrimitives.WriteInt64LittleEndian(head[12..], sent.Sequence);
        hash.AppendData(head);
        foreach (var column in sent.Columns.OrderBy(c => c.Channel))
        {
            BinaryPrimitives.WriteInt64LittleEndian(head, (long)column.Channel);
            BinaryPrimitives.WriteInt32LittleEndian(head[8..], column.Values.Count);
            BinaryPrimitives.WriteInt64LittleEndian(head[12..], column.PreciseValues.Count);
            hash.AppendData(head);
            hash.AppendData(MemoryMarshal.AsBytes(Present([.. column.Values], column.Missing.Span)));
            hash.AppendData(MemoryMarshal.AsBytes(Present([.. column.PreciseValues], column.Missing.Span)));
            hash.AppendData(column.Missing.Span.IndexOfAnyExcept((byte)0) < 0 ? [] : column.Missing.Span);
        }
        return hash.GetHashAndReset();
    }

    private static Span<T> Present<T>(T[] values, ReadOnlySpan<byte> missing) where T : struct
    {
        for (var i = 0; i < values.Length && i >> 3 < missing.Length; i++)
        {
            if ((missing[i >> 3] >> (i & 7) & 1) == 1) values[i] = default;
        }
        return values;
    }

    /// <summary>What is kept of a chunk should it be refused: its head and the first samples of each column.</summary>
    private static byte[] Excerpt(SteeringChunk sent)
    {
        var excerpt = new SteeringChunk { Sequence = sent.Sequence, Start = sent.Start };
        foreach (var column in sent.Columns.Take(Limits.ExcerptColumns))
        {
            excerpt.Columns.Add(new Column
            {
                Channel = column.Channel,
                Values = { column.Values.Take(Limits.ExcerptSamples) },
                PreciseValues = { column.PreciseValues.Take(Limits.ExcerptSamples) },
                Missing = ByteString.CopyFrom(column.Missing.Span[..Math.Min(column.Missing.Length, (Limits.ExcerptSamples + 7) / 8)]),
            });
        }
        return excerpt.ToByteArray();
    }
}
