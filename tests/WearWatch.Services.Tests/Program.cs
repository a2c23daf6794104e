using Microsoft.AspNetCore.Builder;
using Microsoft.AspNetCore.Hosting;
using Microsoft.AspNetCore.Server.Kestrel.Core;
using Microsoft.Extensions.Logging;
using WearWatch.Ingest;
using WearWatch.Storage;

namespace WearWatch.Services.Tests;

/// <summary>Runs the ingest service alone in a process of its own: <c>serve-ingest PORT</c>, the database in WEARWATCH_DATABASE.</summary>
internal static class Program
{
    public static async Task<int> Main(string[] arguments)
    {
        if (arguments is not ["serve-ingest", var port]) return 2;
        await using var database = await Database.Open(Environment.GetEnvironmentVariable("WEARWATCH_DATABASE")!);
        var builder = WebApplication.CreateSlimBuilder();
        builder.Logging.SetMinimumLevel(LogLevel.Warning);
        builder.WebHost.ConfigureKestrel(kestrel => kestrel.ListenLocalhost(int.Parse(port), listen => listen.Protocols = HttpProtocols.Http2));
        builder.Services.AddIngest(database);
        await using var app = builder.Build();
        app.MapIngest();
        await app.RunAsync();
        return 0;
    }
}
