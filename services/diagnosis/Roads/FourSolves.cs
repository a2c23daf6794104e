using System.Runtime.Intrinsics;

namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// Four right-hand sides at once of the vehicles' part of the road system (gains, levels and crowns held), in single precision, which
/// is ample for standard errors. Vectors stand as 16 numbers a vehicle: four lanes of the first right-hand side, of the second, and so on.
/// </summary>
internal sealed class FourSolves
{
    public const int Sides = 4, Stride = Sides * Lanes;
    private const int Lanes = RoadProblem.Lanes;
    private const int Half = Stride / 2;

    private readonly RoadSystem _s;
    private readonly float[] _perPivot, _diagonal, _block, _share;
    private readonly float[] _direction, _times, _scaled;

    public FourSolves(RoadSystem system)
    {
        _s = system;
        _perPivot = Array.ConvertAll(system.Pivot, p => (float)(1 / p));
        _diagonal = Array.ConvertAll(system.Diagonal, d => (float)d);
        _block = Array.ConvertAll(system.Block, b => (float)b);
        _share = new float[Sides * system.Graph.Cells];
        var length = Stride * system.Graph.Vehicles;
        (_direction, _times, _scaled) = (new float[length], new float[length], new float[length]);
        (Slow, SlowWeight) = (new float[Lanes * system.Graph.Vehicles], new double[system.Components]);
    }

    /// <summary>The slow direction of each component, and the reduced system's value on it; 0 where there is none.</summary>
    public float[] Slow { get; }
    public double[] SlowWeight { get; }

    /// <summary>Adds to x the solution for what right holds; right is used up.</summary>
    public void Solve(float[] right, float[] x, double fall, int most)
    {
        var (residual, direction, times, scaled) = (right, _direction, _times, _scaled);
        Precondition(residual, scaled);
        var energy = Dots(residual, scaled);
        var goal = energy.Select(e => e * fall * fall).ToArray();
        scaled.CopyTo(direction, 0);
        for (var step = 0; step < most && Enumerable.Range(0, Sides).Any(k => energy[k] > goal[k]); step++)
        {
            Multiply(direction, times);
            var curvature = Dots(direction, times);
            var length = energy.Zip(curvature, (e, c) => c > 0 ? e / c : 0).ToArray();
            var (low, high) = (Halves(length, 0), Halves(length, 2));
            Rows((at, half) =>
            {
                var factor = half == 0 ? low : high;
                (Vector256.LoadUnsafe(ref x[at]) + factor * Vector256.LoadUnsafe(ref direction[at])).StoreUnsafe(ref x[at]);
                (Vector256.LoadUnsafe(ref residual[at]) - factor * Vector256.LoadUnsafe(ref times[at])).StoreUnsafe(ref residual[at]);
            });
            Precondition(residual, scaled);
            var next = Dots(residual, scaled);
            var keep = next.Zip(energy, (n, e) => e > 0 ? n / e : 0).ToArray();
            (low, high) = (Halves(keep, 0), Halves(keep, 2));
            Rows((at, half) => (Vector256.LoadUnsafe(ref scaled[at]) + (half == 0 ? low : high) * Vector256.LoadUnsafe(ref direction[at])).StoreUnsafe(ref direction[at]));
            energy = next;
        }
    }

