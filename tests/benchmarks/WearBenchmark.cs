using System.Diagnostics;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Benchmarks;

/// <summary>
/// Seconds and bytes of the whole fleet wear fit (<see cref="FleetWear.Fit"/>: histories read, every survey explained, robust lines
/// with intervals, readers' biases, pooled rates) at full and quarter size, beside a plain least-squares line per tyre through the
/// same depths; then one new survey taken in by its vehicle against the fleet fit as it stands.
/// </summary>
internal static class WearBenchmark
{
    private const int Fittings = 100_000, TyresEach = 10;

    public static IReadOnlyDictionary<string, object> Run()
    {
        var figures = new Dictionary<string, object> { ["cores"] = Environment.ProcessorCount };
        // Twenty depths a fitting: as twenty walks with one depth a tyre, and as five walks that take four grooves.
        foreach (var (surveys, grooves) in ((int, int)[])[(20, 1), (5, 4)])
            foreach (var share in (int[])[4, 1]) One(Fittings / share, surveys, grooves, figures);
        return figures;
    }

    private static void One(int fittings, int surveys, int grooves, Dictionary<string, object> figures)
    {
        var fleet = WearFleet.Make(fittings / TyresEach, surveys, grooves);
        var at = $"{fittings}_fittings_{surveys}x{grooves}";
        var asOf = WearFleet.AsOf;
        WarmUp(fleet);
        GC.Collect();
        var held = GC.GetTotalMemory(true);
        var allocated = GC.GetTotalAllocatedBytes();
        var cpu = Process.GetCurrentProcess().TotalProcessorTime;
        var started = Stopwatch.GetTimestamp();
        var wear = FleetWear.Fit(fleet, asOf);
        figures[$"fit_s_{at}"] = Math.Round(Stopwatch.GetElapsedTime(started).TotalSeconds, 3);
        using var process = Process.GetCurrentProcess();
        figures[$"fit_cpu_s_{at}"] = Math.Round((process.TotalProcessorTime - cpu).TotalSeconds, 2);
        figures[$"facts_mb_{at}"] = held >> 20;
        figures[$"allocated_mb_{at}"] = (GC.GetTotalAllocatedBytes() - allocated) >> 20;
        figures[$"peak_process_mb_{at}"] = process.PeakWorkingSet64 >> 20;
        figures[$"fittings_with_rate_{at}"] = wear.FittingsWithRate;
        figures[$"least_squares_s_{at}"] = Math.Round(Timing.Best(1, () => Plain(fleet)), 3);
        figures[$"one_vehicle_ms_{at}"] = Math.Round(1000 * Timing.Best(20, () => VehicleWear.Estimate(fleet[fleet.Count / 2], wear, asOf)), 3);
    }

    /// <summary>A service that fits fleets has long been compiled: small fits, with pauses in which the compiler can catch up, bring it there.</summary>
    private static void WarmUp(List<VehicleTread> fleet)
    {
        for (var i = 0; i < 8; i++)
        {
            FleetWear.Fit([.. fleet.Take(300)], WearFleet.AsOf);
            Thread.Sleep(250);
        }
    }

    /// <summary>The obvious alternative: a least-squares line of the mean depth against distance, tyre by tyre, on one core.</summary>
    private static double Plain(IReadOnlyList<VehicleTread> fleet)
    {
        double sum = 0;
        foreach (var vehicle in fleet)
            for (var p = 0; p < TyresEach; p++)
            {
                var km = new double[vehicle.Surveys.Count];
                var depth = new double[vehicle.Surveys.Count];
                for (var s = 0; s < km.Length; s++)
                {
                    km[s] = vehicle.Surveys[s].Survey.DistanceKm!.Value;
                    var depths = vehicle.Surveys[s].Survey.Tyres[p].Depths;
                    foreach (var d in depths) depth[s] += d.DepthMm / depths.Count;
                }
                sum += Line.Fit(km, depth).Slope;
            }
        return sum;
    }
}
