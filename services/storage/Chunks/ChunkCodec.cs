using System.Buffers;
using System.Buffers.Binary;
using WearWatch.Diagnosis.Steering;
using ZstdSharp;

namespace WearWatch.Storage.Chunks;

/// <summary>
/// Stored form of a chunk: each column as whole multiples of its sensor's resolution, differences from sample to sample, byte planes,
/// zstd. Lossless at the resolution: what comes back is the multiple nearest to what went in, and NaN where NaN went in.
/// Layout, little-endian: version (1 byte), torque unit (1), start as UTC ticks (8), rate Hz (8, double), samples (4), columns (1), their
/// channels (1 each), length of the unpacked columns (4), then one zstd frame of them.
/// </summary>
public static class ChunkCodec
{
    public const byte Version = 1;

    private const int ZstdLevel = 3;
    // A context costs more to make than a minute's chunk to pack; one a thread is kept.
    [ThreadStatic]
    private static Compressor? _compressor;

    [ThreadStatic]
    private static Decompressor? _decompressor;

    private const int FixedBytes = 1 + 1 + 8 + 8 + 4 + 1;

    /// <exception cref="ArgumentException">A value is infinite or too large for its resolution.</exception>
    public static EncodedChunk Encode(SteeringColumns columns)
    {
        var present = columns.Columns.ToArray();
        var plain = new ArrayBufferWriter<byte>(64 + columns.Count * present.Length * 2);
        foreach (var column in present) ColumnCodec.Write(plain, column);
        var packed = (_compressor ??= new Compressor(ZstdLevel)).Wrap(plain.WrittenSpan);
        var head = FixedBytes + present.Length + 4;
        var bytes = new byte[head + packed.Length];
        (bytes[0], bytes[1]) = (Version, (byte)columns.TorqueUnit);
        BinaryPrimitives.WriteInt64LittleEndian(bytes.AsSpan(2), columns.Start.UtcTicks);
        BinaryPrimitives.WriteDoubleLittleEndian(bytes.AsSpan(10), columns.RateHz);
        BinaryPrimitives.WriteInt32LittleEndian(bytes.AsSpan(18), columns.Count);
        bytes[22] = (byte)present.Length;
        for (var i = 0; i < present.Length; i++) bytes[FixedBytes + i] = (byte)present[i].Channel;
        BinaryPrimitives.WriteInt32LittleEndian(bytes.AsSpan(head - 4), plain.WrittenCount);
        packed.CopyTo(bytes.AsSpan(head));
        return new(new(Version, columns.Start, columns.RateHz, columns.Count, columns.TorqueUnit, present.Select(c => c.Channel).ToArray()), bytes);
    }

    /// <exception cref="InvalidDataException">The bytes are not a chunk of this codec.</exception>
    public static ChunkHeader ReadHeader(ReadOnlySpan<byte> bytes)
    {
        if (bytes.Length < FixedBytes + 4) throw new InvalidDataException($"chunk of {bytes.Length} bytes is shorter than its header");
        if (bytes[0] != Version) throw new InvalidDataException($"chunk codec version {bytes[0]} is not known");
        if (bytes[1] > (byte)TorqueUnit.Unknown) throw new InvalidDataException($"torque unit {bytes[1]} is not known");
        var ticks = BinaryPrimitives.ReadInt64LittleEndian(bytes[2..]);
        if (ticks < 0 || ticks > DateTime.MaxValue.Ticks) throw new InvalidDataException("chunk's start is not a time");
        var rate = BinaryPrimitives.ReadDoubleLittleEndian(bytes[10..]);
        if (!(rate > 0 && rate <= 1000)) throw new InvalidDataException($"chunk's rate {rate} Hz is not above 0 and at most 1000");
        var count = BinaryPrimitives.ReadInt32LittleEndian(bytes[18..]);
        if (count < 0 || count > SteeringColumns.MostSamples) throw new InvalidDataException($"chunk of {count} samples; 0 to {SteeringColumns.MostSamples} are possible");
        var columns = bytes[22];
        if (columns > SteeringChannels.Count || bytes.Length < FixedBytes + columns + 4) throw new InvalidDataException($"chunk of {columns} columns is cut short or has too many");
        if (columns == 0 && count > 0) throw new InvalidDataException($"chunk of {count} samples has no columns");
        var channels = new SteeringChannel[columns];
        for (var i = 0; i < columns; i++)
        {
            channels[i] = (SteeringChannel)bytes[FixedBytes + i];
            if ((int)channels[i] >= SteeringChannels.Count || channels.AsSpan(0, i).Contains(channels[i])) throw new InvalidDataException($"column {i} has an unknown or repeated channel {(int)channels[i]}");
        }
        return new(Version, new DateTimeOffset(ticks, TimeSpan.Zero), rate, count, (TorqueUnit)bytes[1], channels);
    }

    /// <exception cref="InvalidDataException">The bytes are not a chunk of this codec, or are damaged.</exception>
    public static SteeringColumns Decode(ReadOnlySpan<byte> bytes)
    {
        var header = ReadHeader(bytes);
        var head = FixedBytes + header.Channels.Count + 4;
        var length = BinaryPrimitives.ReadInt32LittleEndian(bytes[(head - 4)..]);
        if (length < 0 || length > header.Channels.Count * ColumnCodec.MostBytes(header.Count)) throw new InvalidDataException($"{length} bytes are impossible for {header.Channels.Count} columns of {header.Count} samples");
        var plain = ArrayPool<byte>.Shared.Rent(Math.Max(1, length));
        try
        {
            Unpack(bytes[head..], plain.AsSpan(0, length));
            ReadOnlySpan<byte> rest = plain.AsSpan(0, length);
            var columns = new SteeringColumn[header.Channels.Count];
            for (var i = 0; i < columns.Length; i++) columns[i] = ColumnCodec.Read(ref rest, header.Channels[i], header.Count);
            if (!rest.IsEmpty) throw new InvalidDataException($"{rest.Length} bytes are left over after the last column");
            return new(header.Start, header.RateHz, columns, header.TorqueUnit);
        }
        finally
        {
            ArrayPool<byte>.Shared.Return(plain);
        }
    }

    private static void Unpack(ReadOnlySpan<byte> frame, Span<byte> plain)
    {
        int written;
        try
        {
            if (!(_decompressor ??= new Decompressor()).TryUnwrap(frame, plain, out written)) throw new InvalidDataException("compressed columns are longer than they say");
        }
        catch (ZstdException e)
        {
            throw new InvalidDataException($"compressed columns are damaged: {e.Message}", e);
        }
        if (written != plain.Length) throw new InvalidDataException($"compressed columns hold {written} bytes, not {plain.Length}");
    }
}
