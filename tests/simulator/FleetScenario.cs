namespace WearWatch.Simulator;

/// <summary>The arguments of a fleet.</summary>
public sealed record Scenario(ulong Seed, int Vehicles, int Weeks, long MaxSamples, DateOnly End)
{
    /// <summary>Logged trips run on roads without any bank; everything else is the same as with it.</summary>
    public bool FlatTrips { get; init; }

    /// <summary>Nobody gauges any tyre; everything else is the same.</summary>
    public bool NoSurveys { get; init; }

    /// <summary>Note down what the best possible is to be told.</summary>
    public bool Best { get; init; }

    public int Days => Weeks * 7;
    /// <summary>First day of the window; the last day of it is <see cref="End"/>.</summary>
    public DateOnly Start => End.AddDays(-Days);

    /// <summary>UTC time of a moment, days from the start of the window.</summary>
    public DateTime At(double day) => Start.ToDateTime(TimeOnly.MinValue, DateTimeKind.Utc).AddSeconds(Math.Round(day * 86400));

    public string Time(double day) => At(day).ToString("yyyy-MM-dd'T'HH:mm:ss'Z'");

    public string Date(double day) => At(day).ToString("yyyy-MM-dd");
}

/// <summary>
/// Draws the fleet: who is misaligned and how much, who only looks so, what each has for sensors. A little under a
/// quarter is misaligned at the end of the window, three fifths of those by 1.5 to 4 tolerances, the rest by 1 to 1.5.
/// </summary>
public sealed class FleetScenario
{
    private readonly Scenario _scenario;
    private readonly Dictionary<int, RoadNetwork> _roads = [];

    public IReadOnlyList<FleetVehicle> Vehicles { get; }
    public RoadNetwork Roads(Depot depot) => _roads[depot.Index];

    public FleetScenario(Scenario scenario)
    {
        _scenario = scenario;
        foreach (var depot in Depot.All) _roads[depot.Index] = new(depot, scenario.Seed);
        var n = scenario.Vehicles;
        var fleet = new RandomStream(scenario.Seed, 1);
        // Delivery vans and trailers meet the most kerbs (common practice, no source): an order weighted by class.
        var order = Enumerable.Range(0, n).OrderBy(i => -Math.Log(1 - new RandomStream(scenario.Seed, 14, i).Unit()) / Exposure(TypeOf(i).Class)).ToArray();
        var (large, misaligned) = DrawCounts(n, fleet);
        var repaired = Math.Max(1, n / 16);
        Vehicles = [.. Enumerable.Range(0, n).Select(i =>
        {
            var rank = Array.IndexOf(order, i);
            var fate = rank < large ? Fate.Large : rank < misaligned ? Fate.Small : rank < misaligned + repaired ? Fate.Repaired : Fate.Sound;
            return Draw(i, fate);
        })];
    }

    /// <summary>How many are misaligned, and how many of those by 1.5 tolerances or more.</summary>
    public static (int Large, int Misaligned) DrawCounts(int vehicles, RandomStream random)
    {
        var misaligned = (int)Math.Round(vehicles * random.Between(0.22, 0.249), MidpointRounding.ToZero);
        return ((int)Math.Round(0.6 * misaligned), misaligned);
    }

    private enum Fate { Large, Small, Repaired, Sound }

    public static VehicleType TypeOf(int index)
    {
        var choices = VehicleTypes.Mix[index % VehicleTypes.Mix.Length];
        return choices[index / VehicleTypes.Mix.Length % choices.Length];
    }

    public static double Exposure(VehicleClass c) => c switch
    {
        VehicleClass.Van => 1.5,
        VehicleClass.Trailer => 1.4,
        VehicleClass.Car => 1,
        _ => 0.55,
    };

