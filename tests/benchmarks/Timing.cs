using System.Diagnostics;

namespace WearWatch.Benchmarks;

internal static class Timing
{
    /// <summary>Least seconds of several runs after those that warm up: on a shared machine the others measure the neighbours.</summary>
    public static double Best(int times, Action action)
    {
        for (var i = 0; i < Math.Min(times, 3); i++) action();
        var seconds = new double[times];
        for (var i = 0; i < times; i++)
        {
            var started = Stopwatch.GetTimestamp();
            action();
            seconds[i] = Stopwatch.GetElapsedTime(started).TotalSeconds;
        }
        return seconds.Min();
    }
}
