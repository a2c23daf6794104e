using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Benchmarks;

/// <summary>A seeded fleet of three-axle trucks for the wear benchmark: ten tyres each, biased technicians, swapped sides, a wrong unit now and then.</summary>
internal static class WearFleet
{
    private static readonly DateTimeOffset s_first = new(2025, 1, 6, 7, 0, 0, TimeSpan.Zero);
    private static readonly Depot s_yard = new() { DepotId = "north", TrafficSide = TrafficSide.Right, Jurisdiction = "DE", TimeZone = "Europe/Berlin", Currency = "EUR" };

    public static readonly DateOnly AsOf = new(2027, 1, 4);

    public static List<VehicleTread> Make(int vehicles, int surveys, int grooves)
    {
        var random = new Random(7);
        double Normal() => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());
        var biases = Enumerable.Range(0, 40).Select(_ => 0.2 * Normal()).ToArray();
        var names = Enumerable.Range(0, 40).Select(t => $"tech{t:00}").ToArray();
        var gauges = Enumerable.Range(0, 12).Select(g => $"gauge{g:00}").ToArray();
        List<Axle> axles = [new() { Number = 1, Steered = true }, new() { Number = 2, Driven = true, Duals = true }, new() { Number = 3, Driven = true, Duals = true }];
        var fleet = new List<VehicleTread>(vehicles);
        for (var v = 0; v < vehicles; v++)
        {
            var vehicle = new Vehicle { VehicleId = $"B{v:000000}", Depot = "north", Class = VehicleClass.Truck, GrossMassKg = 26000, Axles = axles };
            var positions = vehicle.Positions().ToArray();
            var driver = 0.15 * Normal();
            var rates = positions.Select(p => (p.Axle == 1 ? 0.05 : 0.045) * Math.Exp(driver + 0.12 * Normal())).ToArray();
            var depths = positions.Select(p => (p.Axle == 1 ? 14.5 : 17) - 1.5 * random.NextDouble()).ToArray();
            var edges = positions.Select(_ => 0.12 + 0.1 * Normal()).ToArray();
            var list = new List<StoredSurvey>(surveys);
            for (var s = 0; s < surveys; s++)
            {
                var km = 1900.0 * 5 * s * 20 / surveys + 300 * random.NextDouble();
                var (technician, wrong) = (random.Next(biases.Length), random.NextDouble());
                var tyres = new TyreReadings[positions.Length];
                for (var p = 0; p < tyres.Length; p++)
                {
                    var read = wrong < 0.01 ? Array.IndexOf(positions, positions[p].Mirrored) : p;
                    var unit = wrong > 0.997 ? 1 / 0.79375 : 1;
                    var loss = rates[read] * km / 1000;
                    var at = new GrooveDepth[grooves];
                    for (var g = 0; g < grooves; g++)
                    {
                        var u = grooves == 1 ? 0 : 1 - 2.0 * g / (grooves - 1);
                        var depth = depths[read] - loss * (1 + edges[read] / 2 * u) + biases[technician] + 0.15 * Normal();
                        at[g] = new(grooves == 1 ? 0 : g + 1, Math.Max(0, Math.Round(depth * unit, 1)));
                    }
                    tyres[p] = new() { Position = positions[p], Depths = at };
                }
                list.Add(new($"{vehicle.VehicleId}-{s:00}", new()
                {
                    VehicleId = vehicle.VehicleId,
                    At = s_first.AddDays(7 * 5 * s * 20.0 / surveys),
                    Technician = names[technician],
                    Gauge = gauges[technician % gauges.Length],
                    DistanceKm = 100_000 + km,
                    DistanceSource = DistanceSource.Odometer,
                    Tyres = tyres,
                }));
            }
            fleet.Add(new() { Vehicle = vehicle, Depot = s_yard, Surveys = list });
        }
        return fleet;
    }
}
