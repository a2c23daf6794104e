using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Roads;

/// <summary>One witness of one run. Trip is counted per witness.</summary>
internal readonly record struct Observation(Witness Witness, int Vehicle, int Run, int Cell, int Trip, int Gain, double Value, double Variance);

/// <summary>Runs and vehicles sorted and numbered: which unknown stands where. The order things came in leaves no trace.</summary>
internal sealed class RoadProblem
{
    /// <summary>With fewer steady runs than this, driven ones are taken too.</summary>
    public const int EnoughSteadyRuns = 5;

    private readonly Dictionary<string, int> _cellOf = new(StringComparer.Ordinal);
    private readonly Dictionary<(Witness, string), int> _tripOf = [];
    private readonly List<Observation> _observations = [];
    private readonly List<int> _sizeOfTrip = [];
    private readonly bool[] _assistLogged;
    private readonly List<(int Side, int Vehicle, string? Name)> _cells = [];

    public RoadProblem(IReadOnlyList<StraightRun> runs, IReadOnlyList<RoadVehicle> vehicles)
    {
        Vehicles = vehicles.OrderBy(v => v.VehicleId, StringComparer.Ordinal).DistinctBy(v => v.VehicleId).ToArray();
        var index = Vehicles.Select((v, i) => (v.VehicleId, i)).ToDictionary(x => x.VehicleId, x => x.i, StringComparer.Ordinal);
        Runs = runs.Where(r => index.ContainsKey(r.VehicleId))
            .OrderBy(r => r.VehicleId, StringComparer.Ordinal).ThenBy(r => r.StreamId, StringComparer.Ordinal).ThenBy(r => r.Start)
            .ThenBy(r => r.Sequence).ThenBy(r => r.Mode).ThenBy(r => r.Seconds).ThenBy(r => r.RoadCell, StringComparer.Ordinal).ThenBy(r => r.TorqueNm?.Value).ToArray();
        RunsOf = Enumerable.Range(0, Vehicles.Length).Select(_ => new List<int>()).ToArray();
        for (var i = 0; i < Runs.Length; i++) RunsOf[index[Runs[i].VehicleId]].Add(i);
        Gains = Vehicles.Select(v => (v.Class, v.Torque == TorqueKind.TorsionBar ? TorqueKind.TorsionBar : TorqueKind.Total)).Distinct().Order().ToArray();
        TakesDriven = new bool[Vehicles.Length];
        _assistLogged = new bool[Vehicles.Length];
        CellOfRun = new int[Runs.Length];
        Array.Fill(CellOfRun, -1);
        for (var v = 0; v < Vehicles.Length; v++) Observe(v);
        (ComponentOfVehicle, Components) = Join();
        Number();
    }

    public RoadVehicle[] Vehicles { get; }
    public StraightRun[] Runs { get; }
    public List<int>[] RunsOf { get; }
    /// <summary>Class and kind of torque that share gains.</summary>
    public (VehicleClass Class, TorqueKind Torque)[] Gains { get; }
    public IReadOnlyList<Observation> Observations => _observations;
    public IReadOnlyList<(int Side, int Vehicle, string? Name)> CellList => _cells;
    public IReadOnlyList<int> SizeOfTrip => _sizeOfTrip;
    /// <summary>Too few steady runs, so that its driven runs count as well.</summary>
    public bool[] TakesDriven { get; }
    /// <summary>−1 where the run is not part of the fit.</summary>
    public int[] CellOfRun { get; }
    public int[] ComponentOfVehicle { get; }
    public int Components { get; }

    public int[] Pull { get; private set; } = [];
    public int[] OffCentre { get; private set; } = [];
    public int[] Bias { get; private set; } = [];
    public int[] TorqueGain { get; private set; } = [];
    public int[] AngleGain { get; private set; } = [];
    public int[] Crown { get; private set; } = [];
    public int[] Component { get; private set; } = [];
    public int Unknowns { get; private set; }

    public int GainOf(RoadVehicle v) => Array.IndexOf(Gains, (v.Class, v.Torque == TorqueKind.TorsionBar ? TorqueKind.TorsionBar : TorqueKind.Total));

    /// <summary>Named cell's number, if any run of the fit lies in it.</summary>
    public int CellNamed(string? name) => name is not null && _cellOf.TryGetValue(name, out var cell) ? cell : -1;

    /// <summary>Whether the run's torque is of the vehicle's kind: with assist logged in some runs, only those count.</summary>
    public bool TorqueCounts(int vehicle, StraightRun run) =>
        Vehicles[vehicle].TorqueUsable && Finite(run.TorqueNm) && (run.TorqueIncludesAssist || !_assistLogged[vehicle]);

