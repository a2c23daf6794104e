using System.Runtime.Intrinsics;
using System.Runtime.Intrinsics.X86;

namespace WearWatch.Diagnosis.Roads;

/// <summary>
/// One weighted least-squares step: witness = own figure of the vehicle + gain of its class × bank of the cell, the product taken linear
/// about the present values, every unknown held by a prior. Cells are eliminated exactly (Schur complement) and the rest is solved
/// by conjugate gradients (Hestenes and Stiefel 1952), preconditioned by each vehicle's own block and <see cref="RoadLevels"/>.
/// Unknowns stand as: four lanes a vehicle, one level a component, four lanes of gain a class, two crowns.
/// </summary>
internal sealed class RoadSystem
{
    private const int Lanes = RoadProblem.Lanes;
    private const int MostSteps = 500;
    public static readonly Vector256<double> Witnesses = Vector256.Create(-1L, -1L, -1L, 0).AsDouble();

    private readonly float[] _byCell;
    private readonly double[] _perPivot;
    private readonly double[] _share;  // a cell's answer to the vector at hand, and the same times its bank
    private readonly RoadLevels _levels;
    private readonly double[][] _vectors; // of the conjugate gradients; the first, the change, is zero when the right-hand side is made

    public RoadSystem(RoadGraph graph, int[] classOf, int classes, int[] component, int[] cellComponent, int components, int[] cellSide)
    {
        (Graph, ClassOf, Classes, Component, CellComponent, Components, CellSide) = (graph, classOf, classes, component, cellComponent, components, cellSide);
        (Coefficients, _byCell) = (new float[Lanes * graph.Pairs], new float[Lanes * graph.Pairs]);
        (Bank, Pivot, Rest, _share, Priors) = (new double[graph.Cells], new double[graph.Cells], new double[graph.Cells], new double[2 * graph.Cells], new CellPrior[graph.Cells]);
        _perPivot = new double[graph.Cells];
        (Diagonal, Tilt, Block) = (new double[Lanes * graph.Vehicles], new double[Lanes * graph.Vehicles], new double[3 * Lanes * graph.Vehicles]);
        (PriorWeight, Force, U) = (new double[Size], new double[Size], new double[Size]);
        Array.Fill(PriorWeight, 1);
        (Gain, GainSquare) = (new double[Lanes * classes], new double[Lanes * classes]);
        _vectors = [new double[Size], new double[Size], new double[Size], new double[Size], new double[Size]];
        _levels = new(this);
    }

    public RoadGraph Graph { get; }
    public int[] ClassOf { get; }
    public int Classes { get; }
    public int[] Component { get; }
    public int[] CellComponent { get; }
    public int Components { get; }
    public int[] CellSide { get; }
    public int LevelAt => Lanes * Graph.Vehicles;
    public int GainAt => LevelAt + Components;
    public int CrownAt => GainAt + Lanes * Classes;
    public int Size => CrownAt + 2;

    /// <summary>Present values.</summary>
    public double[] U { get; }
    public double[] Bank { get; }
    /// <summary>What one unit of bank brings, by class and witness; 0 in the unused lane.</summary>
    public double[] Gain { get; }
    public CellPrior[] Priors { get; }
    public double[] PriorWeight { get; }
    /// <summary>Σ weight × residual over each unknown's own equations, its prior's included; levels and crowns are added here.</summary>
    public double[] Force { get; }
    /// <summary>Σ weight × gain of each pair's witnesses; the last lane Σ weight × gain × residual.</summary>
    public float[] Coefficients { get; }
    public float[] ByCell => _byCell;
    /// <summary>Weight that holds each cell.</summary>
    public double[] Pivot { get; }
    /// <summary>Weighted residual of each cell.</summary>
    public double[] Rest { get; }
    /// <summary>Weight of each vehicle's own equations, and the same times the bank; prior included in the first.</summary>
    public double[] Diagonal { get; }
    public double[] Tilt { get; }
    /// <summary>Weight times bank squared by class.</summary>
    public double[] GainSquare { get; }
    /// <summary>Inverse of each vehicle's block of the reduced system, three rows of four lanes.</summary>
    public double[] Block { get; }
    /// <summary>Observations' worth of each witness that the cells themselves take up.</summary>
    public double[] Taken { get; private set; } = new double[Lanes];

