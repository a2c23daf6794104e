using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Where the fittings of each position begin, as recorded; inferred ones are added while reading.</summary>
internal sealed class FittingCuts
{
    /// <summary>One beginning.</summary>
    /// <param name="Survey">First survey that belongs to it (the count of surveys before).</param>
    /// <param name="Record">The record behind it; null at the first and at inferred ones.</param>
    /// <param name="Km">Distance of the record.</param>
    public sealed record Cut(int Survey, FittingRecord? Record, double? Km);

    private readonly Position[] _positions;
    private readonly PositionIndex _index;
    private readonly List<Cut>[] _cuts;
    private readonly Dictionary<string, Tyre> _tyres;

    private static readonly Dictionary<string, Tyre> s_noTyres = [];

    public FittingCuts(VehicleTread tread, IReadOnlyList<StoredSurvey> surveys, IReadOnlyList<FittingRecord> records, DistanceAxis axis)
    {
        _tyres = tread.Tyres.Count == 0 ? s_noTyres : tread.Tyres.GroupBy(t => t.TyreId).ToDictionary(g => g.Key, g => g.First());
        _positions = [.. tread.Vehicle.Positions()];
        _index = new PositionIndex(_positions);
        _cuts = [.. _positions.Select(_ => new List<Cut> { new(0, null, null) })];
        foreach (var record in records)
        {
            var before = surveys.TakeWhile(s => s.Survey.At < record.At).Count();
            Add(record.Position, new Cut(before, record, axis.At(record.At).Value));
            // A move empties the place the tyre came from; what is there afterwards is another tyre.
            if (record.Event == FittingEvent.Moved && record.FromPosition is { } from && !records.Any(r => r.Position == from && r.At >= record.At && r.At <= record.At.AddDays(2)))
                Add(from, new Cut(before, null, axis.At(record.At).Value));
        }
    }

    /// <summary>Beginnings at a position, by its number in the vehicle's order.</summary>
    public IReadOnlyList<Cut> At(int position) => _cuts[position];

    /// <summary>The beginnings as they stand, to come back to.</summary>
    public Cut[][] Saved() => [.. _cuts.Select(c => c.ToArray())];

    public void Restore(Cut[][] saved)
    {
        for (var p = 0; p < saved.Length; p++)
        {
            _cuts[p].Clear();
            _cuts[p].AddRange(saved[p]);
        }
    }

    /// <summary>Takes an inferred beginning back.</summary>
    public void Drop(int position, int survey) => _cuts[position].RemoveAll(c => c.Survey == survey && c.Survey > 0 && c.Record is null && c.Km is null);

    /// <summary>Adds a beginning; of two at one survey the later record counts.</summary>
    public void Add(Position position, Cut cut)
    {
        if (_index[position] is not (>= 0 and var p)) return;
        var list = _cuts[p];
        if (cut.Record is null && list.Any(c => c.Survey == cut.Survey)) return;
        list.RemoveAll(c => c.Survey == cut.Survey);
        list.Add(cut);
        list.Sort((a, b) => a.Survey.CompareTo(b.Survey));
    }

    /// <summary>Index of the fitting that a survey falls in.</summary>
    public int Of(int position, int survey)
    {
        var list = _cuts[position];
        var at = list.Count - 1;
        while (at >= 0 && list[at].Survey > survey) at--;
        return at;
    }

    public Tyre? Tyre(string? id) => id is not null && _tyres.TryGetValue(id, out var tyre) ? tyre : null;

    /// <summary>The record that says which tyre is on a position in a fitting: a tyre moved or turned is still the one it was.</summary>
    public FittingRecord? Identity(int position, int index)
    {
        for (var depth = 0; depth < 8 && index >= 0; depth++)
        {
            var record = _cuts[position][index].Record;
            if (record is null or { TyreId: not null } or { NewDepthMm: not null } or { Event: FittingEvent.Fitted or FittingEvent.Removed }) return record;
            if (record is { Event: FittingEvent.Moved, FromPosition: { } from } && _index[from] is >= 0 and var there)
            {
                var survey = _cuts[position][index].Survey;
                (index, position) = (_cuts[there].FindLastIndex(c => c.Survey <= survey && (c.Record is null || c.Record.At < record.At) && c.Survey < Math.Max(1, survey)), there);
            }
            else
            {
                index--;
            }
        }
        return null;
    }

    /// <summary>Depth when new of the tyre of a fitting, mm; null where nobody recorded it.</summary>
    public double? NewDepth(int position, int index) => Identity(position, index) is { Event: not FittingEvent.Removed } r ? r.NewDepthMm ?? Tyre(r.TyreId)?.NewDepthMm : null;
}
