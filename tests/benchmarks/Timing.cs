using System.Diagnostics;

namespace WearWatch.Benchmarks;

internal static class Timing
{
    /// <summary>Median seconds of several runs after one that warms up.</summary>
    public static double Median(int times, Action action)
    {
        action();
        var seconds = new double[times];
        for (var i = 0; i < times; i++)
        {
            var started = Stopwatch.GetTimestamp();
            action();
            seconds[i] = Stopwatch.GetElapsedTime(started).TotalSeconds;
        }
        return seconds.Order().ElementAt(times / 2);
    }
}
