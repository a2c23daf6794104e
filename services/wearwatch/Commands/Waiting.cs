using System.Runtime.InteropServices;
using Spectre.Console;

namespace WearWatch.Commands;

/// <summary>Long work shows how far it is; waiting ends with Ctrl-C or SIGTERM.</summary>
internal static class Waiting
{
    public static async Task UntilStopped(CancellationToken cancel)
    {
        var stopped = new TaskCompletionSource();
        using var interrupt = PosixSignalRegistration.Create(PosixSignal.SIGINT, Stop);
        using var terminate = PosixSignalRegistration.Create(PosixSignal.SIGTERM, Stop);
        await using var cancelled = cancel.Register(stopped.SetResult);
        await stopped.Task;

        void Stop(PosixSignalContext context)
        {
            context.Cancel = true;
            stopped.TrySetResult();
        }
    }

    /// <summary>Shows a bar on a terminal, a line now and then elsewhere; never writes to standard output.</summary>
    public static async Task<T> Show<T>(string title, Func<Action<string, double>, Task<T>> work)
    {
        var console = AnsiConsole.Create(new AnsiConsoleSettings { Out = new AnsiConsoleOutput(Console.Error) });
        if (!console.Profile.Capabilities.Interactive)
        {
            var last = "";
            Console.Error.WriteLine($"{title} ...");
            return await work((step, share) =>
            {
                var line = $"  {step}{(share > 0 ? $" {(int)(share * 10) * 10} %" : "")}";
                if (line != Interlocked.Exchange(ref last, line)) Console.Error.WriteLine(line);
            });
        }
        return await console.Progress().AutoClear(true).StartAsync(async progress =>
        {
            var task = progress.AddTask(Markup.Escape(title), maxValue: 1);
            return await work((step, share) =>
            {
                task.Description = Markup.Escape($"{title}: {step}");
                task.Value = share;
            });
        });
    }
}