    public double Level(int cell) => Priors[cell].OnLevel ? U[CrownAt + CellSide[cell]] + U[LevelAt + CellComponent[cell]] : 0;

    /// <summary>Takes over new coefficients, priors and present values.</summary>
    /// <param name="afresh">False keeps the preconditioner of before, which serves as long as the weights hardly change.</param>
    public void Prepare(bool afresh = true)
    {
        var taken = new double[Graph.ByCell.Count][];
        Graph.ByCell.Each((part, from, to) => taken[part] = Transpose(from, to));
        Taken = Sum(taken, Lanes);
        var squares = new double[Graph.ByVehicle.Count][];
        Graph.ByVehicle.Each((part, from, to) => squares[part] = Vehicles(from, to, afresh));
        Sum(squares, GainSquare.Length).CopyTo(GainSquare, 0);
        if (afresh) _levels.Build();
    }

    /// <summary>Solves for the change of every unknown and of the cells, until the residual has fallen by the factor; applies it.</summary>
    /// <returns>The change of the unknowns, until the next step.</returns>
    public double[] Step(double fall)
    {
        var (change, residual, direction, times, scaled) = (_vectors[0], _vectors[1], _vectors[2], _vectors[3], _vectors[4]);
        Array.Clear(change);
        Right(residual);
        Precondition(residual, scaled);
        var energy = Dot(residual, scaled);
        var goal = energy * fall * fall;
        scaled.CopyTo(direction, 0);
        for (var step = 0; step < MostSteps && energy > goal && energy > 0; step++)
        {
            Multiply(direction, times);
            var curvature = Dot(direction, times);
            if (!(curvature > 0)) break;
            var length = energy / curvature;
            for (var i = 0; i < residual.Length; i++)
            {
                change[i] += length * direction[i];
                residual[i] -= length * times[i];
            }
            Precondition(residual, scaled);
            var next = Dot(residual, scaled);
            for (var i = 0; i < residual.Length; i++) direction[i] = scaled[i] + next / energy * direction[i];
            energy = next;
        }
        Answer(change);
        for (var c = 0; c < Bank.Length; c++) Bank[c] += Rest[c] * _perPivot[c] - _share[2 * c];
        for (var i = 0; i < change.Length; i++) U[i] += change[i];
        return change;
    }

    /// <summary>The reduced system times a vector, without forming it.</summary>
    public void Multiply(double[] x, double[] product)
    {
        Answer(x);
        for (var i = LevelAt; i < Size; i++) product[i] = PriorWeight[i] * x[i];
        for (var c = 0; c < Bank.Length; c++)
        {
            if (!Priors[c].OnLevel) continue;
            var (level, crown) = (LevelAt + CellComponent[c], CrownAt + CellSide[c]);
            var pull = Priors[c].Weight * (x[level] + x[crown] + _share[2 * c]);
            product[level] += pull;
            product[crown] += pull;
        }
        Scatter(x, product);
    }

    /// <summary>Approximate inverse times a vector.</summary>
    private void Precondition(double[] r, double[] z)
    {
        for (var v = 0; v < Graph.Vehicles; v++) TimesBlock(v, r).StoreUnsafe(ref z[Lanes * v]);
        Array.Clear(z, LevelAt, Size - LevelAt);
        _levels.Add(r, z);
    }

    public Vector256<double> TimesBlock(int v, double[] r)
    {
        ref var block = ref Block[3 * Lanes * v];
        return Vector256.LoadUnsafe(ref block) * r[Lanes * v] + Vector256.LoadUnsafe(ref block, Lanes) * r[Lanes * v + 1] + Vector256.LoadUnsafe(ref block, 2 * Lanes) * r[Lanes * v + 2];
    }

    public static Vector256<double> Load(float[] coefficients, int pair) => Widen(Vector128.LoadUnsafe(ref coefficients[Lanes * pair]));

    public static Vector256<double> Widen(Vector128<float> four)
    {
        return Avx.IsSupported ? Avx.ConvertToVector256Double(four) : Vector256.Create(Vector128.WidenLower(four), Vector128.WidenUpper(four));
    }

