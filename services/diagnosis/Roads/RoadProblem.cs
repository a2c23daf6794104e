using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Roads;

/// <summary>Where a cell's bank is drawn to: the usual crown of its side (level shared), or what an earlier fit found.</summary>
internal readonly record struct CellPrior(double Bank, double Weight, bool OnLevel);

/// <summary>Runs and vehicles sorted and numbered, witnesses in flat columns: torque, angle, bank reading.</summary>
internal sealed class RoadProblem
{
    /// <summary>With fewer steady runs than this, driven ones are taken too.</summary>
    public const int EnoughSteadyRuns = 5;

    /// <summary>Lanes a vehicle, pair, trip or class takes; the witnesses fill the first three.</summary>
    public const int Lanes = 4;

    /// <summary>Numbers a sighting takes; read four at a time, the last belonging to the next sighting and counting for nothing.</summary>
    public const int Witnesses = 3;

    private readonly RoadRow[] _rows;
    private readonly bool[] _assistLogged;
    private readonly int[] _cellNumber; // by the table's name
    private int[] _cellOfRun = [];      // by place in the order, −1 where the run is not part of the fit; only while numbering
    private readonly List<(int Vehicle, int Name)> _cells = [];

    /// <param name="runs">All runs, or a day's new ones.</param>
    /// <param name="vehicles">Runs of others are left out.</param>
    /// <param name="earlier">Whether an earlier fit already knows the vehicle's steady runs, so that driven ones are not wanted.</param>
    public RoadProblem(RoadRuns runs, IReadOnlyList<RoadVehicle> vehicles, Func<string, bool>? earlier = null)
    {
        (Runs, _rows) = (runs, runs.Table);
        Vehicles = vehicles.OrderBy(v => v.VehicleId, StringComparer.Ordinal).DistinctBy(v => v.VehicleId).ToArray();
        var index = new Dictionary<string, int>(Vehicles.Length, StringComparer.Ordinal);
        for (var v = 0; v < Vehicles.Length; v++) index[Vehicles[v].VehicleId] = v;
        (Order, RunFrom) = new RunOrder(runs).By(runs.Vehicles.Select(id => index.GetValueOrDefault(id, -1)).ToArray(), Vehicles.Length);
        Gains = Vehicles.Select(v => (v.Class, KindOf(v))).Distinct().Order().ToArray();
        GainOf = Vehicles.Select(v => Array.IndexOf(Gains, (v.Class, KindOf(v)))).ToArray();
        (TakesDriven, _assistLogged) = (new bool[Vehicles.Length], new bool[Vehicles.Length]);
        TripFrom = new int[Vehicles.Length + 1];
        (_cellOfRun, _cellNumber) = (new int[Order.Length], new int[runs.Cells.Count]);
        Array.Fill(_cellOfRun, -1);
        Array.Fill(_cellNumber, -1);
        var sightingFrom = new int[Vehicles.Length + 1];
        for (var v = 0; v < Vehicles.Length; v++) sightingFrom[v + 1] = sightingFrom[v] + Place(v, earlier is not null && earlier(Vehicles[v].VehicleId));
        var (place, cell) = (new int[sightingFrom[^1]], new int[sightingFrom[^1]]);
        for (int at = 0, i = 0; i < Order.Length; i++)
            if (_cellOfRun[i] >= 0) (place[at], cell[at++]) = (i, _cellOfRun[i]);
        (ComponentOfVehicle, Components) = RoadGraph.Join(Vehicles.Length, sightingFrom, cell, _cells.Count);
        VehiclesOf = new int[Components];
        for (var v = 0; v < Vehicles.Length; v++) if (Vehicles[v].SameAs is null) VehiclesOf[ComponentOfVehicle[v]]++;
        CellComponent = SortCells(cell);
        new RoadParts(sightingFrom).Each((_, from, to) =>
        {
            for (var v = from; v < to; v++) ByCell(cell, place, sightingFrom[v], sightingFrom[v + 1]);
        });
        Graph = new(sightingFrom, cell, _cells.Count);
        (PlaceOf, Trip, TripSize) = (place, new int[place.Length], new float[Lanes * Trips]);
        (Values, Variances) = (new float[Witnesses * place.Length + 1], new float[Witnesses * place.Length + 1]);
        Present = new bool[Lanes * Vehicles.Length];
        _cellOfRun = [];
        Graph.ByVehicle.Each((_, from, to) =>
        {
            for (var v = from; v < to; v++) Fill(v);
        });
    }

