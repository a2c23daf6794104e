namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// Runs put in one order whatever the order they came in: by vehicle, stream, time, and last by every figure they hold, so that two
/// runs that still tie are the same run twice.
/// </summary>
internal sealed class RunOrder(RoadRuns runs) : IComparer<int>
{
    private readonly RoadRow[] _rows = runs.Table;
    private readonly int[] _streamRank = Ranks(runs.Streams);

    /// <param name="vehicleOf">Number of each of the table's vehicles, −1 where it is not wanted.</param>
    /// <param name="vehicles">How many numbers there are.</param>
    /// <returns>Rows in order, and where each vehicle's start.</returns>
    public (int[] Rows, int[] From) By(int[] vehicleOf, int vehicles)
    {
        var from = new int[vehicles + 1];
        foreach (ref readonly var row in runs.Rows) if (vehicleOf[row.Vehicle] is var v and >= 0) from[v + 1]++;
        for (var v = 0; v < vehicles; v++) from[v + 1] += from[v];
        var (order, next) = (new int[from[vehicles]], from.AsSpan(0, vehicles).ToArray());
        for (var i = 0; i < runs.Count; i++) if (vehicleOf[_rows[i].Vehicle] is var v and >= 0) order[next[v]++] = i;
        new RoadParts(from).Each((_, first, end) =>
        {
            for (var v = first; v < end; v++) order.AsSpan(from[v], from[v + 1] - from[v]).Sort(this);
        });
        return (order, from);
    }

    public int Compare(int i, int j)
    {
        ref readonly var a = ref _rows[i];
        ref readonly var b = ref _rows[j];
        if (_streamRank[a.Stream] != _streamRank[b.Stream]) return _streamRank[a.Stream].CompareTo(_streamRank[b.Stream]);
        if (a.Start != b.Start) return a.Start.CompareTo(b.Start);
        if (a.Sequence != b.Sequence) return a.Sequence.CompareTo(b.Sequence);
        return i == j ? 0 : Rest(a, b);
    }

    private int Rest(in RoadRow a, in RoadRow b)
    {
        var name = string.CompareOrdinal(a.Cell < 0 ? null : runs.Cells[a.Cell], b.Cell < 0 ? null : runs.Cells[b.Cell]);
        if (name != 0) return name;
        return (a.Mode, a.Seconds, a.IncludesAssist, a.Torque, a.TorqueError, (a.Angle, a.AngleError, a.Bank, a.BankError))
            .CompareTo((b.Mode, b.Seconds, b.IncludesAssist, b.Torque, b.TorqueError, (b.Angle, b.AngleError, b.Bank, b.BankError)));
    }

    /// <summary>Place of each name among all in ordinal order.</summary>
    private static int[] Ranks(IReadOnlyList<string> names)
    {
        var (sorted, rank) = (names.ToArray(), new int[names.Count]);
        var index = new int[names.Count];
        for (var i = 0; i < index.Length; i++) index[i] = i;
        Array.Sort(sorted, index, StringComparer.Ordinal);
        for (var place = 0; place < index.Length; place++) rank[index[place]] = place;
        return rank;
    }
}
