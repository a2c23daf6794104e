using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;

namespace WearWatch.Diagnosis.Causes;

/// <summary>A stretch of a story's magnitude with its prior share; magnitudes within it are alike likely.</summary>
public readonly record struct Cell(double Low, double High, double Share)
{
    public double Middle => (Low + High) / 2;
}

/// <summary>One thing that may be wrong with a vehicle, of unknown magnitude.</summary>
public sealed record Story
{
    public required Quantity Quantity { get; init; }
    public int? Axle { get; init; }
    public Side? Side { get; init; }
    /// <summary>States it moves, with their share of the magnitude; empty where only single readings tell of it.</summary>
    public IReadOnlyList<(int State, double Weight)> Moves { get; init; } = [];
    /// <summary>Prior of the magnitude, in the quantity's unit as departure from target; shares sum to 1.</summary>
    public required IReadOnlyList<Cell> Cells { get; init; }
    /// <summary>Prior share of vehicles with it.</summary>
    public required double Share { get; init; }
    public double? Tolerance { get; init; }
    public double Target { get; init; }

    public bool IsAngle => Quantity.IsAngle();

    /// <summary>RMS of the prior magnitude.</summary>
    public double Spread => Math.Sqrt(Cells.Sum(c => c.Share * c.Middle * c.Middle));
}

/// <summary>All stories that fit a vehicle's axles.</summary>
public static class Stories
{
    /// <summary>Edges of the magnitude's cells, in tolerances; finer where faults are frequent.</summary>
    private static readonly double[] Slight = [1, 1.15, 1.3, 1.5];
    private static readonly double[] Plain = [1.5, 1.85, 2.3, 2.8, 3.4, 4];
    private static readonly double[] Gross = [4, 5];

    /// <summary>SD of an angle sensor's zero that is worth naming, deg at the wheel (from memory).</summary>
    private const double SensorZeroFall = 3.2;

    public static IReadOnlyList<Story> Of(VehicleModel model, FaultPriors priors) => [.. Angles(model, priors), .. LookAlikes(model, priors)];

    private static List<Story> Angles(VehicleModel model, FaultPriors priors)
    {
        var found = new List<Story>();
        for (var d = 0; d < model.Dimensions.Count; d++)
            if (model.Dimensions[d] is { Tolerance: { } tolerance } dimension)
                foreach (var moves in Ways(model, d))
                    found.Add(new Story
                    {
                        Quantity = dimension.Quantity,
                        Axle = dimension.Axle,
                        Side = dimension.Side,
                        Moves = moves,
                        Cells = AngleCells(tolerance, priors),
                        Share = priors.AngleWeights.GetValueOrDefault(dimension.Quantity),
                        Tolerance = tolerance,
                        Target = dimension.Target,
                    });
        var (left, right) = (model.IndexOf(Quantity.Camber, 1, Side.Left), model.IndexOf(Quantity.Camber, 1, Side.Right));
        if (Geometry.Tolerances.For(model.Figures.Vehicle, Quantity.CamberSplit, null, model.Figures.Tolerances, model.Figures.AsOf) is { } split && left >= 0)
            found.Add(new Story
            {
                Quantity = Quantity.CamberSplit,
                Axle = 1,
                Moves = [(left, 0.5), (right, -0.5)],
                Cells = AngleCells(split.PlusMinus, priors),
                Share = priors.AngleWeights.GetValueOrDefault(Quantity.CamberSplit),
                Tolerance = split.PlusMinus,
                Target = split.Target,
            });
        return ShareOut(found, priors);
    }

    /// <summary>
    /// Ways in which an angle comes about. Total toe goes out at both wheels, or at one of them: a bent arm or spindle on the
    /// left, on the right. One wheel toed in by m turns its axle by m/2, which moves the steering wheel, or sets the axle askew
    /// in its group (Gillespie 1992; ISO 8855 signs). A pair of axles is askew by the one or by the other.
    /// </summary>
    private static IEnumerable<IReadOnlyList<(int State, double Weight)>> Ways(VehicleModel model, int d)
    {
        yield return [(d, 1)];
        var dimension = model.Dimensions[d];
        var turned = dimension.Quantity switch
        {
            Quantity.FrontTotalToe => Known([(model.IndexOf(Quantity.SensorZeroOrFrontToeSplit), model.Ratio / 2)]),
            Quantity.RearTotalToe when model.RearGroup is [var only] && only == dimension.Axle => Known([(model.IndexOf(Quantity.Thrust), -0.5)]),
            Quantity.RearTotalToe => Turned(model, dimension.Axle!.Value, 0.5),
            _ => [],
        };
        if (turned.Count > 0)
        {
            yield return [(d, 1), .. turned];
            yield return [(d, 1), .. turned.Select(t => (t.State, -t.Weight))];
        }
        // The axle behind the gap alone, where another stands behind it: it is then askew against both its neighbours.
        if (dimension.Quantity == Quantity.TandemSkew && model.IndexOf(Quantity.TandemSkew, dimension.Axle + 1) is >= 0 and var behind)
            yield return [(d, 1), (behind, -1)];
    }

