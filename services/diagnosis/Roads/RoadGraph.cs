namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// Which vehicle was seen on which cell, each pair once, listed by vehicle and again by cell. Entries of a vehicle stand in order of
/// their cells and entries of a cell in order of their vehicles, so that every sum has one order.
/// </summary>
internal sealed class RoadGraph
{
    /// <param name="vehicleFrom">Where each vehicle's sightings start; one more than there are vehicles.</param>
    /// <param name="cell">Cell of each sighting, ascending within a vehicle.</param>
    /// <param name="cells">Number of cells.</param>
    public RoadGraph(int[] vehicleFrom, int[] cell, int cells)
    {
        (Vehicles, Cells) = (vehicleFrom.Length - 1, cells);
        VehicleFrom = new int[Vehicles + 1];
        var pairs = 0;
        for (var v = 0; v < Vehicles; v++)
        {
            for (var i = vehicleFrom[v]; i < vehicleFrom[v + 1]; i++)
                if (i == vehicleFrom[v] || cell[i] != cell[i - 1]) pairs++;
            VehicleFrom[v + 1] = pairs;
        }
        (CellOf, SightingFrom) = (new int[pairs], new int[pairs + 1]);
        SightingFrom[pairs] = cell.Length;
        var at = 0;
        for (var v = 0; v < Vehicles; v++)
            for (var i = vehicleFrom[v]; i < vehicleFrom[v + 1]; i++)
                if (i == vehicleFrom[v] || cell[i] != cell[i - 1]) (CellOf[at], SightingFrom[at++]) = (cell[i], i);
        CellFrom = new int[cells + 1];
        foreach (var c in CellOf) CellFrom[c + 1]++;
        for (var c = 0; c < cells; c++) CellFrom[c + 1] += CellFrom[c];
        (VehicleOf, PairOf) = (new int[pairs], new int[pairs]);
        var next = CellFrom.AsSpan(0, cells).ToArray();
        for (var v = 0; v < Vehicles; v++)
            for (var e = VehicleFrom[v]; e < VehicleFrom[v + 1]; e++)
            {
                var j = next[CellOf[e]]++;
                (VehicleOf[j], PairOf[j]) = (v, e);
            }
        (ByVehicle, ByCell) = (new(VehicleFrom), new(CellFrom));
    }

    public int Vehicles { get; }
    public int Cells { get; }
    public int Pairs => CellOf.Length;
    /// <summary>Where each vehicle's pairs start.</summary>
    public int[] VehicleFrom { get; }
    /// <summary>Cell of each pair, by vehicle.</summary>
    public int[] CellOf { get; }
    /// <summary>Where each pair's sightings start.</summary>
    public int[] SightingFrom { get; }
    /// <summary>Where each cell's pairs start in the list by cell.</summary>
    public int[] CellFrom { get; }
    /// <summary>Vehicle of each pair, by cell.</summary>
    public int[] VehicleOf { get; }
    /// <summary>Number by vehicle of each pair in the list by cell.</summary>
    public int[] PairOf { get; }
    public RoadParts ByVehicle { get; }
    public RoadParts ByCell { get; }

    /// <summary>Groups of vehicles joined by shared cells, numbered by their lowest vehicle (union-find).</summary>
    public static (int[] Group, int Groups) Join(int vehicles, int[] vehicleFrom, int[] cell, int cells)
    {
        var root = new int[vehicles];
        for (var v = 0; v < vehicles; v++) root[v] = v;
        int Find(int v)
        {
            while (root[v] != v) v = root[v] = root[root[v]];
            return v;
        }
        var first = new int[cells];
        Array.Fill(first, -1);
        for (var v = 0; v < vehicles; v++)
            for (var i = vehicleFrom[v]; i < vehicleFrom[v + 1]; i++)
            {
                if (first[cell[i]] < 0) { first[cell[i]] = v; continue; }
                var (a, b) = (Find(v), Find(first[cell[i]]));
                root[Math.Max(a, b)] = Math.Min(a, b);
            }
        var (group, groups) = (new int[vehicles], 0);
        for (var v = 0; v < vehicles; v++) group[v] = Find(v) == v ? groups++ : group[Find(v)];
        return (group, groups);
    }
}
