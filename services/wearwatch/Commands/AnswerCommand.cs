using System.ComponentModel;
using System.Globalization;
using Google.Protobuf.WellKnownTypes;
using Spectre.Console.Cli;
using WearWatch.Contracts.V1;
using WearWatch.Output;

namespace WearWatch.Commands;

/// <summary>Answers the questions that a survey raised.</summary>
internal sealed class AnswerCommand : AsyncCommand<AnswerCommand.Settings>
{
    internal sealed class Settings : FactSettings
    {
        [CommandArgument(1, "<ANSWER>")]
        [Description("Number of an answer as 'held' lists it, one a question; or its words, such as tyre_changed 1L.")]
        public string[] Answers { get; init; } = [];
    }

    public override Task<int> ExecuteAsync(CommandContext context, Settings settings, CancellationToken cancel) => HeldFacts.On(settings, async installation =>
    {
        var found = await HeldFacts.Find(installation, settings, cancel);
        if (found.Fact.BodyCase != Fact.BodyOneofCase.Survey)
        {
            Console.Error.WriteLine($"{settings.Id} is no survey; only surveys raise questions.");
            return ExitCode.SomethingRefused;
        }
        var choices = Questions.Numbered(found.Remarks);
        List<string> answers = [];
        List<string> words = [];
        foreach (var answer in settings.Answers)
        {
            if (!int.TryParse(answer, NumberStyles.None, CultureInfo.InvariantCulture, out var number)) words.Add(answer);
            else if (words.Count > 0) words.Add(answer); // a groove or an axle of the words before it
            else if (number >= 1 && number <= choices.Count) answers.Add(choices[number - 1].Answer);
            else
            {
                Console.Error.WriteLine(choices.Count == 0 ? $"{settings.Id} raised no question." : $"there is no answer {number}; {settings.Id} has 1 to {choices.Count}");
                return ExitCode.Usage;
            }
        }
        if (words.Count > 0) answers.Add(string.Join(' ', words));
        var decision = new Decision { Kind = DecisionKind.Answered, VehicleId = found.Fact.Survey.VehicleId, About = settings.Id, At = Timestamp.FromDateTime(DateTime.UtcNow), Answer = string.Join("; ", answers), Who = settings.Who };
        return await HeldFacts.Send(installation, new Fact { Id = HeldFacts.NewId("answer"), DepotId = found.Fact.DepotId, RecordedBy = settings.Who, Decision = decision }, $"Recorded: {decision.Answer}.", cancel);
    }, cancel);
}