    public static double[] Sum(double[][] parts, int length)
    {
        var sum = new double[length];
        foreach (var part in parts) for (var i = 0; i < length; i++) sum[i] += part[i];
        return sum;
    }

    private double[] Transpose(int from, int to)
    {
        var taken = Vector256<double>.Zero;
        for (var c = from; c < to; c++)
        {
            var (held, rest) = (Vector256<double>.Zero, 0.0);
            for (var j = Graph.CellFrom[c]; j < Graph.CellFrom[c + 1]; j++)
            {
                Vector128.LoadUnsafe(ref Coefficients[Lanes * Graph.PairOf[j]]).StoreUnsafe(ref _byCell[Lanes * j]);
                held += Load(_byCell, j) * Vector256.LoadUnsafe(ref Gain[Lanes * ClassOf[Graph.VehicleOf[j]]]);
                rest += _byCell[Lanes * j + 3];
            }
            var prior = Priors[c];
            Pivot[c] = Vector256.Sum(held) + prior.Weight;
            _perPivot[c] = 1 / Pivot[c];
            Rest[c] = rest - prior.Weight * (Bank[c] - prior.Bank - Level(c));
            taken += held * _perPivot[c];
        }
        return [taken[0], taken[1], taken[2], 0];
    }

    private double[] Vehicles(int from, int to, bool blocks)
    {
        var squares = new double[GainSquare.Length];
        for (var v = from; v < to; v++)
        {
            var gain = Vector256.LoadUnsafe(ref Gain[Lanes * ClassOf[v]]);
            var perGain = Vector256.ConditionalSelect(Vector256.Equals(gain, Vector256<double>.Zero), Vector256<double>.Zero, Vector256<double>.One / gain);
            var (diagonal, tilt, square) = (Vector256<double>.Zero, Vector256<double>.Zero, Vector256<double>.Zero);
            for (var e = Graph.VehicleFrom[v]; e < Graph.VehicleFrom[v + 1]; e++)
            {
                var (load, cell) = (Load(Coefficients, e), Graph.CellOf[e]);
                var (bank, weight) = (Bank[cell], load * perGain);
                diagonal += weight;
                tilt += weight * bank;
                square += weight * (bank * bank);
            }
            diagonal += Vector256.LoadUnsafe(ref PriorWeight[Lanes * v]);
            diagonal.StoreUnsafe(ref Diagonal[Lanes * v]);
            tilt.StoreUnsafe(ref Tilt[Lanes * v]);
            for (var lane = 0; lane < 3; lane++) squares[Lanes * ClassOf[v] + lane] += square[lane];
            if (blocks) Invert(v, diagonal);
        }
        return squares;
    }

    /// <summary>A vehicle's block of the reduced system, inverted.</summary>
    private void Invert(int v, Vector256<double> diagonal)
    {
        var (a, b, c) = (Vector256<double>.Zero, Vector256<double>.Zero, Vector256<double>.Zero);
        for (var e = Graph.VehicleFrom[v]; e < Graph.VehicleFrom[v + 1]; e++)
        {
            var scaled = Load(Coefficients, e) * _perPivot[Graph.CellOf[e]];
            a += scaled * Coefficients[Lanes * e];
            b += scaled * Coefficients[Lanes * e + 1];
            c += scaled * Coefficients[Lanes * e + 2];
        }
        Invert(diagonal[0] - a[0], -a[1], -a[2], diagonal[1] - b[1], -b[2], diagonal[2] - c[2], 3 * Lanes * v);
    }

    /// <summary>Inverse of a symmetric block of three.</summary>
    private void Invert(double aa, double ab, double ac, double bb, double bc, double cc, int at)
    {
        var (p, q, r) = (bb * cc - bc * bc, ac * bc - ab * cc, ab * bc - ac * bb);
        var scale = 1 / (aa * p + ab * q + ac * r);
        var (s, t, w) = (aa * cc - ac * ac, ab * ac - aa * bc, aa * bb - ab * ab);
        Vector256.Create(p * scale, q * scale, r * scale, 0).StoreUnsafe(ref Block[at]);
        Vector256.Create(q * scale, s * scale, t * scale, 0).StoreUnsafe(ref Block[at + Lanes]);
        Vector256.Create(r * scale, t * scale, w * scale, 0).StoreUnsafe(ref Block[at + 2 * Lanes]);
    }