    public RoadRuns Runs { get; }
    public RoadVehicle[] Vehicles { get; }
    /// <summary>The table's rows in order, and where each vehicle's start.</summary>
    public int[] Order { get; }
    public int[] RunFrom { get; }
    /// <summary>Class and kind of torque that share gains.</summary>
    public (VehicleClass Class, TorqueKind Torque)[] Gains { get; }
    public int[] GainOf { get; }
    /// <summary>Too few steady runs, so that its driven runs count as well.</summary>
    public bool[] TakesDriven { get; }
    /// <summary>One vehicle's runs of one stream are a trip.</summary>
    public int Trips { get; private set; }
    /// <summary>First trip of each vehicle; one more than there are vehicles.</summary>
    public int[] TripFrom { get; }
    public int[] ComponentOfVehicle { get; }
    public int Components { get; }
    /// <summary>Vehicles of each component, one that enters at several times once.</summary>
    public int[] VehiclesOf { get; }
    public int[] CellComponent { get; }
    public RoadGraph Graph { get; }
    /// <summary>Place in the order of each sighting of the graph.</summary>
    public int[] PlaceOf { get; }
    /// <summary>Trip of each sighting.</summary>
    public int[] Trip { get; }
    /// <summary>What the witnesses of each sighting say: N·m, deg, sine; 0 where silent.</summary>
    public float[] Values { get; }
    /// <summary>Squared standard errors of the values; infinite where silent.</summary>
    public float[] Variances { get; }
    /// <summary>Runs of each trip, per witness.</summary>
    public float[] TripSize { get; }
    /// <summary>Whether any run of the vehicle has the witness.</summary>
    public bool[] Present { get; }
    public int Cells => _cells.Count;

    public ref readonly RoadRow Run(int place) => ref _rows[Order[place]];
    public int SideOf(int cell) => (int)Vehicles[_cells[cell].Vehicle].TrafficSide;
    /// <summary>Null where the cell has no position.</summary>
    public string? CellName(int cell) => _cells[cell].Name < 0 ? null : Runs.Cells[_cells[cell].Name];

    /// <summary>Cell under each of a vehicle's runs: its own in the fit, or else the named one, if any run of the fit lies there; −1 where none does.</summary>
    public int[] CellsUnder(int vehicle)
    {
        var from = RunFrom[vehicle];
        var cells = new int[RunFrom[vehicle + 1] - from];
        for (var i = 0; i < cells.Length; i++) cells[i] = Run(from + i).Cell is var name and >= 0 ? _cellNumber[name] : -1;
        for (var e = Graph.VehicleFrom[vehicle]; e < Graph.VehicleFrom[vehicle + 1]; e++)
            for (var i = Graph.SightingFrom[e]; i < Graph.SightingFrom[e + 1]; i++) cells[PlaceOf[i] - from] = Graph.CellOf[e];
        return cells;
    }


    /// <summary>Whether the run's torque is of the vehicle's kind: with assist logged in some runs, only those count.</summary>
    public bool TorqueCounts(int vehicle, in RoadRow run) =>
        Vehicles[vehicle].TorqueUsable && !float.IsNaN(run.Torque) && (run.IncludesAssist || !_assistLogged[vehicle]);

    private static TorqueKind KindOf(RoadVehicle v) => v.Torque == TorqueKind.TorsionBar ? TorqueKind.TorsionBar : TorqueKind.Total;

