namespace WearWatch.Simulator;

public enum RoadKind { Crowned, OnePlane, MultiLane }

/// <summary>A road between two places, sampled every <see cref="StepM"/> from its first end, in metres east and north of the depot.</summary>
public sealed class Road
{
    public const double StepM = 5;

    public required int From { get; init; }
    public required int To { get; init; }
    public required RoadKind Kind { get; init; }
    public required double LimitKmH { get; init; }
    public required double[] East { get; init; }
    public required double[] North { get; init; }
    /// <summary>Curvature driven from the first end, 1/m, + left.</summary>
    public required double[] Curvature { get; init; }
    /// <summary>Sine of the bank under a vehicle driving from the first end, + left side higher.</summary>
    public required double[] BankForward { get; init; }
    /// <summary>The same, driving from the far end; same place, other lane.</summary>
    public required double[] BankBackward { get; init; }

    public int Points => East.Length;
}

/// <summary>
/// Roads round one depot: a grid of places some 5 km apart, joined by roads with long straights and a few curves.
/// Two-way roads are crowned and fall to the near side in both directions; one-plane roads fall one way, so that
/// driving back turns the sign; multi-lane roads fall to the near side. Cross-slope 1.5 to 3 % (usual 2 %;
/// AASHTO and state design manuals), up to 4.5 % in curves.
/// </summary>
public sealed class RoadNetwork
{
    private const int Columns = 5, Rows = 4;
    private const double SpacingM = 4800;

    public Depot Depot { get; }
    public List<Road> Roads { get; } = [];
    /// <summary>Usual routes: sequences of (road, driven from its first end). The first four are closed loops round one block.</summary>
    public List<(Road Road, bool Forward)[]> Routes { get; } = [];
    public const int Loops = 4;

    public RoadNetwork(Depot depot, ulong seed)
    {
        Depot = depot;
        var random = new RandomStream(seed, 101, depot.Index);
        var places = new (double East, double North)[Columns * Rows];
        for (var i = 0; i < places.Length; i++)
            places[i] = ((i % Columns - 1.5) * SpacingM + random.Between(-900, 900), (i / Columns - 1.5) * SpacingM + random.Between(-900, 900));
        for (var i = 0; i < places.Length; i++)
        {
            if (i % Columns + 1 < Columns) Roads.Add(Build(i, i + 1, places, random));
            if (i + Columns < places.Length) Roads.Add(Build(i, i + Columns, places, random));
        }
        for (var k = 0; k < Loops; k++) Routes.Add(Loop(k));
        for (var k = 0; k < 8; k++) Routes.Add(Walk(random, onlyCrowned: false));
        for (var k = 0; k < 2; k++) Routes.Add(Walk(random, onlyCrowned: true));
    }

    /// <summary>Mean bank met on a route.</summary>
    public static double MeanBank((Road Road, bool Forward)[] route) =>
        route.Sum(r => (r.Forward ? r.Road.BankForward : r.Road.BankBackward).Sum()) / route.Sum(r => r.Road.Points);

    private Road Build(int from, int to, (double East, double North)[] places, RandomStream random)
    {
        var kind = random.Unit() switch { < 0.58 => RoadKind.Crowned, < 0.76 => RoadKind.OnePlane, _ => RoadKind.MultiLane };
        var (dx, dy) = (places[to].East - places[from].East, places[to].North - places[from].North);
        var length = Math.Sqrt(dx * dx + dy * dy);
        var points = (int)(length / Road.StepM);
        var (offset, curvature) = Curves(points, random);
        var (east, north) = (new double[points], new double[points]);
        for (var i = 0; i < points; i++)
        {
            var s = i * Road.StepM / length;
            east[i] = places[from].East + s * dx - offset[i] * dy / length;
            north[i] = places[from].North + s * dy + offset[i] * dx / length;
        }
        var slope = random.Between(0.015, 0.030);
        // One-plane roads fall to either side of the one who drives from the first end.
        var forwardFall = kind == RoadKind.OnePlane ? random.Sign() : Depot.RoadSide;
        var backwardFall = kind == RoadKind.OnePlane ? -forwardFall : Depot.RoadSide;
        return new()
        {
            From = from,
            To = to,
            Kind = kind,
            East = east,
            North = north,
            Curvature = curvature,
            LimitKmH = kind switch { RoadKind.MultiLane => 105, RoadKind.OnePlane => 85, _ => random.Chance(0.4) ? 75 : 92 },
            BankForward = Bank(points, forwardFall * slope, curvature, 1, random),
            BankBackward = Bank(points, backwardFall * (kind == RoadKind.OnePlane ? slope : slope + random.Between(-0.003, 0.003)), curvature, -1, random),
        };
    }

