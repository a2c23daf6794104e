using System.Diagnostics;
using System.Text;

namespace WearWatch.Proving.Run;

/// <summary>A program of ours as a process of its own.</summary>
internal sealed class Child : IAsyncDisposable
{
    private readonly Process _process;
    private readonly StringBuilder _output = new(), _errors = new();

    private Child(Process process)
    {
        _process = process;
        process.OutputDataReceived += (_, e) => { lock (_output) if (e.Data is not null) _output.AppendLine(e.Data); };
        process.ErrorDataReceived += (_, e) => { lock (_errors) if (e.Data is not null) _errors.AppendLine(e.Data); };
        process.BeginOutputReadLine();
        process.BeginErrorReadLine();
    }

    public bool HasExited => _process.HasExited;

    /// <summary>The last lines it wrote to standard error.</summary>
    public string Errors
    {
        get { lock (_errors) return string.Join('\n', _errors.ToString().Split('\n').TakeLast(12)); }
    }

    public static Child Start(string program, string? dataFolder, params string[] arguments)
    {
        var start = new ProcessStartInfo("dotnet") { UseShellExecute = false, RedirectStandardOutput = true, RedirectStandardError = true };
        start.ArgumentList.Add(program);
        foreach (var argument in arguments) start.ArgumentList.Add(argument);
        if (dataFolder is not null) start.Environment["WEARWATCH_DATA"] = dataFolder;
        start.Environment.Remove("WEARWATCH_DATABASE");
        return new(Process.Start(start) ?? throw new InvalidOperationException($"{program} did not start"));
    }

    /// <summary>Waits for its end; what it wrote to standard output.</summary>
    /// <exception cref="InvalidOperationException">It failed; the message holds its last words.</exception>
    public async Task<string> Done(Func<int, bool> fine, CancellationToken cancel)
    {
        await _process.WaitForExitAsync(cancel);
        if (!fine(_process.ExitCode)) throw new InvalidOperationException($"'{string.Join(' ', _process.StartInfo.ArgumentList)}' ended with {_process.ExitCode}: {Errors}");
        lock (_output) return _output.ToString();
    }

    /// <summary>Asked to stop (SIGTERM), and killed where it does not within half a minute.</summary>
    public async ValueTask DisposeAsync()
    {
        if (!_process.HasExited)
        {
            using (var term = Process.Start("kill", ["-TERM", $"{_process.Id}"])) await term.WaitForExitAsync();
            using var patience = new CancellationTokenSource(TimeSpan.FromSeconds(30));
            try
            {
                await _process.WaitForExitAsync(patience.Token);
            }
            catch (OperationCanceledException)
            {
                _process.Kill(entireProcessTree: true);
                await _process.WaitForExitAsync(CancellationToken.None);
            }
        }
        _process.Dispose();
    }
}
