using System.Diagnostics;
using WearWatch.Import;

namespace WearWatch.Services.Tests.Pipeline;

/// <summary>An invented fleet of the simulator's, imported through gRPC into a database of its own and analysed.</summary>
public sealed class SmallFleet : IAsyncLifetime
{
    private readonly PostgresFixture _postgres = new();

    internal Installation Installation { get; private set; } = null!;

    internal string Database { get; private set; } = "";

    public string Folder { get; } = Path.Combine(Path.GetTempPath(), $"wearwatch-fleet-{Guid.NewGuid():N}");

    internal List<FileOutcome> FirstImport { get; private set; } = [];

    public async Task InitializeAsync()
    {
        Directory.CreateDirectory(Folder);
        await Simulate();
        await _postgres.InitializeAsync();
        Database = await _postgres.NewDatabase();
        Installation = await Installation.Start(Folder, new HostOptions { Database = Database }, CancellationToken.None);
        FirstImport = await ImportFolder.Run(Path.Combine(Folder, "folder"), Installation.Ingest, (_, _) => { }, CancellationToken.None);
        await Installation.Analysed((_, _) => { }, CancellationToken.None);
    }

    public async Task DisposeAsync()
    {
        await Installation.DisposeAsync();
        await _postgres.DisposeAsync();
        Directory.Delete(Folder, recursive: true);
    }

    private async Task Simulate()
    {
        string[] arguments = ["exec", Path.Combine(AppContext.BaseDirectory, "simulator.dll"), "--out", Path.Combine(Folder, "folder"), "--truth", Path.Combine(Folder, "truth.json"), "--seed", "11", "--vehicles", "20", "--weeks", "16", "--max-samples", "400000"];
        using var simulator = Process.Start(new ProcessStartInfo("dotnet", arguments) { RedirectStandardOutput = true })!;
        await simulator.StandardOutput.ReadToEndAsync();
        await simulator.WaitForExitAsync();
        Assert.Equal(0, simulator.ExitCode);
    }
}
