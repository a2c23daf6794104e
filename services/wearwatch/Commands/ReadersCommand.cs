using Grpc.Core;
using Spectre.Console;
using Spectre.Console.Cli;
using WearWatch.Output;

namespace WearWatch.Commands;

/// <summary>The study of hands and gauges.</summary>
internal sealed class ReadersCommand : AsyncCommand<OutputSettings>
{
    public override async Task<int> ExecuteAsync(CommandContext context, OutputSettings settings, CancellationToken cancel)
    {
        await using var installation = await Installation.Reach(cancel);
        try
        {
            var study = await installation.Analysis.GetReaderStudyAsync(new(), deadline: DateTime.UtcNow.AddMinutes(1), cancellationToken: cancel);
            if (settings.Json) Console.WriteLine(Json.Text(ReaderStudyOutput.Json(study)));
            else ReaderStudyOutput.Screen(AnsiConsole.Console, study);
            return ExitCode.Done;
        }
        catch (RpcException missing) when (missing.StatusCode == StatusCode.NotFound)
        {
            Console.Error.WriteLine(missing.Status.Detail);
            return ExitCode.SomethingRefused;
        }
    }
}
