namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// Plain two-way effects, y = row + column + error, by least squares: the core of the road model with one witness, equal weights and
/// no priors. Only rows and columns that are joined can be compared, so the rows of each joined group sum to zero.
/// </summary>
public sealed class TwoWayEffects
{
    private const int Lanes = RoadProblem.Lanes;
    private const int MostSteps = 8;
    private const double Fall = 1e-5, Brake = 1e-6, Fixed = 1e20;

    private TwoWayEffects(double[] rows, double[] columns, int groups, double squares) => (Rows, Columns, Groups, ResidualSquares) = (rows, columns, groups, squares);

    /// <summary>Effects of the rows, in the unit of y; NaN for a row without a value.</summary>
    public double[] Rows { get; }
    public double[] Columns { get; }
    /// <summary>Groups of rows that no column joins.</summary>
    public int Groups { get; }
    /// <summary>Sum of squared residuals.</summary>
    public double ResidualSquares { get; }

    /// <param name="row">Row of each value, from 0.</param>
    /// <param name="column">Column of each value, from 0.</param>
    /// <param name="values">As many as there are rows and columns given.</param>
    /// <param name="settled">Stops when no effect moves by more than this, in the unit of y.</param>
    public static TwoWayEffects Fit(int[] row, int[] column, float[] values, double settled = 1e-9)
    {
        var (rows, columns) = (row.Length == 0 ? 0 : row.Max() + 1, column.Length == 0 ? 0 : column.Max() + 1);
        var (byColumn, _) = Sort(Enumerable.Range(0, row.Length).ToArray(), column, columns);
        var (order, from) = Sort(byColumn, row, rows);
        var (cell, y) = (Array.ConvertAll(order, i => column[i]), Array.ConvertAll(order, i => values[i]));
        var (group, groups) = RoadGraph.Join(rows, from, cell, columns);
        var graph = new RoadGraph(from, cell, columns);
        // One component for the solver: the slow direction cannot be told at all here, so there is nothing to treat apart.
        var system = new RoadSystem(graph, new int[rows], 1, new int[rows], new int[columns], 1, new int[columns]);
        (system.Gain[0], system.PriorWeight[system.GainAt]) = (1, Fixed);
        for (var c = 0; c < columns; c++) system.Priors[c] = new(0, graph.CellFrom[c + 1] == graph.CellFrom[c] ? 1 : 0, OnLevel: false);
        // A brake, not a prior: it draws to where the rows stand, so that the answer that has no level does not run away along it.
        for (var v = 0; v < rows; v++) system.PriorWeight[Lanes * v] = graph.VehicleFrom[v + 1] == graph.VehicleFrom[v] ? 1 : Brake;
        for (var step = 0; step < MostSteps; step++)
        {
            Weigh(system, y);
            system.Prepare();
            if (system.Step(Fall).Max(Math.Abs) <= settled) break;
        }
        return Centred(system, group, groups, Weigh(system, y));
    }

    /// <summary>Stable counting sort of places by key.</summary>
    private static (int[] Order, int[] From) Sort(int[] places, int[] key, int keys)
    {
        var from = new int[keys + 1];
        foreach (var k in key) from[k + 1]++;
        for (var k = 0; k < keys; k++) from[k + 1] += from[k];
        var (order, next) = (new int[places.Length], from.ToArray());
        foreach (var i in places) order[next[key[i]]++] = i;
        return (order, from);
    }

    /// <returns>Sum of squared residuals.</returns>
    private static double Weigh(RoadSystem s, float[] y)
    {
        var squares = new double[s.Graph.ByVehicle.Count];
        s.Graph.ByVehicle.Each((part, first, end) =>
        {
            for (var v = first; v < end; v++)
            {
                var force = 0.0;
                for (var e = s.Graph.VehicleFrom[v]; e < s.Graph.VehicleFrom[v + 1]; e++)
                {
                    var (predicted, pull) = (s.U[Lanes * v] + s.Bank[s.Graph.CellOf[e]], 0.0);
                    for (var i = s.Graph.SightingFrom[e]; i < s.Graph.SightingFrom[e + 1]; i++)
                    {
                        var residual = y[i] - predicted;
                        pull += residual;
                        squares[part] += residual * residual;
                    }
                    (s.Coefficients[Lanes * e], s.Coefficients[Lanes * e + 3]) = (s.Graph.SightingFrom[e + 1] - s.Graph.SightingFrom[e], (float)pull);
                    force += (float)pull; // as the cell has it, so that the two agree
                }
                s.Force[Lanes * v] = force;
            }
        });
        return squares.Sum();
    }

    private static TwoWayEffects Centred(RoadSystem s, int[] group, int groups, double squares)
    {
        var (sum, count) = (new double[groups], new int[groups]);
        var (rows, columns) = (new double[s.Graph.Vehicles], s.Bank.ToArray());
        for (var v = 0; v < rows.Length; v++)
        {
            var seen = s.Graph.VehicleFrom[v + 1] > s.Graph.VehicleFrom[v];
            rows[v] = seen ? s.U[Lanes * v] : double.NaN;
            if (!seen) continue;
            sum[group[v]] += rows[v];
            count[group[v]]++;
        }
        for (var v = 0; v < rows.Length; v++) rows[v] -= sum[group[v]] / Math.Max(1, count[group[v]]);
        for (var c = 0; c < columns.Length; c++)
        {
            var seen = s.Graph.CellFrom[c + 1] > s.Graph.CellFrom[c];
            var k = seen ? group[s.Graph.VehicleOf[s.Graph.CellFrom[c]]] : 0;
            columns[c] = seen ? columns[c] + sum[k] / count[k] : double.NaN;
        }
        return new(rows, columns, count.Count(n => n > 0), squares);
    }
}
