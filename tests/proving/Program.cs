using System.Diagnostics;
using System.Runtime.InteropServices;
using WearWatch.Proving;
using WearWatch.Proving.Figures;
using WearWatch.Proving.Run;

if (args is [] or ["--help" or "-h", ..] || args.Contains("--help"))
{
    Console.WriteLine(Options.Usage);
    return 0;
}
Options options;
try
{
    options = Options.Read(args);
}
catch (ArgumentException wrong)
{
    Console.Error.WriteLine(wrong.Message);
    Console.Error.WriteLine(Options.Usage);
    return 2;
}
using var stop = new CancellationTokenSource();
void Stop(PosixSignalContext signal)
{
    signal.Cancel = true; // children and clusters are stopped first
    stop.Cancel();
}
using var interrupted = PosixSignalRegistration.Create(PosixSignal.SIGINT, Stop);
using var terminated = PosixSignalRegistration.Create(PosixSignal.SIGTERM, Stop);
var watch = Stopwatch.StartNew();
try
{
    var cases = await Fleets.Run(options, line => Console.Error.WriteLine(line), stop.Token);
    var report = Report.Of(options.Part, cases, watch.Elapsed);
    Console.Write(options.Json ? report.Json() : report.Table());
    return 0;
}
catch (OperationCanceledException)
{
    Console.Error.WriteLine("stopped before its end");
    return 1;
}
catch (InvalidOperationException failed)
{
    Console.Error.WriteLine(failed.Message);
    return 1;
}
