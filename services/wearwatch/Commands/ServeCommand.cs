using System.ComponentModel;
using Spectre.Console;
using Spectre.Console.Cli;

namespace WearWatch.Commands;

/// <summary>Runs the services until stopped.</summary>
internal sealed class ServeCommand : AsyncCommand<ServeCommand.Settings>
{
    internal sealed class Settings : CommandSettings
    {
        [CommandOption("--port <PORT>")]
        [Description("Loopback port to listen on (default 7420).")]
        [DefaultValue(7420)]
        public int Port { get; init; }

        [CommandOption("--only <SERVICES>")]
        [Description("Host only some services: ingest, analysis, report, separated by commas. Several processes may share one database.")]
        public string Only { get; init; } = "";

        [CommandOption("--database <CONNECTION>")]
        [Description("PostgreSQL connection string. Without it WearWatch runs its own cluster in its data folder.")]
        public string? Database { get; init; }

        [CommandOption("--verbose")]
        [Description("Log more than warnings.")]
        public bool Verbose { get; init; }

        public string[] Services => Only.Split(',', StringSplitOptions.RemoveEmptyEntries | StringSplitOptions.TrimEntries);

        public override ValidationResult Validate() =>
            Services.FirstOrDefault(s => !ServiceHost.Services.Contains(s)) is { } unknown
                ? ValidationResult.Error($"--only: '{unknown}' is not one of {string.Join(", ", ServiceHost.Services)}")
                : Port is < 0 or > 65535 ? ValidationResult.Error("--port must lie in 0 to 65535") : ValidationResult.Success();
    }

    public override async Task<int> ExecuteAsync(CommandContext context, Settings settings, CancellationToken cancel)
    {
        var options = new HostOptions { Port = settings.Port, Only = settings.Services, Database = settings.Database, Verbose = settings.Verbose };
        await using var installation = await Installation.Start(Path.Combine(Installation.DataFolder, "fleet"), options, cancel);
        // One that hosts only some of the services is not what the other commands are looking for.
        using var announced = settings.Services.Length == 0 ? installation.Announce() : null;
        Console.WriteLine($"WearWatch listens on {installation.Address} ({(settings.Services.Length == 0 ? "ingest, analysis, report" : settings.Only)}; gRPC, health, reflection). Ctrl-C stops it.");
        await Waiting.UntilStopped(cancel);
        return ExitCode.Done;
    }
}