    private FleetVehicle Draw(int index, Fate fate)
    {
        var random = new RandomStream(_scenario.Seed, 2, index);
        var type = TypeOf(index);
        var depot = Depot.Of(index, _scenario.Vehicles);
        var positions = Position.Of(type);
        var sound = Geometry.DrawSound(type, random);
        var fault = fate switch
        {
            Fate.Large => Fault.Draw(type, sound, random, 1.5, 4, _scenario.Days),
            Fate.Small => Fault.Draw(type, sound, random, 1.05, 1.5, _scenario.Days),
            Fate.Repaired => Fault.Draw(type, sound, random, 1.5, 4, _scenario.Days) with
            {
                Mode = FaultMode.Before,
                StartDay = -7.0 * random.Whole(8, 40),
                RepairDay = Math.Floor(_scenario.Days * random.Between(0.35, 0.75)) + 0.6,
            },
            _ => null,
        };
        // A kerb is struck on a day with a logged trip, about noon.
        if (fault is { Mode: FaultMode.Sudden }) fault = fault with { StartDay = Math.Floor(fault.StartDay / 7) * 7 + VehicleHistory.TripDay(index) + 0.5 };
        var routes = DrawRoutes(type, random, index);
        var kmPerWeek = type.KmPerWeek * random.Between(0.75, 1.25);
        var vehicle = new FleetVehicle
        {
            Index = index,
            Id = $"{(type.IsTrailer ? 'T' : 'V')}{index + 1:D3}",
            Type = type,
            Depot = depot,
            Positions = positions,
            Sound = sound,
            Fault = fault,
            AfterRepair = fate == Fate.Repaired ? Geometry.DrawSound(type, random, Geometry.RepairedSpread) : null,
            Sensors = SteeringSensors.Draw(type, Slot(index), random),
            Routes = routes,
            KmPerWeek = kmPerWeek,
            OdometerKm = Math.Floor(kmPerWeek * random.Between(60, 300)),
            Duty = DrawDuty(type, depot, routes, random),
            PressureShare = [.. positions.Select(_ => Math.Clamp(-0.02 + 0.03 * random.Normal(), -0.1, 0.06))],
            DistanceSource = !type.IsTrailer ? "odometer" : random.Chance(0.55) ? "hub_counter" : "none",
            RegistrationYear = (2017 + random.Whole(0, 8)).ToString(),
        };
        if (fate == Fate.Sound && random.Chance(0.45)) LookAlikes.Plant(vehicle, Roads(depot), random);
        return vehicle;
    }

    /// <summary>Place of a vehicle among the light, or among the heavy powered, vehicles of the fleet.</summary>
    private static int Slot(int index)
    {
        static bool Light(int i) => VehicleTypes.Mix[i % VehicleTypes.Mix.Length][0].Class is VehicleClass.Car or VehicleClass.Van;
        static bool Trailer(int i) => VehicleTypes.Mix[i % VehicleTypes.Mix.Length][0].IsTrailer;
        return Enumerable.Range(0, index).Count(i => !Trailer(i) && Light(i) == Light(index));
    }

    private static int[] DrawRoutes(VehicleType type, RandomStream random, int index) =>
        type.Class == VehicleClass.Bus
            ? [index / 4 % RoadNetwork.Loops]
            : [RoadNetwork.Loops + (index + random.Whole(0, 2)) % 8, RoadNetwork.Loops + (index + 3 + random.Whole(0, 2)) % 8];

    private Duty DrawDuty(VehicleType type, Depot depot, int[] routes, RandomStream random)
    {
        var roads = Roads(depot);
        return new()
        {
            Driver = Math.Exp(random.Within(0.13, 0.3)),
            Exponent = random.Between(2.0, 2.6),
            OneWayDeg = type.Class == VehicleClass.Bus ? depot.RoadSide * random.Between(0.04, 0.09) : random.Within(0.01, 0.03),
            Roll = type.RollShare * random.Between(0.6, 1.4),
            MeanBank = routes.Average(r => RoadNetwork.MeanBank(roads.Routes[r])) + 0.001 * random.Normal(),
        };
    }
}
