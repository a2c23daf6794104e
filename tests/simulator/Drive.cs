namespace WearWatch.Simulator;

/// <summary>The way one trip goes, point by point every 5 m: place, curvature, bank, speed that can be driven.</summary>
public sealed class Drive
{
    private const double JunctionRadiusM = 14;

    public List<double> East { get; } = [];
    public List<double> North { get; } = [];
    /// <summary>1/m, + left.</summary>
    public List<double> Curvature { get; } = [];
    public List<double> Bank { get; } = [];
    /// <summary>Highest speed at which the point is passed, m/s.</summary>
    public List<double> Cap { get; } = [];
    /// <summary>Points at which the vehicle stops, and for how long, s.</summary>
    public Dictionary<int, double> Stops { get; } = [];

    public int Points => East.Count;

    /// <summary>Follows a route from one of its roads on until there is road for <paramref name="seconds"/> of driving.</summary>
    public static Drive Plan((Road Road, bool Forward)[] route, bool loop, Depot depot, double cruiseKmH, double seconds, bool heavy, RandomStream random)
    {
        var drive = new Drive();
        var need = seconds * cruiseKmH / 3.6 / Road.StepM;
        var at = loop ? random.Whole(0, route.Length - 1) : random.Whole(0, Math.Max(0, route.Length - 5));
        var heading = double.NaN;
        while (drive.Points < need && (loop || at < route.Length))
        {
            var (road, forward) = route[at % route.Length];
            heading = drive.Add(road, forward, depot.RoadSide, cruiseKmH, heading, random);
            at++;
        }
        drive.AddTraffic(random);
        drive.LookAhead(heavy ? 0.9 : 1.3);
        return drive;
    }

    /// <summary>Takes the bank off.</summary>
    public void Flatten()
    {
        for (var i = 0; i < Bank.Count; i++) Bank[i] = 0;
    }

    private double Add(Road road, bool forward, int roadSide, double cruiseKmH, double heading, RandomStream random)
    {
        int Index(int i) => forward ? i : road.Points - 1 - i;
        double Heading(int i) => Math.Atan2(road.North[Index(i + 1)] - road.North[Index(i)], road.East[Index(i + 1)] - road.East[Index(i)]);
        var first = Heading(0);
        if (!double.IsNaN(heading)) AddJunction(Math.IEEERemainder(first - heading, 2 * Math.PI), random);
        var cruise = Math.Min(road.LimitKmH, cruiseKmH) / 3.6 * random.Between(0.95, 1.02);
        for (var i = 0; i < road.Points; i++)
        {
            var k = Index(i);
            var curvature = (forward ? 1 : -1) * road.Curvature[k];
            var h = Heading(Math.Min(i, road.Points - 2));
            // In the lane: 1.9 m from the middle towards the near side.
            East.Add(road.East[k] + roadSide * 1.9 * Math.Sin(h));
            North.Add(road.North[k] - roadSide * 1.9 * Math.Cos(h));
            Curvature.Add(curvature);
            Bank.Add((forward ? road.BankForward : road.BankBackward)[k]);
            Cap.Add(Math.Min(cruise, Math.Sqrt(1.8 / (Math.Abs(curvature) + 1e-6))));
        }
        return Heading(road.Points - 2);
    }

    private void AddJunction(double turn, RandomStream random)
    {
        if (random.Chance(0.35)) Stops[Points - 2] = random.Between(6, 22);
        var points = Math.Max(2, (int)Math.Round(Math.Abs(turn) * JunctionRadiusM / Road.StepM));
        var curvature = turn / (points * Road.StepM);
        for (var i = 0; i < points; i++)
        {
            East.Add(East[^1]);
            North.Add(North[^1]);
            Curvature.Add(curvature);
            Bank.Add(Bank[^1] * 0.5);
            Cap.Add(Math.Abs(turn) < 0.25 ? 13 : 5.5);
        }
    }

    /// <summary>Slower traffic and lights here and there, also on straights: braking and driving phases.</summary>
    private void AddTraffic(RandomStream random)
    {
        for (var i = random.Whole(150, 500); i + 60 < Points; i += random.Whole(300, 900))
        {
            var share = random.Between(0.45, 0.85);
            var length = random.Whole(15, 50);
            for (var k = i; k < i + length; k++) Cap[k] *= share;
        }
    }

    /// <summary>Speed must allow braking at <paramref name="brake"/> m/s² to what comes.</summary>
    private void LookAhead(double brake)
    {
        foreach (var stop in Stops.Keys) Cap[stop] = 0.6;
        for (var i = Points - 2; i >= 0; i--)
            Cap[i] = Math.Min(Cap[i], Math.Sqrt(Cap[i + 1] * Cap[i + 1] + 2 * brake * Road.StepM));
    }
}
