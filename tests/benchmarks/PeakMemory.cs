using System.Diagnostics;

namespace WearWatch.Benchmarks;

/// <summary>Highest working set of the process, input and runtime included, looked at every 10 ms while this lives, bytes.</summary>
internal sealed class PeakMemory : IDisposable
{
    private readonly ManualResetEventSlim _done = new();
    private readonly Thread _watcher;

    public PeakMemory()
    {
        Highest = AtStart = Now();
        _watcher = new Thread(() => { while (!_done.Wait(10)) Highest = Math.Max(Highest, Now()); }) { IsBackground = true };
        _watcher.Start();
    }

    public long AtStart { get; }
    public long Highest { get; private set; }

    public void Dispose()
    {
        _done.Set();
        _watcher.Join();
        _done.Dispose();
    }

    private static long Now()
    {
        using var process = Process.GetCurrentProcess();
        return process.WorkingSet64;
    }
}
