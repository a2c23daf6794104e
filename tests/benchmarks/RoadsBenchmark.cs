using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Benchmarks;

/// <summary>Seconds and bytes of the fleet road fit for growing fleets, beside the plain mean of each vehicle's torque.</summary>
internal static class RoadsBenchmark
{
    public static IReadOnlyDictionary<string, object> Run()
    {
        var figures = new Dictionary<string, object>();
        foreach (var (vehicles, runsEach, cells) in ((int, int, int)[])[(60, 200, 400), (300, 200, 2000)])
        {
            var (runs, fleet) = Fleet(vehicles, runsEach, cells);
            var held = GC.GetTotalAllocatedBytes();
            RoadFit? fit = null;
            var seconds = Timing.Best(1, () => fit = RoadModel.Fit(runs, fleet));
            held = (GC.GetTotalAllocatedBytes() - held) / 2;
            var plain = Timing.Best(3, () => runs.GroupBy(r => r.VehicleId).ToDictionary(g => g.Key, g => g.Average(r => r.TorqueNm!.Value.Value)));
            var at = $"{vehicles}_vehicles_{runs.Count}_runs";
            figures[$"fit_s_{at}"] = Math.Round(seconds, 3);
            figures[$"plain_means_s_{at}"] = Math.Round(plain, 4);
            figures[$"allocated_mb_{at}"] = held >> 20;
            figures[$"iterations_{at}"] = fit!.Iterations;
            figures[$"converged_{at}"] = fit.Converged;
        }
        return figures;
    }

    private static (List<StraightRun>, List<RoadVehicle>) Fleet(int vehicles, int runsEach, int cells)
    {
        var random = new Random(1);
        double Normal() => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());
        var banks = Enumerable.Range(0, cells).Select(_ => 0.02 + 0.01 * Normal()).ToArray();
        var (runs, fleet) = (new List<StraightRun>(), new List<RoadVehicle>());
        for (var v = 0; v < vehicles; v++)
        {
            fleet.Add(new($"v{v:00000}", VehicleClass.Van, TrafficSide.Right, TorqueKind.Total));
            var (pull, off, bias) = (0.5 * Normal(), 3 * Normal(), 0.02 * Normal());
            for (var k = 0; k < runsEach; k++)
            {
                var cell = random.Next(cells);
                runs.Add(new()
                {
                    VehicleId = fleet[v].VehicleId,
                    StreamId = $"{v}-{k / 20}",
                    Sequence = k,
                    Start = DateTimeOffset.UnixEpoch.AddMinutes(k),
                    Seconds = 25,
                    Mode = RunMode.Coast,
                    SpeedKmH = 85,
                    TorqueIncludesAssist = true,
                    TorqueNm = new(pull + 55 * banks[cell] + 0.15 * Normal(), 0.1),
                    AngleDeg = new(off + 18 * banks[cell] + 0.5 * Normal(), 0.3),
                    BankReading = new(1.07 * banks[cell] + bias + 0.002 * Normal(), 0.001),
                    RoadCell = $"c{cell}",
                });
            }
        }
        return (runs, fleet);
    }
}
