using System.IO.Compression;

namespace WearWatch.Simulator;

/// <summary>Writes one gzipped CSV of samples, each number as a whole multiple of its channel's step.</summary>
public sealed class SampleFile : IDisposable
{
    private readonly GZipStream _gzip;
    private readonly byte[] _buffer = new byte[1 << 16];
    private readonly (double Step, long Scale, int Decimals, bool Decimal)[] _formats;
    private int _used;

    public SampleFile(string path, Channel[] channels)
    {
        _gzip = new GZipStream(File.Create(path, 1 << 16), CompressionLevel.Fastest);
        _formats = Array.ConvertAll(channels, c => Format(c.Resolution));
        Text("time_s");
        foreach (var channel in channels)
        {
            Text(",");
            Text(channel.Name);
        }
        Text("\n");
    }

    private static (double, long, int, bool) Format(double step)
    {
        for (var decimals = 0; decimals <= 6; decimals++)
        {
            var scale = (long)Math.Round(Math.Pow(10, decimals));
            var whole = step * scale;
            if (Math.Abs(whole - Math.Round(whole)) < 1e-9 && Math.Round(whole) >= 1) return (step, (long)Math.Round(whole), decimals, true);
        }
        return (step, 0, 6, false);
    }

    /// <param name="tenths">Time of the row, tenths of a second.</param>
    /// <param name="values">One value a channel; NaN where the sample is missing.</param>
    public void Row(int tenths, ReadOnlySpan<double> values)
    {
        if (_used > _buffer.Length - 1024) Flush();
        Number(tenths, 1);
        for (var i = 0; i < values.Length; i++)
        {
            _buffer[_used++] = (byte)',';
            if (double.IsNaN(values[i])) continue;
            var (step, scale, decimals, exact) = _formats[i];
            var steps = (long)Math.Round(values[i] / step);
            Number(exact ? steps * scale : (long)Math.Round(steps * step * 1e6), decimals);
        }
        _buffer[_used++] = (byte)'\n';
    }

    /// <summary>A whole number of 10^−decimals, without trailing zeros.</summary>
    private void Number(long value, int decimals)
    {
        while (decimals > 0 && value % 10 == 0)
        {
            value /= 10;
            decimals--;
        }
        if (value < 0)
        {
            _buffer[_used++] = (byte)'-';
            value = -value;
        }
        Span<byte> digits = stackalloc byte[20];
        var n = 0;
        do
        {
            digits[n++] = (byte)('0' + value % 10);
            value /= 10;
        }
        while (value > 0);
        while (n <= decimals) digits[n++] = (byte)'0';
        while (n > 0)
        {
            _buffer[_used++] = digits[--n];
            if (n == decimals && n > 0) _buffer[_used++] = (byte)'.';
        }
    }

    private void Text(string text)
    {
        foreach (var rune in text) _buffer[_used++] = (byte)rune;
    }

    private void Flush()
    {
        _gzip.Write(_buffer, 0, _used);
        _used = 0;
    }

    public void Dispose()
    {
        Flush();
        _gzip.Dispose();
    }
}
