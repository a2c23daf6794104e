using System.Globalization;
using Google.Protobuf.WellKnownTypes;
using nietras.SeparatedValues;
using WearWatch.Contracts.V1;

namespace WearWatch.Import;

/// <summary>One file of equal-rate samples, cut into chunks for the steering stream.</summary>
/// <param name="Header">What the stream begins with.</param>
/// <param name="Path">The file.</param>
/// <param name="File">Its name inside the folder, for messages.</param>
/// <param name="Start">Time of <c>time_s</c> = 0.</param>
internal sealed record SteeringFile(StreamHeader Header, string Path, string File, DateTimeOffset Start)
{
    /// <summary>Longest chunk, samples: a minute at 10 Hz, a few hundred kilobytes at 200 Hz.</summary>
    private const int ChunkSamples = 600;

    /// <summary>The streams named in steering_streams.csv with their vehicles' channels.</summary>
    public static List<SteeringFile> List(string folder, FolderFacts facts)
    {
        var problems = facts.Problems;
        var channels = (CsvTable.Read(folder, "steering_channels", "vehicle_id! channel! unit! resolution!", problems)?.Rows ?? [])
            .Select(r => (Vehicle: r.Text("vehicle_id"), Info: ChannelOf(r), r.Problem))
            .ToList();
        problems.AddRange(channels.Where(c => c.Problem is not null).Select(c => c.Problem!));
        var byVehicle = channels.Where(c => c.Problem is null).ToLookup(c => c.Vehicle, c => c.Info);
        var files = new List<SteeringFile>();
        foreach (var row in CsvTable.Read(folder, "steering_streams", "stream_id! vehicle_id! file! start! rate_hz!", problems)?.Rows ?? [])
        {
            var header = new StreamHeader { StreamId = row.Text("stream_id"), VehicleId = row.Text("vehicle_id"), RateHz = row.Number("rate_hz") ?? 0 };
            header.DepotId = facts.HomeDepot(header.VehicleId);
            header.Channels.Add(byVehicle[header.VehicleId]);
            var path = System.IO.Path.GetFullPath(System.IO.Path.Combine(folder, row.Text("file")));
            if (!path.StartsWith(System.IO.Path.GetFullPath(folder), StringComparison.Ordinal)) row.Fail<bool>("file", "the file lies outside the folder");
            else if (!System.IO.File.Exists(path)) row.Fail<bool>("file", $"'{row.Text("file")}' is not there");
            var start = row.Time("start");
            if (start is null) row.Fail<bool>("start", "the start time is missing");
            if (row.Problem is { } problem) problems.Add(problem);
            else files.Add(new(header, path, row.Text("file"), start!.ToDateTimeOffset()));
        }
        return files;
    }

    private static ChannelInfo ChannelOf(CsvRow row) => new()
    {
        Channel = row.Enum<Channel>("channel"),
        Unit = row.Word("unit", ChannelUnit.Unspecified,
            ("km/h", ChannelUnit.KmPerHour), ("mph", ChannelUnit.MilesPerHour), ("deg", ChannelUnit.Degrees), ("N·m", ChannelUnit.NewtonMetres),
            ("Nm", ChannelUnit.NewtonMetres), ("raw", ChannelUnit.Raw), ("deg/s", ChannelUnit.DegreesPerSecond), ("m/s²", ChannelUnit.MetresPerSecondSquared),
            ("m/s2", ChannelUnit.MetresPerSecondSquared), ("1", ChannelUnit.One), ("km", ChannelUnit.Km), ("mi", ChannelUnit.Miles), ("kg", ChannelUnit.Kilograms)),
        Resolution = row.Number("resolution") ?? 0,
    };

