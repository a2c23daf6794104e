using System.Globalization;
using System.IO.Compression;
using nietras.SeparatedValues;

namespace WearWatch.Import;

/// <summary>A row that could not be read: nothing of it was sent, and it says why.</summary>
internal sealed record RowProblem(string File, int Line, string Column, string Message)
{
    /// <summary>The row as text; empty where it is the file as a whole.</summary>
    public string Text { get; init; } = "";
    /// <summary>Id of the fact that the row would have been, where the row has one.</summary>
    public string Id { get; init; } = "";
}

/// <summary>
/// One CSV file of the import folder, read whole: rows of text with their line numbers. An unknown or missing column
/// refuses the file; a bad field refuses its row alone (see <see cref="CsvRow"/>).
/// </summary>
internal sealed class CsvTable
{
    private readonly Dictionary<string, int> _columns;

    private CsvTable(string file, Dictionary<string, int> columns, List<CsvRow> rows)
    {
        File = file;
        _columns = columns;
        Rows = rows;
        foreach (var row in rows) row.Table = this;
    }

    public string File { get; }

    public IReadOnlyList<CsvRow> Rows { get; }

    public int? IndexOf(string column) => _columns.TryGetValue(column, out var index) ? index : null;

    /// <summary>Reads <c>NAME.csv</c> or <c>NAME.csv.gz</c>; null when there is neither.</summary>
    /// <param name="folder">The import folder.</param>
    /// <param name="name">File name without its ending.</param>
    /// <param name="columns">Columns allowed, separated by blanks; required ones end in <c>!</c>.</param>
    /// <param name="problems">Where a file that cannot be read is noted.</param>
    public static CsvTable? Read(string folder, string name, string columns, List<RowProblem> problems)
    {
        var file = new[] { $"{name}.csv", $"{name}.csv.gz" }.FirstOrDefault(f => System.IO.File.Exists(Path.Combine(folder, f)));
        if (file is null) return null;
        try
        {
            using var text = OpenText(Path.Combine(folder, file));
            return Read(file, text, columns.Split(' ', StringSplitOptions.RemoveEmptyEntries), problems);
        }
        catch (InvalidDataException broken)
        {
            problems.Add(new(file, 0, "", broken.Message));
            return null;
        }
    }

    /// <summary>Opens a plain or gzipped text file; a gzip that ends early is refused, not read halfway.</summary>
    /// <exception cref="InvalidDataException">The file is empty, or its gzip is broken.</exception>
    public static TextReader OpenText(string path)
    {
        if (new FileInfo(path).Length == 0) throw new InvalidDataException("the file is empty");
        if (!path.EndsWith(".gz", StringComparison.Ordinal))
        {
            if (IsBinary(path)) throw new InvalidDataException("the file is not text: save it as CSV, not as a workbook");
            return new StreamReader(path);
        }
        var whole = new MemoryStream();
        using (var compressed = System.IO.File.OpenRead(path))
        using (var gzip = new GZipStream(compressed, CompressionMode.Decompress))
        {
            gzip.CopyTo(whole);
        }
        // RFC 1952: the last four bytes of a member hold the length of its data, modulo 2^32. A transfer that was cut
        // off lacks them.
        using var tail = System.IO.File.OpenRead(path);
        tail.Seek(-4, SeekOrigin.End);
        Span<byte> length = stackalloc byte[4];
        tail.ReadExactly(length);
        if (BitConverter.ToUInt32(length) != (uint)whole.Length) throw new InvalidDataException("the gzip file ends early: it was only half written");
        whole.Position = 0;
        return new StreamReader(whole);
    }

    /// <summary>A zero byte in its first 4 KB, and no mark of UTF-16 or UTF-32 before it.</summary>
    private static bool IsBinary(string path)
    {
        using var file = System.IO.File.OpenRead(path);
        Span<byte> head = stackalloc byte[4096];
        head = head[..file.ReadAtLeast(head, head.Length, throwOnEndOfStream: false)];
        return head.Contains((byte)0) && !head.StartsWith((ReadOnlySpan<byte>)[0xFF, 0xFE]) && !head.StartsWith((ReadOnlySpan<byte>)[0xFE, 0xFF]) && !head.StartsWith((ReadOnlySpan<byte>)[0, 0, 0xFE, 0xFF]);
    }

