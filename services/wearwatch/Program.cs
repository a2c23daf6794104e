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
    config.AddCommand<VehicleCommand>("vehicle").WithDescription("Everything on one vehicle, with the evidence.").WithExample("vehicle", "V017", "--json").WithExample("vehicle", "V017", "--as-of", "2026-10-15");
    config.AddCommand<ReadersCommand>("readers").WithDescription("Bias and repeatability of technicians' hands and of gauges over the fleet.").WithExample("readers", "--json");
    config.AddCommand<HeldCommand>("held").WithDescription("Surveys that wait for an answer, with their questions; or what was refused and why.").WithExample("held").WithExample("held", "--refused");
    config.AddCommand<AnswerCommand>("answer").WithDescription("Answer what a survey was asked, by number or in words.").WithExample("answer", "S0123", "1").WithExample("answer", "S0123", "tyre_changed", "1L");
    config.AddCommand<CorrectCommand>("correct").WithDescription("Send a survey anew with figures corrected.").WithExample("correct", "S0123", "2LO.2=7.1");
    config.AddCommand<ReleaseCommand>("release").WithDescription("Let a held survey through as it is.").WithExample("release", "S0123", "--who", "MK");
    config.AddCommand<RetractCommand>("retract").WithDescription("Take a fact back; it stays on record.").WithExample("retract", "S0123", "--reason", "wrong vehicle");
    config.AddCommand<StatusCommand>("status").WithDescription("Where the services are and how far they have come.").WithExample("status", "--json");
    config.SetExceptionHandler((problem, _) =>
    {
        Console.Error.WriteLine(problem is RpcException refused ? $"{refused.StatusCode}: {refused.Status.Detail}" : problem.Message);
        if (Environment.GetEnvironmentVariable("WEARWATCH_TRACE") is not null) Console.Error.WriteLine(problem);
        return problem is CommandParseException or CommandRuntimeException ? ExitCode.Usage : ExitCode.Failed;
    });
});
return await app.RunAsync(args);