    public void Multiply(float[] x, float[] product)
    {
        var graph = _s.Graph;
        graph.ByCell.Each((_, from, to) =>
        {
            var (vehicleOf, byCell) = (graph.VehicleOf, _s.ByCell);
            for (var c = from; c < to; c++)
            {
                var (low, high) = (Vector256<float>.Zero, Vector256<float>.Zero);
                for (var j = graph.CellFrom[c]; j < graph.CellFrom[c + 1]; j++)
                {
                    var (load, at) = (Twice(byCell, j), Stride * vehicleOf[j]);
                    low += load * Vector256.LoadUnsafe(ref x[at]);
                    high += load * Vector256.LoadUnsafe(ref x[at], Half);
                }
                var scale = _perPivot[c];
                _share[Sides * c] = scale * Vector128.Sum(low.GetLower());
                _share[Sides * c + 1] = scale * Vector128.Sum(low.GetUpper());
                _share[Sides * c + 2] = scale * Vector128.Sum(high.GetLower());
                _share[Sides * c + 3] = scale * Vector128.Sum(high.GetUpper());
            }
        });
        graph.ByVehicle.Each((_, from, to) =>
        {
            var witnesses = Vector256.Create(-1, -1, -1, 0, -1, -1, -1, 0).AsSingle();
            var (cellOf, coefficients) = (graph.CellOf, _s.Coefficients);
            for (var v = from; v < to; v++)
            {
                var (low, high) = (Vector256<float>.Zero, Vector256<float>.Zero);
                for (var e = graph.VehicleFrom[v]; e < graph.VehicleFrom[v + 1]; e++)
                {
                    var (load, cell) = (Twice(coefficients, e), Sides * cellOf[e]);
                    low += load * Vector256.Create(Vector128.Create(_share[cell]), Vector128.Create(_share[cell + 1]));
                    high += load * Vector256.Create(Vector128.Create(_share[cell + 2]), Vector128.Create(_share[cell + 3]));
                }
                var (diagonal, at) = (Twice(_diagonal, v), Stride * v);
                ((diagonal * Vector256.LoadUnsafe(ref x[at]) - low) & witnesses).StoreUnsafe(ref product[at]);
                ((diagonal * Vector256.LoadUnsafe(ref x[at], Half) - high) & witnesses).StoreUnsafe(ref product[at], Half);
            }
        });
    }

    /// <summary>Vehicles' blocks, and the slow directions beside them.</summary>
    public void Precondition(float[] r, float[] z)
    {
        var slow = SlowParts(r, Slow);
        for (var k = 0; k < slow.Length; k++) slow[k] = SlowWeight[k / Sides] > 0 ? slow[k] / SlowWeight[k / Sides] : 0;
        _s.Graph.ByVehicle.Each((_, from, to) =>
        {
            for (var v = from; v < to; v++)
                for (var side = 0; side < Sides; side++)
                {
                    var (at, block) = (Stride * v + Lanes * side, 3 * Lanes * v);
                    var answer = Vector128.LoadUnsafe(ref _block[block]) * r[at] + Vector128.LoadUnsafe(ref _block[block + Lanes]) * r[at + 1] + Vector128.LoadUnsafe(ref _block[block + 2 * Lanes]) * r[at + 2];
                    (answer + Vector128.LoadUnsafe(ref Slow[Lanes * v]) * (float)slow[Sides * _s.Component[v] + side]).StoreUnsafe(ref z[at]);
                }
        });
    }

    /// <summary>Each component's product of the vectors with a direction, four sides a component.</summary>
    public double[] SlowParts(float[] r, float[] direction)
    {
        var parts = new double[Sides * _s.Components];
        for (var v = 0; v < _s.Graph.Vehicles; v++)
        {
            var (mine, at) = (Vector128.LoadUnsafe(ref direction[Lanes * v]), Sides * _s.Component[v]);
            for (var side = 0; side < Sides; side++) parts[at + side] += Vector128.Sum(mine * Vector128.LoadUnsafe(ref r[Stride * v + Lanes * side]));
        }
        return parts;
    }

    private double[] Dots(float[] a, float[] b)
    {
        var parts = new double[_s.Graph.ByVehicle.Count][];
        _s.Graph.ByVehicle.Each((part, from, to) =>
        {
            var sum = new double[Sides];
            for (var v = from; v < to; v++)
                for (var side = 0; side < Sides; side++)
                    sum[side] += Vector128.Sum(Vector128.LoadUnsafe(ref a[Stride * v + Lanes * side]) * Vector128.LoadUnsafe(ref b[Stride * v + Lanes * side]));
            parts[part] = sum;
        });
        return RoadSystem.Sum(parts, Sides);
    }

    private void Rows(Action<int, int> half)
    {
        for (var at = 0; at < Stride * _s.Graph.Vehicles; at += Half) half(at, at % Stride / Half);
    }

    private static Vector256<float> Twice(float[] coefficients, int pair)
    {
        var four = Vector128.LoadUnsafe(ref coefficients[Lanes * pair]);
        return Vector256.Create(four, four);
    }

    private static Vector256<float> Halves(double[] factors, int first) =>
        Vector256.Create(Vector128.Create((float)factors[first]), Vector128.Create((float)factors[first + 1]));
}