    /// <summary>Offsets (m) and curvatures of one to three S-free bends, each a bump A sin⁴ so that curvature starts and ends at zero.</summary>
    private static (double[] Offset, double[] Curvature) Curves(int points, RandomStream random)
    {
        var (offset, curvature) = (new double[points], new double[points]);
        var bends = random.Whole(1, 2);
        for (var b = 0; b < bends; b++)
        {
            var length = random.Between(420, 700);
            var radius = random.Between(260, 600);
            var at = (b + random.Between(0.35, 0.65)) / bends * points * Road.StepM - length / 2;
            var rate = Math.PI / length;
            var amplitude = random.Sign() / (4 * rate * rate * radius);
            for (var i = 0; i < points; i++)
            {
                var t = (i * Road.StepM - at) / length;
                if (t is <= 0 or >= 1) continue;
                var (sin, cos) = Math.SinCos(Math.PI * t);
                var sin2 = sin * sin;
                offset[i] += amplitude * sin2 * sin2;
                curvature[i] += amplitude * rate * rate * (12 * sin2 * cos * cos - 4 * sin2 * sin2);
            }
        }
        return (offset, curvature);
    }

    /// <summary>Cross-slope along a road: smooth about its usual value, turned into superelevation in bends.</summary>
    private static double[] Bank(int points, double usual, double[] curvature, int direction, RandomStream random)
    {
        var bank = new double[points];
        var drift = 0.0021 * random.Normal();
        var memory = Math.Exp(-Road.StepM / 350);
        var smooth = drift;
        for (var i = 0; i < points; i++)
        {
            drift = memory * drift + 0.0021 * Math.Sqrt(1 - memory * memory) * random.Normal();
            smooth += (drift - smooth) * 0.08;
            // A left bend (curvature > 0) has its right side raised: bank < 0.
            var bend = direction * curvature[i];
            var share = Math.Min(1, Math.Abs(bend) * 900);
            bank[i] = (usual + smooth) * (1 - share) - Math.Sign(bend) * share * Math.Min(0.045, Math.Abs(bend) * 16);
        }
        return bank;
    }

    private (Road, bool)[] Loop(int k)
    {
        // Round one block; always to the left where traffic keeps right, to the right where it keeps left.
        var (column, row) = (k % 2 + 1, k / 2 + 1);
        int[] corners = [row * Columns + column, row * Columns + column + 1, (row + 1) * Columns + column + 1, (row + 1) * Columns + column];
        if (Depot.RoadSide < 0) Array.Reverse(corners);
        return [.. Enumerable.Range(0, 4).Select(i => Between(corners[i], corners[(i + 1) % 4]))];
    }

    private (Road, bool) Between(int from, int to)
    {
        var road = Roads.First(r => (r.From == from && r.To == to) || (r.From == to && r.To == from));
        return (road, road.From == from);
    }

    /// <summary>Ten roads in a row without turning round; fewer, where a crowned network has no way on.</summary>
    private (Road, bool)[] Walk(RandomStream random, bool onlyCrowned)
    {
        List<(Road Road, bool Forward)> longest = [];
        for (var attempt = 0; attempt < 60 && longest.Count < 10; attempt++)
        {
            var here = random.Whole(0, Columns * Rows - 1);
            var walk = new List<(Road Road, bool Forward)>();
            while (walk.Count < 10)
            {
                var next = Roads.Where(r => (r.From == here || r.To == here) && (walk.Count == 0 || walk[^1].Road != r)
                    && (!onlyCrowned || r.Kind == RoadKind.Crowned)).ToList();
                if (next.Count == 0) break;
                var road = random.Pick(next);
                walk.Add((road, road.From == here));
                here = road.From == here ? road.To : road.From;
            }
            if (walk.Count > longest.Count) longest = walk;
        }
        return [.. longest];
    }
}
