using System.Diagnostics;
using WearWatch.Diagnosis.Roads;

namespace WearWatch.Benchmarks;

/// <summary>
/// The fleet road fit at full size and at a quarter of it, a day's warm update beside the full solve, and the plain least-squares core
/// beside alternating projections written with array operations, both on the same values.
/// </summary>
internal static class RoadsBenchmark
{
    private const int Vehicles = 20_000, RunsEach = 100, Cells = 200_000;
    private const ulong HeapLimitMb = 480;
    private const int TouchedByDay = 500; // vehicles with new runs in the warm update, 20 runs each

    public static IReadOnlyDictionary<string, object> Run()
    {
        var figures = new Dictionary<string, object>();
        Fit(2_000, 20_000, [], "warm_up"); // compiles what the timings use
        var full = Fit(Vehicles, Cells, figures, "full");
        Fit(Vehicles / 4, Cells / 4, figures, "quarter");
        figures["full_over_quarter_s"] = Math.Round((double)figures["fit_s_full"] / (double)figures["fit_s_quarter"], 2);
        Update(full, figures);
        Core(figures);
        return figures;
    }

    private static (RoadsFleet Fleet, RoadFit Fit) Fit(int vehicles, int cells, Dictionary<string, object> figures, string at)
    {
        var fleet = new RoadsFleet(vehicles, RunsEach, cells);
        Limit(HeapLimitMb);
        var process = Process.GetCurrentProcess();
        using var peak = new PeakMemory();
        var (cpu, started) = (process.TotalProcessorTime, Stopwatch.GetTimestamp());
        var fit = RoadModel.Fit(fleet.Runs, fleet.Vehicles);
        var seconds = Stopwatch.GetElapsedTime(started).TotalSeconds;
        process.Refresh();
        Limit(0);
        figures[$"runs_{at}"] = fleet.Runs.Count;
        figures[$"observations_{at}"] = 3 * fleet.Runs.Count;
        figures[$"vehicles_{at}"] = fit.Vehicles.Count;
        figures[$"cells_{at}"] = fit.Cells.Count;
        figures[$"fit_s_{at}"] = Math.Round(seconds, 2);
        figures[$"fit_cpu_s_{at}"] = Math.Round((process.TotalProcessorTime - cpu).TotalSeconds, 2);
        figures[$"peak_mb_{at}"] = peak.Highest >> 20;
        figures[$"of_that_before_the_fit_mb_{at}"] = peak.AtStart >> 20;
        figures[$"heap_limit_mb_{at}"] = HeapLimitMb;
        figures[$"iterations_{at}"] = fit.Iterations;
        figures[$"converged_{at}"] = fit.Converged;
        figures[$"vehicles_with_errors_{at}"] = fit.Vehicles.Count(v => v.SteeringPullNm is { StandardError: > 0 } && v.OffCentreDeg is { StandardError: > 0 });
        figures[$"pull_coverage_90_{at}"] = Math.Round(fit.Vehicles.Where(v => v.SteeringPullNm is not null)
            .Average(v => v.SteeringPullNm!.Value.Low <= fleet.Pull[v.VehicleId] && fleet.Pull[v.VehicleId] <= v.SteeringPullNm.Value.High ? 1.0 : 0), 3);
        return (fleet, fit);
    }

    /// <summary>Holds the heap to a limit, as a container's does, lest the collector take what memory there is; 0 lifts it.</summary>
    private static void Limit(ulong mb)
    {
        GC.Collect(2, GCCollectionMode.Aggressive, blocking: true, compacting: true);
        AppContext.SetData("GCHeapHardLimit", mb << 20);
        GC.RefreshMemoryLimit();
    }

    private static void Update((RoadsFleet Fleet, RoadFit Fit) full, Dictionary<string, object> figures)
    {
        var day = full.Fleet.Day(TouchedByDay, 20);
        RoadFit? updated = null;
        var seconds = Timing.Best(2, () => updated = RoadModel.Update(full.Fit, day, full.Fleet.Vehicles));
        figures["update_runs"] = day.Count;
        figures["update_s"] = Math.Round(seconds, 3);
        figures["update_over_full_solve"] = Math.Round(seconds / (double)figures["fit_s_full"], 3);
        figures["update_provisional"] = updated!.Provisional;
    }

    private static void Core(Dictionary<string, object> figures)
    {
        var (row, column, values) = RoadsFleet.Plain(Vehicles, RunsEach, Cells);
        TwoWayEffects? core = null;
        figures["core_s"] = Math.Round(Timing.Best(2, () => core = TwoWayEffects.Fit(row, column, values, 1e-6)), 3);
        var goal = core!.ResidualSquares * (1 + 1e-10);
        var (sweeps, squares) = (0, 0.0);
        figures["alternating_projections_s"] = Math.Round(Timing.Best(2, () => (sweeps, squares) = AlternatingProjections.Fit(row, column, values, goal)), 3);
        figures["core_residual_squares"] = core.ResidualSquares;
        figures["alternating_projections_residual_squares"] = squares;
        figures["alternating_projections_sweeps"] = sweeps;
    }
}