    private void Observe(int v)
    {
        _assistLogged[v] = RunsOf[v].Any(i => Runs[i].TorqueIncludesAssist);
        TakesDriven[v] = RunsOf[v].Count(i => Runs[i].Mode == RunMode.Coast) < EnoughSteadyRuns;
        foreach (var i in RunsOf[v])
        {
            var run = Runs[i];
            if (run.Mode == RunMode.Brake || (run.Mode == RunMode.Drive && !TakesDriven[v])) continue;
            var torque = TorqueCounts(v, run);
            var (angle, bank) = (Finite(run.AngleDeg), Finite(run.BankReading));
            if (!torque && !angle && !bank) continue;
            CellOfRun[i] = CellFor(v, run, bank);
            if (torque) Add(Witness.Torque, v, i, run.TorqueNm!.Value);
            if (angle) Add(Witness.Angle, v, i, run.AngleDeg!.Value);
            if (bank) Add(Witness.BankReading, v, i, run.BankReading!.Value);
        }
    }

    private void Add(Witness witness, int v, int run, Statistics.Estimate e)
    {
        var key = (witness, $"{Vehicles[v].VehicleId}\n{Runs[run].StreamId}");
        if (!_tripOf.TryGetValue(key, out var trip))
        {
            _tripOf[key] = trip = _sizeOfTrip.Count;
            _sizeOfTrip.Add(0);
        }
        _sizeOfTrip[trip]++;
        _observations.Add(new(witness, v, run, CellOfRun[run], trip, GainOf(Vehicles[v]), e.Value, e.StandardError * e.StandardError));
    }

    /// <summary>A run without position has a bank of its own when it reads one; else the vehicle's runs share one road.</summary>
    private int CellFor(int v, StraightRun run, bool bank)
    {
        if (run.RoadCell is null && bank) return NewCell(v, null);
        var key = run.RoadCell ?? $"\nusual road of {Vehicles[v].VehicleId}";
        if (!_cellOf.TryGetValue(key, out var cell)) _cellOf[key] = cell = NewCell(v, run.RoadCell);
        return cell;
    }

    private int NewCell(int v, string? name)
    {
        _cells.Add(((int)Vehicles[v].TrafficSide, v, name));
        return _cells.Count - 1;
    }

    /// <summary>Groups of vehicles joined by shared cells (union-find with the lowest vehicle as root).</summary>
    private (int[] ComponentOfVehicle, int Components) Join()
    {
        var root = Enumerable.Range(0, Vehicles.Length).ToArray();
        int Find(int v)
        {
            while (root[v] != v) v = root[v] = root[root[v]];
            return v;
        }
        foreach (var o in _observations)
        {
            var (a, b) = (Find(o.Vehicle), Find(_cells[o.Cell].Vehicle));
            root[Math.Max(a, b)] = Math.Min(a, b);
        }
        var number = new Dictionary<int, int>();
        var component = new int[Vehicles.Length];
        for (var v = 0; v < component.Length; v++)
        {
            var r = Find(v);
            if (!number.TryGetValue(r, out component[v])) number[r] = component[v] = number.Count;
        }
        return (component, number.Count);
    }

    private void Number()
    {
        var next = 0;
        int[] Give(int count, Func<int, bool> present) => Enumerable.Range(0, count).Select(i => present(i) ? next++ : -1).ToArray();
        var seen = _observations.Select(o => (o.Witness, o.Vehicle)).ToHashSet();
        var gains = _observations.Select(o => (o.Witness, o.Gain)).ToHashSet();
        var sides = _cells.Select(c => c.Side).ToHashSet();
        var components = _observations.Select(o => ComponentOfVehicle[o.Vehicle]).ToHashSet();
        Pull = Give(Vehicles.Length, v => seen.Contains((Witness.Torque, v)));
        OffCentre = Give(Vehicles.Length, v => seen.Contains((Witness.Angle, v)));
        Bias = Give(Vehicles.Length, v => seen.Contains((Witness.BankReading, v)));
        TorqueGain = Give(Gains.Length, g => gains.Contains((Witness.Torque, g)));
        AngleGain = Give(Gains.Length, g => gains.Contains((Witness.Angle, g)));
        Crown = Give(2, sides.Contains);
        Component = Give(Components, components.Contains);
        Unknowns = next;
    }

    private static bool Finite(Statistics.Estimate? e) => e is { } x && double.IsFinite(x.Value) && double.IsFinite(x.StandardError) && x.StandardError >= 0;
}
