using Grpc.Core;
using Spectre.Console.Cli;
using WearWatch.Commands;

var app = new CommandApp();
app.Configure(config =>
{
    config.SetApplicationName("wearwatch");
    config.AddCommand<DemoCommand>("demo").WithDescription("An invented fleet, imported through gRPC, analysed and listed; stays up for queries.").WithExample("demo", "--once").WithExample("demo", "--once", "--json", "--seed", "3");
    config.AddCommand<ServeCommand>("serve").WithDescription("Run the services until stopped.").WithExample("serve").WithExample("serve", "--only", "ingest", "--port", "7421");
    config.AddCommand<ImportCommand>("import").WithDescription("Send a folder of plain files through the gRPC door and analyse it; can be run again.").WithExample("import", "my-fleet");
    config.AddCommand<WorklistCommand>("worklist").WithDescription("The vehicles that need alignment, and why.").WithExample("worklist", "--depot", "north").WithExample("worklist", "--csv");
    config.AddCommand<VehicleCommand>("vehicle").WithDescription("Everything on one vehicle, with the evidence.").WithExample("vehicle", "V017", "--json");
    config.AddCommand<StatusCommand>("status").WithDescription("Where the services are and how far they have come.").WithExample("status", "--json");
    config.SetExceptionHandler((problem, _) =>
    {
        Console.Error.WriteLine(problem is RpcException refused ? $"{refused.StatusCode}: {refused.Status.Detail}" : problem.Message);
        if (Environment.GetEnvironmentVariable("WEARWATCH_TRACE") is not null) Console.Error.WriteLine(problem);
        return problem is CommandParseException or CommandRuntimeException ? ExitCode.Usage : ExitCode.Failed;
    });
});
return await app.RunAsync(args);