    private void Right(double[] right)
    {
        Array.Clear(right);
        for (var c = 0; c < Bank.Length; c++)
        {
            var share = Rest[c] * _perPivot[c];
            (_share[2 * c], _share[2 * c + 1]) = (share, share * Bank[c]);
            if (!Priors[c].OnLevel) continue;
            var pull = Priors[c].Weight * (Bank[c] - Priors[c].Bank - Level(c) + share);
            Force[LevelAt + CellComponent[c]] += pull;
            Force[CrownAt + CellSide[c]] += pull;
        }
        Scatter(_vectors[0], right);
        for (var i = 0; i < right.Length; i++) right[i] += Force[i];
    }

    /// <summary>How each cell answers a change of the unknowns, with its sign turned, into the shares.</summary>
    private void Answer(double[] x) => Graph.ByCell.Each((_, from, to) =>
    {
        var (vehicleOf, classOf) = (Graph.VehicleOf, ClassOf);
        for (var c = from; c < to; c++)
        {
            var sum = Vector256<double>.Zero;
            var bank = Vector256.Create(Bank[c]);
            for (var j = Graph.CellFrom[c]; j < Graph.CellFrom[c + 1]; j++)
            {
                var v = vehicleOf[j];
                sum += Load(_byCell, j) * (Vector256.LoadUnsafe(ref x[Lanes * v]) + bank * Vector256.LoadUnsafe(ref x[GainAt + Lanes * classOf[v]]));
            }
            var level = Priors[c].OnLevel ? Priors[c].Weight * (x[LevelAt + CellComponent[c]] + x[CrownAt + CellSide[c]]) : 0;
            var share = (Vector256.Sum(sum) - level) * _perPivot[c];
            (_share[2 * c], _share[2 * c + 1]) = (share, share * Bank[c]);
        }
    });

    /// <summary>Direct terms of x less what the shares bring, into the vehicles' lanes and added to the gains'.</summary>
    private void Scatter(double[] x, double[] product)
    {
        var gains = new double[Graph.ByVehicle.Count][];
        Graph.ByVehicle.Each((part, from, to) =>
        {
            var gain = gains[part] = new double[Lanes * Classes];
            for (var v = from; v < to; v++)
            {
                var (own, tilted) = (Vector256<double>.Zero, Vector256<double>.Zero);
                for (var e = Graph.VehicleFrom[v]; e < Graph.VehicleFrom[v + 1]; e++)
                {
                    var (load, cell) = (Load(Coefficients, e), 2 * Graph.CellOf[e]);
                    own += load * _share[cell];
                    tilted += load * _share[cell + 1];
                }
                var (tilt, at) = (Vector256.LoadUnsafe(ref Tilt[Lanes * v]), Lanes * ClassOf[v]);
                var mine = Vector256.LoadUnsafe(ref x[Lanes * v]);
                own = Vector256.LoadUnsafe(ref Diagonal[Lanes * v]) * mine + tilt * Vector256.LoadUnsafe(ref x[GainAt + at]) - own;
                (own & Witnesses).StoreUnsafe(ref product[Lanes * v]);
                (Vector256.LoadUnsafe(ref gain[at]) + ((tilt * mine - tilted) & Witnesses)).StoreUnsafe(ref gain[at]);
            }
        });
        var sum = Sum(gains, Lanes * Classes);
        for (var i = 0; i < sum.Length; i++) product[GainAt + i] += sum[i] + GainSquare[i] * x[GainAt + i];
        // Gains of witnesses that hold none of their own (the bank reading's is fixed) stay where they are.
        for (var i = 0; i < sum.Length; i++) if (i % Lanes >= 2) product[GainAt + i] = PriorWeight[GainAt + i] * x[GainAt + i];
    }

    private static double Dot(double[] a, double[] b)
    {
        var sum = Vector256<double>.Zero;
        var i = 0;
        for (; i + Lanes <= a.Length; i += Lanes) sum += Vector256.LoadUnsafe(ref a[i]) * Vector256.LoadUnsafe(ref b[i]);
        var rest = Vector256.Sum(sum);
        for (; i < a.Length; i++) rest += a[i] * b[i];
        return rest;
    }
}
