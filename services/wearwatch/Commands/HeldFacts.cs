using System.ComponentModel;
using Google.Protobuf.WellKnownTypes;
using Grpc.Core;
using Spectre.Console.Cli;
using WearWatch.Contracts.V1;
using WearWatch.Import;
using WearWatch.Output;

namespace WearWatch.Commands;

/// <summary>A fact named on the command line.</summary>
internal class FactSettings : CommandSettings
{
    [CommandArgument(0, "<ID>")]
    [Description("The fact's id, as 'held' lists it.")]
    public string Id { get; init; } = "";

    [CommandOption("--depot <DEPOT>")]
    [Description("Depot that sent it; needed only where several depots have a fact of that id.")]
    public string Depot { get; init; } = "";

    [CommandOption("--who <NAME>")]
    [Description("Who says so; any short name.")]
    public string Who { get; init; } = "";

    [CommandOption("--reason <TEXT>")]
    [Description("Why; kept with it.")]
    public string Reason { get; init; } = "";
}

/// <summary>Sends one fact about an earlier one and says what became of it.</summary>
internal static class HeldFacts
{
    public static Task<GetFactResponse> Find(Installation installation, FactSettings settings, CancellationToken cancel) =>
        installation.Ingest.GetFactAsync(new GetFactRequest { Id = settings.Id, DepotId = settings.Depot }, deadline: DateTime.UtcNow.AddMinutes(1), cancellationToken: cancel).ResponseAsync;

    /// <summary>A fresh id, such as <c>answer-20261201-074000-3f2a</c>.</summary>
    public static string NewId(string word) => $"{word}-{DateTime.UtcNow:yyyyMMdd-HHmmss}-{Guid.NewGuid():N}"[..Math.Min(64, word.Length + 21)];

    public static async Task<int> Send(Installation installation, Fact fact, string done, CancellationToken cancel)
    {
        var request = new RecordFactsRequest { Facts = { fact } };
        var answer = (await installation.Ingest.RecordFactsAsync(request, deadline: DateTime.UtcNow.AddMinutes(1), cancellationToken: cancel)).Answers[0];
        Console.WriteLine(answer.Outcome switch
        {
            Outcome.Stored => done,
            Outcome.Held => $"Taken in as {answer.Id}, but held in its turn:",
            _ => "Refused:",
        });
        Questions.Write(Console.Out, answer.Id, answer.Remarks);
        if (answer.Outcome == Outcome.Refused) return ExitCode.SomethingRefused;
        // Services that run apart from this command analyse by themselves.
        if (installation.Hosting) await Waiting.Show("Analysing", async progress => { await installation.Analysed(progress, cancel); return true; });
        return ExitCode.Done;
    }

    public static Fact Withdrawal(WithdrawalKind kind, FactSettings settings, string depot) => new()
    {
        Id = NewId(EnumWords.Word(kind)),
        DepotId = depot,
        RecordedBy = settings.Who,
        Withdrawal = new() { Kind = kind, FactId = settings.Id, At = Timestamp.FromDateTime(DateTime.UtcNow), Reason = settings.Reason },
    };

    /// <summary>Runs a command on one fact; an id that is not there ends with its reason and not with a failure.</summary>
    public static async Task<int> On(FactSettings settings, Func<Installation, Task<int>> run, CancellationToken cancel)
    {
        await using var installation = await Installation.Reach(cancel);
        try
        {
            return await run(installation);
        }
        catch (RpcException missing) when (missing.StatusCode is StatusCode.NotFound or StatusCode.InvalidArgument)
        {
            Console.Error.WriteLine(missing.Status.Detail);
            return ExitCode.SomethingRefused;
        }
    }
}

/// <summary>Lets a held survey through as it is.</summary>
internal sealed class ReleaseCommand : AsyncCommand<FactSettings>
{
    public override Task<int> ExecuteAsync(CommandContext context, FactSettings settings, CancellationToken cancel) => HeldFacts.On(settings, async installation =>
    {
        var found = await HeldFacts.Find(installation, settings, cancel);
        return await HeldFacts.Send(installation, HeldFacts.Withdrawal(WithdrawalKind.Release, settings, found.Fact.DepotId), $"{settings.Id} is let through as it is.", cancel);
    }, cancel);
}

/// <summary>Takes a fact back; it stays on record. What was refused is laid to rest.</summary>
internal sealed class RetractCommand : AsyncCommand<FactSettings>
{
    public override Task<int> ExecuteAsync(CommandContext context, FactSettings settings, CancellationToken cancel) => HeldFacts.On(settings, async installation =>
    {
        var depot = settings.Depot;
        if (depot.Length == 0)
        {
            var refused = (await HeldCommand.Pages(installation, "", Outcome.Refused, cancel)).FirstOrDefault(s => s.Id == settings.Id);
            depot = refused?.DepotId ?? (await HeldFacts.Find(installation, settings, cancel)).Fact.DepotId;
        }
        return await HeldFacts.Send(installation, HeldFacts.Withdrawal(WithdrawalKind.Retract, settings, depot), $"{settings.Id} is taken back; it stays on record.", cancel);
    }, cancel);
}
