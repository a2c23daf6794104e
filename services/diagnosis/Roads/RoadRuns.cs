using System.Runtime.InteropServices;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Roads;

/// <summary>One straight run without its names. A witness that was not measured, or not fit to use, is NaN.</summary>
[StructLayout(LayoutKind.Sequential, Pack = 4)]
internal struct RoadRow
{
    public int Vehicle, Stream, Cell; // Cell is −1 without position
    public long Start, Sequence;      // Start in UTC ticks
    public float Seconds;
    public RunMode Mode;
    public bool IncludesAssist;
    public float Torque, TorqueError, Angle, AngleError, Bank, BankError;
}

/// <summary>
/// Straight runs as one table of numbers, names kept once: 60 bytes a run, so that millions can be added as they are read. Figures
/// are kept to 7 digits, far finer than any run's own error.
/// </summary>
public sealed class RoadRuns(int capacity = 0)
{
    private RoadRow[] _rows = new RoadRow[capacity];
    private readonly Names _vehicles = new(), _streams = new(), _cells = new();

    public int Count { get; private set; }
    internal ReadOnlySpan<RoadRow> Rows => _rows.AsSpan(0, Count);
    internal RoadRow[] Table => _rows;
    internal IReadOnlyList<string> Vehicles => _vehicles.List;
    internal IReadOnlyList<string> Streams => _streams.List;
    internal IReadOnlyList<string> Cells => _cells.List;

    public static RoadRuns Of(IReadOnlyCollection<StraightRun> runs)
    {
        var table = new RoadRuns(runs.Count);
        foreach (var run in runs) table.Add(run);
        return table;
    }

    public void Add(StraightRun run)
    {
        if (Count == _rows.Length) Array.Resize(ref _rows, Math.Max(64, Count + Count / 2));
        ref var row = ref _rows[Count++];
        row.Vehicle = _vehicles.Number(run.VehicleId);
        row.Stream = _streams.Number(run.StreamId);
        row.Cell = run.RoadCell is null ? -1 : _cells.Number(run.RoadCell);
        (row.Start, row.Sequence, row.Seconds, row.Mode, row.IncludesAssist) = (run.Start.UtcTicks, run.Sequence, (float)run.Seconds, run.Mode, run.TorqueIncludesAssist);
        (row.Torque, row.TorqueError) = Witness(run.TorqueNm);
        (row.Angle, row.AngleError) = Witness(run.AngleDeg);
        (row.Bank, row.BankError) = Witness(run.BankReading);
    }

    private static (float Value, float Error) Witness(Estimate? e)
    {
        if (e is not { } x) return (float.NaN, float.NaN);
        var (value, error) = ((float)x.Value, (float)x.StandardError);
        return float.IsFinite(value) && float.IsFinite(error * error) && error >= 0 ? (value, error) : (float.NaN, float.NaN);
    }

    /// <summary>Numbers for names in order of first sight; the same name twice in a row is not looked up again.</summary>
    private sealed class Names
    {
        private readonly Dictionary<string, int> _numbers = new(StringComparer.Ordinal);
        private string? _last;
        private int _lastNumber;

        public List<string> List { get; } = [];

        public int Number(string name)
        {
            if (string.Equals(name, _last, StringComparison.Ordinal)) return _lastNumber;
            if (!_numbers.TryGetValue(name, out var number))
            {
                _numbers[name] = number = List.Count;
                List.Add(name);
            }
            (_last, _lastNumber) = (name, number);
            return number;
        }
    }
}
