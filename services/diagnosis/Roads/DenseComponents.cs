using MathNet.Numerics.LinearAlgebra;

namespace WearWatch.Diagnosis.Roads;

/// <summary>Components of few unknowns: the vehicles' part of each is formed and inverted.</summary>
internal sealed class DenseComponents
{
    private const int Lanes = RoadProblem.Lanes;
    private const double MostWork = 5e8; // multiplications in all; the largest components go first to the probes

    private readonly RoadSystem _s;
    private readonly List<int>[] _unknowns; // lanes that any run touches, by component
    private readonly bool[] _held;

    public DenseComponents(RoadSystem system, int upTo)
    {
        _s = system;
        _unknowns = new List<int>[system.Components];
        for (var k = 0; k < _unknowns.Length; k++) _unknowns[k] = [];
        for (var i = 0; i < system.LevelAt; i++)
            if (i % Lanes < 3 && system.Diagonal[i] > system.PriorWeight[i]) _unknowns[system.Component[i / Lanes]].Add(i);
        _held = new bool[system.Components];
        var work = 0.0;
        foreach (var k in Enumerable.Range(0, _held.Length).OrderBy(k => _unknowns[k].Count))
        {
            work += Math.Pow(_unknowns[k].Count, 3);
            _held[k] = _unknowns[k].Count == 0 || (_unknowns[k].Count <= upTo && work <= MostWork);
            if (!_held[k]) Left++;
        }
    }

    /// <summary>Components that are not held here.</summary>
    public int Left { get; }
    public bool Holds(int component) => _held[component];

    /// <summary>Replaces the held components' answers, conditional variances, and what their vehicles bring to the cells' variances.</summary>
    public void Each(double[][] columns, double[] answers, double[] conditional, double[] cells)
    {
        var cell = 0;
        var place = new int[_s.LevelAt];
        for (var k = 0; k < _held.Length; k++)
        {
            var from = cell;
            while (cell < _s.CellComponent.Length && _s.CellComponent[cell] == k) cell++;
            if (!_held[k] || _unknowns[k].Count == 0) continue;
            var unknowns = _unknowns[k];
            for (var i = 0; i < unknowns.Count; i++) place[unknowns[i]] = i;
            var inverse = Form(unknowns, place, from, cell).Cholesky().Solve(Matrix<double>.Build.DenseIdentity(unknowns.Count));
            for (var i = 0; i < unknowns.Count; i++)
            {
                conditional[unknowns[i]] = inverse[i, i];
                for (var y = 0; y < columns.Length; y++)
                {
                    var answer = 0.0;
                    for (var j = 0; j < unknowns.Count; j++) answer += inverse[i, j] * columns[y][unknowns[j]];
                    answers[unknowns[i] * columns.Length + y] = answer;
                }
            }
            for (var c = from; c < cell; c++)
            {
                var loads = Loads(c, place);
                foreach (var (i, a) in loads) foreach (var (j, b) in loads) cells[c] += a * b * inverse[i, j] / (_s.Pivot[c] * _s.Pivot[c]);
            }
        }
    }

    private Matrix<double> Form(List<int> unknowns, int[] place, int from, int to)
    {
        var (n, form) = (unknowns.Count, new double[unknowns.Count * unknowns.Count]);
        for (var i = 0; i < n; i++) form[i * n + i] = _s.Diagonal[unknowns[i]];
        for (var c = from; c < to; c++)
        {
            var loads = Loads(c, place);
            foreach (var (i, a) in loads)
            {
                var (row, scaled) = (i * n, a / _s.Pivot[c]);
                foreach (var (j, b) in loads) form[row + j] -= scaled * b;
            }
        }
        return Matrix<double>.Build.Dense(n, n, form);
    }

    private List<(int Place, double Load)> Loads(int cell, int[] place)
    {
        var loads = new List<(int, double)>();
        for (var j = _s.Graph.CellFrom[cell]; j < _s.Graph.CellFrom[cell + 1]; j++)
            for (var lane = 0; lane < 3; lane++)
                if (_s.ByCell[Lanes * j + lane] is var load and not 0) loads.Add((place[Lanes * _s.Graph.VehicleOf[j] + lane], load));
        return loads;
    }
}
