using System.Diagnostics;
using WearWatch.Diagnosis.Changes;

namespace WearWatch.Benchmarks;

/// <summary>
/// Dating the changes of one vehicle over two years, steering pull and off-centre angle, one step each; beside it the plain optimal
/// partition of the same trips, which looks at every last change of every stretch.
/// </summary>
internal static class ChangesBenchmark
{
    private const int Days = 730;
    private const int RunsPerTrip = 4;
    private const int WarmUps = 60;

    public static IReadOnlyDictionary<string, object> Run()
    {
        var figures = new Dictionary<string, object>();
        foreach (var (name, tripsPerDay) in ((string, double)[])[("20_runs_a_week", 5 / 7.0), ("20_runs_a_day", 5)])
        {
            ChangeSeries[] vehicle = [Series(ChangeQuantity.SteeringPull, tripsPerDay, 1), Series(ChangeQuantity.OffCentreAngle, tripsPerDay, 2)];
            var found = 0;
            // A worker dates one vehicle after another: what is timed is the code it then runs, not its first compilation.
            for (var i = 0; i < WarmUps; i++) found = vehicle.Sum(s => ChangeDating.Find(s).Count);
            Thread.Sleep(500);
            var cpu = Process.GetCurrentProcess().TotalProcessorTime;
            var held = GC.GetTotalAllocatedBytes();
            const int times = 20;
            var whole = Timing.Best(times, () => found = vehicle.Sum(s => ChangeDating.Find(s).Count));
            var runs = times + 3;
            figures[$"vehicle_ms_{name}"] = Math.Round(whole * 1e3, 3);
            figures[$"vehicle_cpu_ms_{name}"] = Math.Round((Process.GetCurrentProcess().TotalProcessorTime - cpu).TotalMilliseconds / runs, 3);
            figures[$"vehicle_allocated_kb_{name}"] = (GC.GetTotalAllocatedBytes() - held) / runs >> 10;
            figures[$"runs_{name}"] = vehicle[0].Readings.Count;
            figures[$"changes_found_{name}"] = found;
            Segment(figures, name, vehicle[1]);
        }
        return figures;
    }

    /// <summary>The segmentation alone, both ways, on the means of the trips.</summary>
    private static void Segment(Dictionary<string, object> figures, string name, ChangeSeries series)
    {
        var trips = series.Readings.GroupBy(r => r.Trip).Select(g => (At: (g.Min(r => r.At) - DateTimeOffset.UnixEpoch).TotalDays, Mean: g.Average(r => r.Value))).OrderBy(t => t.At).ToArray();
        var penalty = ChangeDating.Penalty(trips.Length);
        var weight = 1 / (series.TripSd * series.TripSd + series.Readings[0].Variance / RunsPerTrip);
        SegmentCost Cost() => new([.. trips.Select(t => t.At)], [.. trips.Select(t => t.Mean)], [.. trips.Select(_ => weight)], penalty, 6);
        Segmentation? fast = null, plain = null;
        figures[$"pelt_ms_{name}"] = Math.Round(Timing.Best(10, () => fast = Segmentation.Pelt(Cost(), penalty, 2)) * 1e3, 3);
        figures[$"optimal_partition_ms_{name}"] = Math.Round(Timing.Best(5, () => plain = Segmentation.OptimalPartition(Cost(), penalty, 2)) * 1e3, 3);
        figures[$"trips_{name}"] = trips.Length;
        figures[$"pelt_evaluations_{name}"] = fast!.Evaluations;
        figures[$"optimal_partition_evaluations_{name}"] = plain!.Evaluations;
        figures[$"same_segments_{name}"] = fast.Segments.SequenceEqual(plain.Segments);
    }

    private static ChangeSeries Series(ChangeQuantity quantity, double tripsPerDay, int seed)
    {
        var random = new Random(seed);
        double Normal() => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());
        var start = new DateTimeOffset(2024, 1, 1, 6, 0, 0, TimeSpan.Zero);
        var readings = new List<ChangeReading>();
        for (var t = 0; t < Days * tripsPerDay; t++)
        {
            var at = start.AddDays(Math.Floor(t / tripsPerDay)).AddHours(3 * (t % Math.Max(1, tripsPerDay)));
            var trip = 0.3 * Normal() + ((at - start).TotalDays > 400 ? 2 : 0);
            for (var r = 0; r < RunsPerTrip; r++) readings.Add(new(at.AddMinutes(5 * r), $"t{t}", trip + 0.3 * Normal(), 0.09, $"t{t}/{r}"));
        }
        return new() { Quantity = quantity, Readings = readings, TripSd = 0.3 };
    }
}
