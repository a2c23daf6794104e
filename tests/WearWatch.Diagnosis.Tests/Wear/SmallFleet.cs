using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Wear;

/// <summary>True wear of one tyre: linear from its depth when new.</summary>
internal sealed record TrueTyre(double NewMm, double RateMmPer1000Km, double EdgePerMm, double ShoulderPerMm, double StartKm)
{
    public double Depth(double km, int groove, int grooves)
    {
        var loss = (km - StartKm) / 1000 * RateMmPer1000Km;
        var u = TreadShape.Across(groove, grooves);
        return NewMm - loss * (1 + EdgePerMm / 2 * u + ShoulderPerMm * (u * u - TreadShape.MeanSquareAcross(grooves)));
    }

    public double EdgeRate => RateMmPer1000Km * EdgePerMm;
}

internal sealed record TrueVehicle(VehicleTread Tread, IReadOnlyDictionary<Position, TrueTyre> Tyres, bool Faulty);

/// <summary>A seeded fleet: linear wear, gauge noise, biased technicians, a share of vehicles out of alignment.</summary>
internal sealed class SmallFleet(int seed)
{
    public double NoiseSd { get; init; } = 0.15;
    public double TechnicianSd { get; init; } = 0.2;
    public int Surveys { get; init; } = 7;
    public int Grooves { get; init; } = 4;
    public double FaultyShare { get; init; } = 0.25;
    public double BetweenSd { get; init; } = 0.12;
    public bool StartsRecorded { get; init; } = true;
    public double WeeksBetween { get; init; } = 5;

    public static readonly DateTimeOffset First = new(2026, 1, 5, 7, 0, 0, TimeSpan.Zero);
    public static readonly DateOnly AsOf = new(2026, 12, 1);
    public static readonly Depot Yard = new() { DepotId = "north", TrafficSide = TrafficSide.Right, Jurisdiction = "DE", TimeZone = "Europe/Berlin", Currency = "EUR" };

    private readonly Random _random = new(seed);

    public double[] Biases { get; private set; } = [];

    public double Normal() => Math.Sqrt(-2 * Math.Log(1 - _random.NextDouble())) * Math.Cos(2 * Math.PI * _random.NextDouble());

    public IReadOnlyList<TrueVehicle> Make(int vehicles)
    {
        Biases = [.. Enumerable.Range(0, 4).Select(_ => TechnicianSd * Normal())];
        return [.. Enumerable.Range(0, vehicles).Select(Vehicle)];
    }

    private TrueVehicle Vehicle(int number)
    {
        var id = $"V{number:0000}";
        var kind = (number % 4) switch { 0 or 1 => VehicleClass.Van, 2 => VehicleClass.Truck, _ => VehicleClass.Trailer };
        IReadOnlyList<Axle> axles = kind switch
        {
            VehicleClass.Van => [new() { Number = 1, Steered = true }, new() { Number = 2, Driven = true }],
            VehicleClass.Truck => [new() { Number = 1, Steered = true }, new() { Number = 2, Driven = true, Duals = true }],
            _ => [new() { Number = 1 }, new() { Number = 2 }],
        };
        var weekly = kind switch { VehicleClass.Van => 900.0, VehicleClass.Truck => 2200, _ => 1900 };
        var vehicle = new Vehicle { VehicleId = id, Depot = "north", Class = kind, Axles = axles, KmPerWeek = weekly, GrossMassKg = kind == VehicleClass.Van ? 3500 : 18000 };
        var faulty = _random.NextDouble() < FaultyShare;
        var start = 20_000 + 60_000 * _random.NextDouble();
        var tyres = vehicle.Positions().ToDictionary(p => p, p => Tyre(kind, p, faulty, start, weekly));
        var surveys = Enumerable.Range(0, Surveys).Select(s => Survey(id, tyres, start, weekly, s)).ToList();
        var fittings = tyres.Select(t => new FittingRecord
        {
            VehicleId = id,
            At = First.AddDays((t.Value.StartKm - start) / weekly * 7),
            Event = FittingEvent.Fitted,
            Position = t.Key,
            NewDepthMm = t.Value.NewMm,
            TyreId = $"{id}-{t.Key}",
            DistanceKm = t.Value.StartKm,
        });
        return new TrueVehicle(new VehicleTread { Vehicle = vehicle, Depot = Yard, Surveys = surveys, Fittings = StartsRecorded ? [.. fittings] : [] }, tyres, faulty);
    }