    private static CsvTable? Read(string file, TextReader text, string[] columns, List<RowProblem> problems)
    {
        using var reader = Sep.New(',').Reader(o => o with { Unescape = true, DisableColCountCheck = true }).From(text);
        var names = reader.Header.ColNames;
        if (names.Count == 0) throw new InvalidDataException("the file has no header line");
        var allowed = columns.ToDictionary(c => c.TrimEnd('!'), c => c.EndsWith('!'), StringComparer.Ordinal);
        var unknown = names.FirstOrDefault(n => !allowed.ContainsKey(n));
        if (unknown is not null)
        {
            problems.Add(new(file, 1, unknown, names.Count == 1 && unknown.Contains(';')
                ? "fields are separated by semicolons; use commas, and a point as the decimal mark"
                : $"column '{unknown}' is not one this file has"));
            return null;
        }
        var missing = allowed.FirstOrDefault(a => a.Value && !names.Contains(a.Key)).Key;
        if (missing is not null)
        {
            problems.Add(new(file, 1, missing, $"column '{missing}' is missing"));
            return null;
        }
        var rows = new List<CsvRow>();
        foreach (var row in reader)
        {
            var fields = new string[row.ColCount];
            for (var i = 0; i < fields.Length; i++) fields[i] = row[i].ToString();
            if (fields.Length == 1 && fields[0].Length == 0) continue;
            if (fields.Length == names.Count) rows.Add(new CsvRow(row.LineNumberFrom, fields));
            else
            {
                var comma = fields.Length > names.Count ? ": a decimal comma? Use a point as the decimal mark" : "";
                problems.Add(new(file, row.LineNumberFrom, "", $"the row has {fields.Length} fields, the header {names.Count}{comma}") { Text = string.Join(',', fields) });
            }
        }
        return new CsvTable(file, names.Select((n, i) => (n, i)).ToDictionary(c => c.n, c => c.i, StringComparer.Ordinal), rows);
    }
}

/// <summary>One row; the first field that cannot be read is kept as its <see cref="Problem"/>.</summary>
internal sealed class CsvRow(int line, string[] fields)
{
    public CsvTable Table { get; set; } = null!;

    public int Line => line;

    public RowProblem? Problem { get; private set; }

    public string AsText => string.Join(',', fields);

    public string Text(string column) => Table.IndexOf(column) is { } i ? fields[i].Trim() : "";

    public double? Number(string column)
    {
        var text = Text(column);
        if (text.Length == 0) return null;
        if (double.TryParse(text, NumberStyles.Float, CultureInfo.InvariantCulture, out var value)) return value;
        return Fail<double?>(column, text.Contains(',')
            ? $"'{text}' has a decimal comma; use a point as the decimal mark"
            : $"'{text}' is not a number");
    }

    public int? Whole(string column)
    {
        var text = Text(column);
        if (text.Length == 0) return null;
        return int.TryParse(text, NumberStyles.AllowLeadingSign, CultureInfo.InvariantCulture, out var value)
            ? value
            : Fail<int?>(column, $"'{text}' is not a whole number");
    }

    public bool Flag(string column, bool whenEmpty = false) => Text(column) switch
    {
        "" => whenEmpty,
        "true" => true,
        "false" => false,
        var text => Fail<bool>(column, $"'{text}' is neither true nor false"),
    };

    public Google.Protobuf.WellKnownTypes.Timestamp? Time(string column)
    {
        var text = Text(column);
        if (text.Length == 0) return null;
        return DateTimeOffset.TryParse(text, CultureInfo.InvariantCulture, DateTimeStyles.AssumeUniversal, out var time) && text.Contains('T')
            ? Google.Protobuf.WellKnownTypes.Timestamp.FromDateTimeOffset(time)
            : Fail<Google.Protobuf.WellKnownTypes.Timestamp?>(column, $"'{text}' is not a time such as 2026-03-02T07:40:00Z");
    }

    /// <summary>One of the words of an enum of the contract; the unspecified value where the field is empty.</summary>
    public T Word<T>(string column, T whenEmpty, params (string Word, T Value)[] words)
    {
        var text = Text(column);
        if (text.Length == 0) return whenEmpty;
        foreach (var (word, value) in words) if (word == text) return value;
        return Fail<T>(column, $"'{text}' is not one of {string.Join(", ", words.Select(w => w.Word))}");
    }

    /// <summary>Fields that hold several words, separated by semicolons.</summary>
    public IEnumerable<string> Words(string column) => Text(column).Split(';', StringSplitOptions.RemoveEmptyEntries | StringSplitOptions.TrimEntries);

    public T Fail<T>(string column, string message)
    {
        Problem ??= new(Table.File, line, column, message) { Text = AsText, Id = Text("id") };
        return default!;
    }
}
