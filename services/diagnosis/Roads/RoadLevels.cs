using System.Runtime.Intrinsics;
using MathNet.Numerics.LinearAlgebra;

namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// The slow directions of the road system, solved exactly and added to the preconditioner (two-level additive correction; Nicolaides
/// 1987). All roads of a component higher and every vehicle's figures lower by their gains: hardly any run resists. A gain larger and
/// the class's figures lower by the mean bank: likewise. Component by component two unknowns, joined by a border of gains and crowns.
/// </summary>
internal sealed class RoadLevels(RoadSystem s)
{
    private const int Lanes = RoadProblem.Lanes;
    private const double Vanishing = 1e-9; // of a level's direct weight: below it the level cannot be told at all

    private readonly int _border = Lanes * s.Classes + 2;
    private readonly double[] _own = new double[3 * s.Components];                                  // shift², shift·level, level² of each component
    private readonly double[] _edge = new double[2 * s.Components * (Lanes * s.Classes + 2)];       // each component's two rows against the border
    private readonly double[] _inverse = new double[3 * s.Components];
    private readonly double[] _solved = new double[2 * s.Components * (Lanes * s.Classes + 2)];
    private readonly double[] _lean = new double[2 * s.Graph.Vehicles]; // mean bank the vehicle's torque and angle were seen on
    private Matrix<double> _borderInverse = Matrix<double>.Build.Dense(1, 1);

    /// <summary>One part's sums: the border's own, and for each component met its three and its two rows.</summary>
    private sealed record Part(double[] Border, List<(int Component, double[] Own, double[] Edge)> Met);

    public void Build()
    {
        for (var v = 0; v < s.Graph.Vehicles; v++)
            for (var lane = 0; lane < 2; lane++) _lean[2 * v + lane] = s.Tilt[Lanes * v + lane] / s.Diagonal[Lanes * v + lane];
        var parts = new Part[s.Graph.ByCell.Count];
        s.Graph.ByCell.Each((part, from, to) => parts[part] = Cells(from, to));
        var border = new double[_border * _border];
        Array.Clear(_own);
        Array.Clear(_edge);
        for (var v = 0; v < s.Graph.Vehicles; v++)
        {
            var g = Lanes * s.ClassOf[v];
            for (var lane = 0; lane < 3; lane++)
            {
                _own[3 * s.Component[v]] += s.Diagonal[Lanes * v + lane] * s.Gain[g + lane] * s.Gain[g + lane];
                if (lane < 2) border[(g + lane) * (_border + 1)] -= Lean(v, lane) * s.Tilt[Lanes * v + lane];
            }
        }
        var direct = _own.ToArray();
        for (var k = 0; k < s.Components; k++) for (var i = 0; i < 3; i++) _own[3 * k + i] += s.PriorWeight[s.LevelAt + k];
        for (var i = 0; i < _border; i++) border[i * (_border + 1)] += s.PriorWeight[s.GainAt + i] + (i < Lanes * s.Classes && i % Lanes < 2 ? s.GainSquare[i] : 0);
        foreach (var part in parts)
        {
            // A cell wrote each pair of its unknowns once, on one side or the other of the diagonal.
            for (var i = 0; i < _border; i++)
                for (var j = 0; j < _border; j++) border[i * _border + j] += part.Border[i * _border + j] + (i == j ? 0 : part.Border[j * _border + i]);
            foreach (var (k, own, edge) in part.Met)
            {
                for (var i = 0; i < 3; i++) _own[3 * k + i] += own[i];
                for (var i = 0; i < edge.Length; i++) _edge[2 * k * _border + i] += edge[i];
            }
        }
        Factor(border, direct);
    }

    /// <summary>Adds the slow directions' share of the answer to r.</summary>
    public void Add(double[] r, double[] z)
    {
        var (right, mine) = (new double[_border], new double[2 * s.Components]);
        for (var k = 0; k < s.Components; k++) mine[2 * k] = mine[2 * k + 1] = r[s.LevelAt + k];
        for (var i = 0; i < _border; i++) right[i] = r[s.GainAt + i];
        for (var v = 0; v < s.Graph.Vehicles; v++)
        {
            var (g, at) = (Lanes * s.ClassOf[v], Lanes * v);
            mine[2 * s.Component[v]] -= Vector256.Dot(Vector256.LoadUnsafe(ref s.Gain[g]), Vector256.LoadUnsafe(ref r[at]));
            right[g] -= Lean(v, 0) * r[at];
            right[g + 1] -= Lean(v, 1) * r[at + 1];
        }
        for (var k = 0; k < mine.Length; k++) for (var i = 0; i < _border; i++) right[i] -= _solved[k * _border + i] * mine[k];
        var outer = (_borderInverse * Vector<double>.Build.Dense(right)).AsArray();
        for (var k = 0; k < s.Components; k++)
        {
            var (a, b) = (mine[2 * k], mine[2 * k + 1]);
            (mine[2 * k], mine[2 * k + 1]) = (_inverse[3 * k] * a + _inverse[3 * k + 1] * b, _inverse[3 * k + 1] * a + _inverse[3 * k + 2] * b);
            for (var row = 2 * k; row < 2 * k + 2; row++) for (var i = 0; i < _border; i++) mine[row] -= _solved[row * _border + i] * outer[i];
            z[s.LevelAt + k] += mine[2 * k] + mine[2 * k + 1];
        }
        for (var i = 0; i < _border; i++) z[s.GainAt + i] += outer[i];
        for (var v = 0; v < s.Graph.Vehicles; v++)
        {
            var (g, at) = (Lanes * s.ClassOf[v], Lanes * v);
            (Vector256.LoadUnsafe(ref z[at]) - Vector256.LoadUnsafe(ref s.Gain[g]) * mine[2 * s.Component[v]]).StoreUnsafe(ref z[at]);
            z[at] -= Lean(v, 0) * outer[g];
            z[at + 1] -= Lean(v, 1) * outer[g + 1];
        }
    }