    /// <summary>Reads the file chunk by chunk; a gap in <c>time_s</c> starts a new chunk.</summary>
    /// <exception cref="InvalidDataException">A column is unknown or missing, or a field is not a number (with its line).</exception>
    public List<SteeringChunk> Chunks()
    {
        using var text = CsvTable.OpenText(Path);
        using var reader = Sep.New(',').Reader(o => o with { DisableColCountCheck = true }).From(text);
        var columns = Columns(reader.Header.ColNames);
        var chunk = new ChunkBuilder(Header, Start);
        var chunks = new List<SteeringChunk>();
        var last = double.NaN;
        while (reader.MoveNext())
        {
            var row = reader.Current;
            if (row.ColCount != columns.Length)
                throw new InvalidDataException($"line {row.LineNumberFrom}: {row.ColCount} fields, the header has {columns.Length} (a decimal comma? Use a point as the decimal mark)");
            var time = Time(row[0].Span, row.LineNumberFrom);
            if (chunk.Samples > 0 && (chunk.Samples == ChunkSamples || time - last > 1.5 / Header.RateHz || time <= last)) chunks.Add(chunk.Take());
            chunk.Begin(time);
            for (var i = 1; i < columns.Length; i++) chunk.Add(columns[i], row[i].Span, row.LineNumberFrom);
            chunk.Samples++;
            last = time;
        }
        if (chunk.Samples > 0) chunks.Add(chunk.Take());
        return chunks;
    }

    private Channel[] Columns(IReadOnlyList<string> names)
    {
        if (names.Count < 2 || names[0] != "time_s") throw new InvalidDataException("the first column must be time_s");
        var known = Header.Channels.ToDictionary(c => EnumWords.Word(c.Channel), c => c.Channel);
        var unknown = names.Skip(1).FirstOrDefault(n => !known.ContainsKey(n));
        if (unknown is not null) throw new InvalidDataException($"column '{unknown}' is not among the vehicle's channels in steering_channels.csv");
        foreach (var absent in Header.Channels.Where(c => !names.Contains(EnumWords.Word(c.Channel))).ToList()) Header.Channels.Remove(absent);
        return [Channel.Unspecified, .. names.Skip(1).Select(n => known[n])];
    }

    private static double Time(ReadOnlySpan<char> field, int line) =>
        double.TryParse(field, NumberStyles.Float, CultureInfo.InvariantCulture, out var value) && double.IsFinite(value)
            ? value
            : throw new InvalidDataException($"line {line}, time_s: '{field}' is not a number");

    /// <summary>Columns of the chunk being read.</summary>
    private sealed class ChunkBuilder(StreamHeader header, DateTimeOffset start)
    {
        private long _sequence;
        private double _firstTime;
        private Column[] _columns = Fresh(header);
        private readonly byte[][] _missing = [.. header.Channels.Select(_ => new byte[ChunkSamples / 8 + 1])];
        private readonly Dictionary<Channel, int> _index = header.Channels.Select((c, i) => (c.Channel, i)).ToDictionary(c => c.Channel, c => c.i);

        public int Samples { get; set; }

        public void Begin(double time)
        {
            if (Samples == 0) _firstTime = time;
        }

        public void Add(Channel channel, ReadOnlySpan<char> field, int line)
        {
            var index = _index[channel];
            double value = 0;
            if (field.Length == 0) _missing[index][Samples / 8] |= (byte)(1 << (Samples % 8));
            else if (!double.TryParse(field, NumberStyles.Float, CultureInfo.InvariantCulture, out value))
                throw new InvalidDataException($"line {line}, {EnumWords.Word(channel)}: '{field}' is not a number");
            var column = _columns[index];
            if (IsPrecise(channel)) column.PreciseValues.Add(value);
            else column.Values.Add((float)value);
        }

        public SteeringChunk Take()
        {
            var chunk = new SteeringChunk { Sequence = ++_sequence, Start = Timestamp.FromDateTimeOffset(start.AddSeconds(_firstTime)) };
            for (var i = 0; i < _columns.Length; i++)
            {
                if (_missing[i].AsSpan().ContainsAnyExcept((byte)0)) _columns[i].Missing = Google.Protobuf.ByteString.CopyFrom(_missing[i], 0, (Samples + 7) / 8);
                Array.Clear(_missing[i]);
            }
            chunk.Columns.Add(_columns);
            _columns = Fresh(header);
            Samples = 0;
            return chunk;
        }

        private static Column[] Fresh(StreamHeader header) => [.. header.Channels.Select(c =>
        {
            var column = new Column { Channel = c.Channel };
            if (IsPrecise(c.Channel)) column.PreciseValues.Capacity = ChunkSamples;
            else column.Values.Capacity = ChunkSamples;
            return column;
        })];

        private static bool IsPrecise(Channel channel) => channel is Channel.Latitude or Channel.Longitude or Channel.Distance;
    }
}
