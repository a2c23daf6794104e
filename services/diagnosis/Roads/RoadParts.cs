namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// A fixed cut of rows into parts of about equal work. It depends on the rows alone, never on the number of processors, and each part
/// writes its own results, which are added up in order: the same bits on any machine and thread count.
/// </summary>
internal sealed class RoadParts
{
    private const int LeastWork = 1 << 14, Most = 64;

    private readonly int[] _bounds;

    /// <param name="from">Where each row's entries start; one more than there are rows.</param>
    public RoadParts(int[] from)
    {
        var (rows, work) = (from.Length - 1, (long)from[^1] + from.Length);
        Count = (int)Math.Clamp(work / LeastWork, 1, Most);
        _bounds = new int[Count + 1];
        _bounds[Count] = rows;
        var row = 0;
        for (var part = 1; part < Count; part++)
        {
            while (row < rows && from[row] + (long)row < work * part / Count) row++;
            _bounds[part] = row;
        }
    }

    public int Count { get; }

    /// <summary>Runs the action with each part's number and its rows' bounds.</summary>
    public void Each(Action<int, int, int> action)
    {
        if (Count == 1) action(0, 0, _bounds[1]);
        else Parallel.For(0, Count, part => action(part, _bounds[part], _bounds[part + 1]));
    }
}