    private double Lean(int v, int lane) => _lean[2 * v + lane];

    private Part Cells(int from, int to)
    {
        var part = new Part(new double[_border * _border], []);
        var (load, touched, seen) = (new double[_border], new int[_border], new bool[s.Classes]);
        for (var c = from; c < to; c++)
        {
            var k = s.CellComponent[c];
            if (part.Met.Count == 0 || part.Met[^1].Component != k) part.Met.Add((k, new double[3], new double[2 * _border]));
            var (_, own, edge) = part.Met[^1];
            var count = 0;
            for (var j = s.Graph.CellFrom[c]; j < s.Graph.CellFrom[c + 1]; j++)
            {
                var (v, bank) = (s.Graph.VehicleOf[j], s.Bank[c]);
                var g = s.ClassOf[v];
                if (!seen[g])
                {
                    (seen[g], touched[count], touched[count + 1]) = (true, Lanes * g, Lanes * g + 1);
                    (load[Lanes * g], load[Lanes * g + 1]) = (0, 0);
                    count += 2;
                }
                load[Lanes * g] += s.ByCell[Lanes * j] * (bank - Lean(v, 0));
                load[Lanes * g + 1] += s.ByCell[Lanes * j + 1] * (bank - Lean(v, 1));
            }
            for (var i = 0; i < count; i += 2) seen[touched[i] / Lanes] = false;
            var prior = s.Priors[c];
            var (pivot, tie) = (s.Pivot[c], prior.OnLevel ? prior.Weight : 0);
            var (crown, shift) = (Lanes * s.Classes + s.CellSide[c], prior.Weight - pivot - tie);
            load[crown] = -tie;
            touched[count++] = crown;
            part.Border[crown * (_border + 1)] += tie;
            own[0] += tie - shift * shift / pivot;
            own[1] += tie + shift * tie / pivot;
            own[2] += tie - tie * tie / pivot;
            edge[crown] += tie;
            edge[_border + crown] += tie;
            for (var i = 0; i < count; i++)
            {
                var scaled = load[touched[i]] / pivot;
                edge[touched[i]] -= scaled * shift;
                edge[_border + touched[i]] += scaled * tie;
                var row = part.Border.AsSpan(touched[i] * _border, _border);
                for (var j = 0; j <= i; j++) row[touched[j]] -= scaled * load[touched[j]];
            }
        }
        return part;
    }

    private void Factor(double[] border, double[] direct)
    {
        for (var k = 0; k < s.Components; k++)
        {
            var (a, b, c) = (_own[3 * k], _own[3 * k + 1], _own[3 * k + 2]);
            var determinant = a * c - b * b;
            var told = a > Vanishing * direct[3 * k] && determinant > 1e-14 * a * c;
            (_inverse[3 * k], _inverse[3 * k + 1], _inverse[3 * k + 2]) = told ? (c / determinant, -b / determinant, a / determinant) : (0, 0, 1 / c);
            for (var i = 0; i < _border; i++)
            {
                var (x, y) = (_edge[2 * k * _border + i], _edge[(2 * k + 1) * _border + i]);
                _solved[2 * k * _border + i] = _inverse[3 * k] * x + _inverse[3 * k + 1] * y;
                _solved[(2 * k + 1) * _border + i] = _inverse[3 * k + 1] * x + _inverse[3 * k + 2] * y;
            }
            for (var row = 2 * k; row < 2 * k + 2; row++)
                for (var i = 0; i < _border; i++)
                    for (var j = 0; j < _border; j++) border[i * _border + j] -= _edge[row * _border + i] * _solved[row * _border + j];
        }
        _borderInverse = Matrix<double>.Build.Dense(_border, _border, border).Cholesky().Solve(Matrix<double>.Build.DenseIdentity(_border));
    }
}
