using System.Buffers;
using System.Buffers.Binary;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Storage.Chunks;

/// <summary>
/// One column before compression: resolution (8 bytes, double), width of a difference in bytes (0, 1, 2, 4 or 8), whether samples are
/// missing, the first multiple (8 bytes), the validity bitmap if any are missing, then the zigzag differences as byte planes.
/// A missing sample repeats the one before, so that it costs nothing beyond its bit. Width 0: constant.
/// </summary>
internal static class ColumnCodec
{
    private const int FixedBytes = 8 + 1 + 1 + 8;

    /// <summary>Multiples beyond this are refused: a double no longer holds each of them exactly.</summary>
    private const long LargestMultiple = 1L << 52;

    /// <summary>Coarser steps than this are no sensor's, and could only make a damaged chunk decode to infinity.</summary>
    private const double CoarsestResolution = 1e9;

    /// <summary>Most bytes a column of so many samples may take.</summary>
    public static long MostBytes(int count) => FixedBytes + (count + 7) / 8 + 8L * count;

    public static void Write(ArrayBufferWriter<byte> into, SteeringColumn column)
    {
        var multiples = ArrayPool<long>.Shared.Rent(Math.Max(1, column.Count));
        var valid = new byte[(column.Count + 7) / 8];
        try
        {
            var missing = Quantise(column, multiples, valid);
            var first = column.Count > 0 ? multiples[0] : 0;
            ulong largest = 0;
            for (var i = column.Count - 1; i > 0; i--)
            {
                multiples[i] = ZigZag(multiples[i] - multiples[i - 1]);
                largest |= (ulong)multiples[i];
            }
            if (column.Count > 0) multiples[0] = 0;
            var width = largest switch { 0 => 0, <= byte.MaxValue => 1, <= ushort.MaxValue => 2, <= uint.MaxValue => 4, _ => 8 };
            var head = into.GetSpan(FixedBytes);
            BinaryPrimitives.WriteDoubleLittleEndian(head, column.Resolution);
            (head[8], head[9]) = ((byte)width, missing ? (byte)1 : (byte)0);
            BinaryPrimitives.WriteInt64LittleEndian(head[10..], first);
            into.Advance(FixedBytes);
            if (missing) into.Write(valid);
            if (width == 0 || column.Count == 0) return;
            var planes = into.GetSpan(width * column.Count);
            for (var plane = 0; plane < width; plane++)
                for (var i = 0; i < column.Count; i++) planes[plane * column.Count + i] = (byte)((ulong)multiples[i] >> (8 * plane));
            into.Advance(width * column.Count);
        }
        finally
        {
            ArrayPool<long>.Shared.Return(multiples);
        }
    }

    /// <returns>Whether any sample is missing.</returns>
    private static bool Quantise(SteeringColumn column, long[] multiples, byte[] valid)
    {
        if (column.Resolution > CoarsestResolution) throw new ArgumentException($"{column.Channel}: resolution {column.Resolution} is above {CoarsestResolution}");
        var missing = false;
        long last = 0;
        var seen = false;
        for (var i = 0; i < column.Count; i++)
        {
            var value = column.Values is { } floats ? floats[i] : column.PreciseValues![i];
            if (double.IsNaN(value)) { missing = true; multiples[i] = last; continue; }
            var multiple = Math.Round(value / column.Resolution);
            if (!(Math.Abs(multiple) <= LargestMultiple)) throw new ArgumentException($"{column.Channel}: {value} is not a number that its resolution {column.Resolution} can carry");
            last = (long)multiple;
            if (!seen) Array.Fill(multiples, last, 0, i); // leading gap takes the first value
            seen = true;
            multiples[i] = last;
            valid[i >> 3] |= (byte)(1 << (i & 7));
        }
        return missing;
    }

    public static SteeringColumn Read(ref ReadOnlySpan<byte> rest, SteeringChannel channel, int count)
    {
        var head = Take(ref rest, FixedBytes, channel);
        var resolution = BinaryPrimitives.ReadDoubleLittleEndian(head);
        if (!(resolution > 0 && resolution <= CoarsestResolution)) throw new InvalidDataException($"{channel}: resolution {resolution} is not above 0 and at most {CoarsestResolution}");
        var (width, missing) = (head[8], head[9]);
        if (width is not (0 or 1 or 2 or 4 or 8) || missing > 1) throw new InvalidDataException($"{channel}: difference of {width} bytes or flag {missing} is not possible");
        var first = BinaryPrimitives.ReadInt64LittleEndian(head[10..]);
        var valid = missing == 1 ? Take(ref rest, (count + 7) / 8, channel) : default;
        var planes = Take(ref rest, width * count, channel);
        return channel.IsPrecise()
            ? SteeringColumn.Of(channel, Precise(planes, valid, width, count, first, resolution), resolution)
            : SteeringColumn.Of(channel, Single(planes, valid, width, count, first, resolution), resolution);
    }

    private static ReadOnlySpan<byte> Take(ref ReadOnlySpan<byte> rest, int length, SteeringChannel channel)
    {
        if (length > rest.Length) throw new InvalidDataException($"{channel}: column is cut short");
        var taken = rest[..length];
        rest = rest[length..];
        return taken;
    }

    private static float[] Single(ReadOnlySpan<byte> planes, ReadOnlySpan<byte> valid, int width, int count, long first, double resolution)
    {
        var values = GC.AllocateUninitializedArray<float>(count);
        var multiple = first;
        switch (width)
        {
            case 0:
                Array.Fill(values, (float)(first * resolution));
                break;
            case 1:
                for (var i = 0; i < values.Length; i++)
                {
                    multiple += UnZigZag(planes[i]);
                    values[i] = (float)(multiple * resolution);
                }
                break;
            case 2:
                var high = planes[count..];
                for (var i = 0; i < values.Length; i++)
                {
                    multiple += UnZigZag((uint)(planes[i] | high[i] << 8));
                    values[i] = (float)(multiple * resolution);
                }
                break;
            default:
                for (var i = 0; i < values.Length; i++)
                {
                    multiple += UnZigZag(Wide(planes, i, width, count));
                    values[i] = (float)(multiple * resolution);
                }
                break;
        }
        for (var i = 0; i < count && !valid.IsEmpty; i++) if ((valid[i >> 3] & 1 << (i & 7)) == 0) values[i] = float.NaN;
        return values;
    }

    private static double[] Precise(ReadOnlySpan<byte> planes, ReadOnlySpan<byte> valid, int width, int count, long first, double resolution)
    {
        var values = GC.AllocateUninitializedArray<double>(count);
        var multiple = first;
        for (var i = 0; i < values.Length; i++)
        {
            if (width > 0) multiple += UnZigZag(Wide(planes, i, width, count));
            values[i] = valid.IsEmpty || (valid[i >> 3] & 1 << (i & 7)) != 0 ? multiple * resolution : double.NaN;
        }
        return values;
    }

    private static ulong Wide(ReadOnlySpan<byte> planes, int i, int width, int count)
    {
        ulong value = 0;
        for (var plane = 0; plane < width; plane++) value |= (ulong)planes[plane * count + i] << (8 * plane);
        return value;
    }

    private static long ZigZag(long difference) => (difference << 1) ^ (difference >> 63);

    private static long UnZigZag(ulong coded) => (long)(coded >> 1) ^ -(long)(coded & 1);
}
