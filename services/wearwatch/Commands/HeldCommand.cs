using System.ComponentModel;
using System.Text.Json.Nodes;
using Spectre.Console.Cli;
using WearWatch.Contracts.V1;
using WearWatch.Import;
using WearWatch.Output;

namespace WearWatch.Commands;

/// <summary>What waits for someone to look at it: held surveys with their questions, or what was refused with its reason.</summary>
internal sealed class HeldCommand : AsyncCommand<HeldCommand.Settings>
{
    internal sealed class Settings : OutputSettings
    {
        [CommandOption("--depot <DEPOT>")]
        [Description("Only this depot.")]
        public string Depot { get; init; } = "";

        [CommandOption("--refused")]
        [Description("What was refused instead, rows that could not be read among it.")]
        public bool Refused { get; init; }

        [CommandOption("--all")]
        [Description("Every item, not only the newest twenty.")]
        public bool All { get; init; }
    }

    public override async Task<int> ExecuteAsync(CommandContext context, Settings settings, CancellationToken cancel)
    {
        await using var installation = await Installation.Reach(cancel);
        var items = await Pages(installation, settings.Depot, settings.Refused ? Outcome.Refused : Outcome.Held, cancel);
        if (settings.Json)
        {
            Console.WriteLine(Json.Text(new JsonObject { ["items"] = new JsonArray([.. items.Select(Item)]) }));
            return ExitCode.Done;
        }
        var shown = settings.All ? items : [.. items.Take(20)];
        foreach (var item in shown)
        {
            Console.WriteLine($"{item.Id}  {item.Kind.Replace('_', ' ')}{(item.VehicleId.Length > 0 ? $" of {item.VehicleId}" : "")}, {item.DepotId}, received {item.ReceivedAt.ToDateTimeOffset():yyyy-MM-dd HH:mm}");
            Questions.Write(Console.Out, item.Id, item.Remarks);
        }
        if (items.Count > shown.Count) Console.WriteLine($"... and {items.Count - shown.Count} more: wearwatch held{(settings.Refused ? " --refused" : "")} --all");
        Console.WriteLine(items.Count == 0 ? $"Nothing is {(settings.Refused ? "refused" : "held")}."
            : settings.Refused ? "Correct and send again under the same id, or lay to rest with: wearwatch retract ID"
            : "wearwatch answer ID NUMBER   wearwatch correct ID 2LO.2=7.1   wearwatch release ID   wearwatch retract ID");
        return ExitCode.Done;
    }

    internal static async Task<List<SetAside>> Pages(Installation installation, string depot, Outcome outcome, CancellationToken cancel)
    {
        List<SetAside> items = [];
        var token = "";
        do
        {
            var page = await installation.Ingest.ListSetAsideAsync(new ListSetAsideRequest { DepotId = depot, Outcome = outcome, PageSize = 500, PageToken = token }, deadline: DateTime.UtcNow.AddMinutes(1), cancellationToken: cancel);
            items.AddRange(page.Items);
            token = page.NextPageToken;
        }
        while (token.Length > 0);
        return items;
    }

    private static JsonObject Item(SetAside item) => new()
    {
        ["id"] = item.Id,
        ["depot"] = item.DepotId,
        ["vehicle_id"] = item.VehicleId.Length > 0 ? item.VehicleId : null,
        ["kind"] = item.Kind,
        ["outcome"] = EnumWords.Word(item.Outcome),
        ["received_at"] = item.ReceivedAt.ToDateTimeOffset().ToString("yyyy-MM-ddTHH:mm:ssZ"),
        ["remarks"] = new JsonArray([.. item.Remarks.Select(r => new JsonObject
        {
            ["code"] = r.Code,
            ["field"] = r.Field,
            ["message"] = r.Message,
            ["safety"] = r.Safety,
            ["choices"] = new JsonArray([.. r.Choices.Select(c => new JsonObject { ["answer"] = c.Answer, ["words"] = c.Words, ["probability"] = Math.Round(c.Probability, 3) })]),
        })]),
        ["content"] = JsonNode.Parse(item.ContentJson),
    };
}