    private TrueTyre Tyre(VehicleClass kind, Position p, bool faulty, double start, double weekly)
    {
        var (rate, depth) = (kind, p.Axle) switch { (VehicleClass.Van, 1) => (0.16, 9.0), (VehicleClass.Van, _) => (0.12, 9.0), (VehicleClass.Truck, 1) => (0.06, 15.0), (VehicleClass.Truck, _) => (0.07, 20.0), _ => (0.055, 13.0) };
        rate *= Math.Exp(BetweenSd * Normal());
        // The road falls to the right: the right tyres wear outboard for it, the left ones inboard.
        var edge = NormalEdgePerMm(p) + 0.05 * Normal();
        if (faulty && p.Axle == 1) (rate, edge) = (rate * (1.4 + 1.2 * _random.NextDouble()), edge + 0.5);
        var before = _random.NextDouble() * 0.25 * depth / rate * 1000;
        // Nobody runs a tyre to the canvas: a fast one starts deeper here.
        depth = Math.Max(depth, 3 + 1.4 * rate / 1000 * (Math.Min(before, 20 * weekly) + weekly * WeeksBetween * Surveys));
        return new TrueTyre(depth, rate, edge, 0.15 + 0.04 * Normal(), start - Math.Min(before, 20 * weekly));
    }

    private StoredSurvey Survey(string id, Dictionary<Position, TrueTyre> tyres, double start, double weekly, int s)
    {
        var weeks = s * WeeksBetween;
        var technician = _random.Next(4);
        var km = start + weeks * weekly;
        return new StoredSurvey($"{id}-S{s}", new TreadSurvey
        {
            VehicleId = id,
            At = First.AddDays(7 * weeks),
            Technician = $"tech{technician}",
            DistanceKm = km,
            DistanceSource = DistanceSource.Odometer,
            Tyres = [.. tyres.Select(t => new TyreReadings
            {
                Position = t.Key,
                Depths = [.. Enumerable.Range(1, Grooves).Select(g => new GrooveDepth(g, Math.Max(0, Math.Round(t.Value.Depth(km, g, Grooves) + Biases[technician] + NoiseSd * Normal(), 1))))],
            })],
        });
    }

    public static VehicleTread SwapSides(VehicleTread tread, int survey) => Change(tread, survey, t => t with { Position = t.Position.Mirrored });

    public static VehicleTread Change(VehicleTread tread, int survey, Func<TyreReadings, TyreReadings> change) => tread with
    {
        Surveys = [.. tread.Surveys.Select((s, i) => i == survey ? s with { Survey = s.Survey with { Tyres = [.. s.Survey.Tyres.Select(change)] } } : s)],
    };

    /// <summary>What a sound tyre's edges show per mm of wear.</summary>
    public static double NormalEdgePerMm(Position p) => 0.12 + 0.25 * NormalWear.FallSign(p, Yard.TrafficSide);

    /// <summary>The same vehicle in a mirror, in a mirrored country.</summary>
    public static VehicleTread Mirror(VehicleTread tread) => tread with
    {
        Depot = tread.Depot with { TrafficSide = tread.Depot.TrafficSide == TrafficSide.Right ? TrafficSide.Left : TrafficSide.Right },
        Surveys = [.. tread.Surveys.Select(s => s with { Survey = s.Survey with { Tyres = [.. s.Survey.Tyres.Select(t => t with { Position = t.Position.Mirrored })] } })],
        Fittings = [.. tread.Fittings.Select(f => f with { Position = f.Position.Mirrored, FromPosition = f.FromPosition?.Mirrored })],
    };
}