    /// <summary>Gives each run of the vehicle that is part of the fit its cell, in order of first touch, and its trip.</summary>
    private int Place(int v, bool seenBefore)
    {
        _assistLogged[v] = seenBefore && Vehicles[v].Torque == TorqueKind.Total;
        var (steady, placed, usual) = (0, 0, -1);
        for (var i = RunFrom[v]; i < RunFrom[v + 1]; i++)
        {
            ref readonly var run = ref Run(i);
            _assistLogged[v] |= run.IncludesAssist;
            if (run.Mode == RunMode.Coast) steady++;
            if (i > RunFrom[v] && Run(i - 1).Stream != run.Stream) Trips++;
        }
        if (RunFrom[v + 1] > RunFrom[v]) Trips++;
        TripFrom[v + 1] = Trips;
        TakesDriven[v] = steady < EnoughSteadyRuns && !seenBefore;
        for (var i = RunFrom[v]; i < RunFrom[v + 1]; i++)
        {
            ref readonly var run = ref Run(i);
            if (run.Mode == RunMode.Brake || (run.Mode == RunMode.Drive && !TakesDriven[v])) continue;
            var reads = !float.IsNaN(run.Bank);
            if (!reads && float.IsNaN(run.Angle) && !TorqueCounts(v, run)) continue;
            // A run without position has a bank of its own when it reads one; else the vehicle's runs share one road.
            if (run.Cell >= 0) _cellOfRun[i] = _cellNumber[run.Cell] is var known and >= 0 ? known : _cellNumber[run.Cell] = NewCell(v, run.Cell);
            else _cellOfRun[i] = reads ? NewCell(v, -1) : usual >= 0 ? usual : usual = NewCell(v, -1);
            placed++;
        }
        return placed;
    }

    private int NewCell(int v, int name)
    {
        _cells.Add((v, name));
        return _cells.Count - 1;
    }

    /// <summary>Renumbers cells so that each component's stand together.</summary>
    private int[] SortCells(int[] cell)
    {
        var component = _cells.Select(c => ComponentOfVehicle[c.Vehicle]).ToArray();
        var from = new int[Components + 1];
        foreach (var k in component) from[k + 1]++;
        for (var k = 0; k < Components; k++) from[k + 1] += from[k];
        var (number, sorted, owner) = (new int[component.Length], new int[component.Length], _cells.ToArray());
        for (var c = 0; c < component.Length; c++)
        {
            number[c] = from[component[c]]++;
            (sorted[number[c]], _cells[number[c]]) = (component[c], owner[c]);
        }
        for (var i = 0; i < cell.Length; i++) cell[i] = number[cell[i]];
        for (var i = 0; i < _cellOfRun.Length; i++) if (_cellOfRun[i] >= 0) _cellOfRun[i] = number[_cellOfRun[i]];
        for (var n = 0; n < _cellNumber.Length; n++) if (_cellNumber[n] >= 0) _cellNumber[n] = number[_cellNumber[n]];
        return sorted;
    }

    /// <summary>Sorts one vehicle's sightings by cell, and those of one cell by their runs.</summary>
    private static void ByCell(int[] cell, int[] place, int from, int to)
    {
        Array.Sort(cell, place, from, to - from);
        for (var i = from; i < to; i++)
            if (i + 1 == to || cell[i + 1] != cell[i])
            {
                Array.Sort(place, from, i + 1 - from);
                from = i + 1;
            }
    }

    private void Fill(int v)
    {
        var (from, to) = (Graph.SightingFrom[Graph.VehicleFrom[v]], Graph.SightingFrom[Graph.VehicleFrom[v + 1]]);
        // Streams of a vehicle stand together in the order, so that trips are counted along it.
        var (trips, trip) = (new int[RunFrom[v + 1] - RunFrom[v]], TripFrom[v]);
        for (var i = 1; i < trips.Length; i++) trips[i] = Run(RunFrom[v] + i).Stream == Run(RunFrom[v] + i - 1).Stream ? trips[i - 1] : trips[i - 1] + 1;
        for (var i = from; i < to; i++)
        {
            ref readonly var run = ref Run(PlaceOf[i]);
            Trip[i] = trip + trips[PlaceOf[i] - RunFrom[v]];
            Set(v, i, 0, TorqueCounts(v, run) ? run.Torque : float.NaN, run.TorqueError);
            Set(v, i, 1, run.Angle, run.AngleError);
            Set(v, i, 2, run.Bank, run.BankError);
        }
    }

    private void Set(int v, int sighting, int lane, float value, float error)
    {
        var (at, there) = (Witnesses * sighting + lane, !float.IsNaN(value));
        (Values[at], Variances[at]) = there ? (value, error * error) : (0, float.PositiveInfinity);
        if (!there) return;
        Present[Lanes * v + lane] = true;
        TripSize[Lanes * Trip[sighting] + lane]++;
    }
}