    /// <summary>One axle of a group turned to the left by so many degrees, as the skew of the pairs it belongs to.</summary>
    private static List<(int State, double Weight)> Turned(VehicleModel model, int axle, double degrees) =>
        Known([(model.IndexOf(Quantity.TandemSkew, axle), degrees), (model.IndexOf(Quantity.TandemSkew, axle - 1), -degrees)]);

    private static List<(int State, double Weight)> Known(IEnumerable<(int State, double Weight)> moves) => [.. moves.Where(m => m.State >= 0)];

    /// <summary>A quantity's weight is spread over the places that have it; all together make the misaligned share.</summary>
    private static List<Story> ShareOut(List<Story> found, FaultPriors priors)
    {
        var places = found.CountBy(s => s.Quantity).ToDictionary(); // and over the ways in which it comes about
        var total = found.Select(s => s.Share / places[s.Quantity]).Sum();
        return total <= 0 ? [] : [.. found.Select(s => s with { Share = priors.MisalignedShare * s.Share / places[s.Quantity] / total })];
    }

    private static Cell[] AngleCells(double tolerance, FaultPriors priors)
    {
        Cell[] positive =
        [
            .. Cells(Slight, tolerance, priors.SlightShare / 2),
            .. Cells(Plain, tolerance, (1 - priors.SlightShare - priors.GrossShare) / 2),
            .. Cells(Gross, tolerance, priors.GrossShare / 2),
        ];
        return [.. Mirrored(positive), .. positive];
    }

    private static IEnumerable<Story> LookAlikes(VehicleModel model, FaultPriors priors)
    {
        double Share(Quantity q) => priors.LookAlikeShares.GetValueOrDefault(q);
        Story Moving(Quantity q, double low, double high, double leftShare = 0.5)
        {
            Cell[] positive = [.. Cells([.. Enumerable.Range(0, 6).Select(i => low + (high - low) * i / 5)], 1, leftShare)];
            Cell[] negative = [.. Mirrored(positive).Select(c => c with { Share = c.Share * (1 - leftShare) / leftShare })];
            return new() { Quantity = q, Moves = [(model.IndexOf(q), 1)], Cells = [.. negative, .. positive], Share = Share(q) };
        }
        yield return Moving(Quantity.Duty, 0.25, 1.2);
        var road = model.Figures.Steering?.RoadShare switch { RoadShare.SharedCells => 0.3, RoadShare.OwnBankReading => 0.7, _ => 1.5 };
        if (!model.IsTrailer)
        {
            yield return Moving(Quantity.Conicity, 2 * model.Class.ConicitySdN, 6 * model.Class.ConicitySdN);
            yield return Falling(Moving(Quantity.SensorZeroOrFrontToeSplit, 2, 10), SensorZeroFall);
            yield return Moving(Quantity.Drag, 80, 500);
            // The road falls to the side that traffic keeps to, so a share left in the figures mostly has that sign.
            yield return Moving(Quantity.Crown, 0.4, 1.3, model.Figures.Depot.TrafficSide == TrafficSide.Right ? 0.7 : 0.3) with
            { Share = road * Share(Quantity.Crown) };
        }
        var axles = model.Figures.Vehicle.Axles;
        foreach (var axle in axles)
            foreach (var side in (Side[])[Side.Left, Side.Right])
            {
                var pressure = Share(Quantity.Pressure) / axles.Count / 3;
                yield return new() { Quantity = Quantity.Pressure, Axle = axle.Number, Side = side, Cells = PressureCells(), Share = pressure };
                if (side == Side.Right) yield return new() { Quantity = Quantity.Pressure, Axle = axle.Number, Cells = PressureCells(), Share = pressure };
                yield return new()
                {
                    Quantity = Quantity.Damper,
                    Axle = axle.Number,
                    Side = side,
                    Cells = [.. Cells([0.25, 0.4, 0.6, 0.8, 1.0, 1.3], 1, 1)],
                    Share = Share(Quantity.Damper) / axles.Count / 2,
                };
            }
    }

    /// <summary>Large magnitudes are rarer: shares fall off as a normal law of this SD.</summary>
    private static Story Falling(Story story, double sd)
    {
        var weights = story.Cells.Select(c => c.Share * Math.Exp(-0.5 * c.Middle * c.Middle / (sd * sd))).ToArray();
        var total = weights.Sum();
        return story with { Cells = [.. story.Cells.Select((c, i) => c with { Share = weights[i] / total })] };
    }

    /// <summary>Under-inflation mostly, as share of the set pressure; over-inflation seldom.</summary>
    private static Cell[] PressureCells() => [.. Mirrored([.. Cells([0.1, 0.15, 0.2, 0.3, 0.4, 0.5], 1, 0.85)]), .. Cells([0.1, 0.15, 0.2, 0.3], 1, 0.15)];

    private static IEnumerable<Cell> Cells(double[] edges, double unit, double share)
    {
        for (var i = 0; i + 1 < edges.Length; i++)
            yield return new(edges[i] * unit, edges[i + 1] * unit, share * (edges[i + 1] - edges[i]) / (edges[^1] - edges[0]));
    }

    private static IEnumerable<Cell> Mirrored(Cell[] cells) => cells.Reverse().Select(c => new Cell(-c.High, -c.Low, c.Share));
}
