using System.ComponentModel;
using System.Globalization;
using Spectre.Console.Cli;
using WearWatch.Contracts.V1;

namespace WearWatch.Commands;

/// <summary>Sends a survey anew with some of its figures corrected; the first one stays on record as replaced.</summary>
internal sealed class CorrectCommand : AsyncCommand<CorrectCommand.Settings>
{
    internal sealed class Settings : FactSettings
    {
        [CommandArgument(1, "<CHANGE>")]
        [Description("2LO.2=7.1 (groove 2 of 2LO, in the survey's unit), 2LO.2= (not read), distance=123456, unit=mm or unit=1/32in.")]
        public string[] Changes { get; init; } = [];
    }

    public override Task<int> ExecuteAsync(CommandContext context, Settings settings, CancellationToken cancel) => HeldFacts.On(settings, async installation =>
    {
        var found = await HeldFacts.Find(installation, settings, cancel);
        if (found.Fact.BodyCase != Fact.BodyOneofCase.Survey)
        {
            Console.Error.WriteLine($"{settings.Id} is no survey.");
            return ExitCode.SomethingRefused;
        }
        var corrected = found.Fact.Clone();
        (corrected.Id, corrected.Replaces, corrected.RecordedBy) = (HeldFacts.NewId("corrected"), settings.Id, settings.Who);
        foreach (var change in settings.Changes)
        {
            if (Apply(corrected.Survey, change) is not { } wrong) continue;
            Console.Error.WriteLine(wrong);
            return ExitCode.Usage;
        }
        return await HeldFacts.Send(installation, corrected, $"{settings.Id} is replaced by {corrected.Id}.", cancel);
    }, cancel);

    /// <summary>Makes one change; what is wrong with it, or null.</summary>
    internal static string? Apply(TreadSurvey survey, string change)
    {
        var parts = change.Split('=', 2, StringSplitOptions.TrimEntries);
        if (parts.Length != 2) return $"'{change}' is not a change such as 2LO.2=7.1";
        if (parts[0] == "unit")
        {
            survey.DepthUnit = parts[1] switch { "mm" => DepthUnit.Mm, "1/32in" => DepthUnit.ThirtySecondsInch, _ => DepthUnit.Unspecified };
            survey.ClearResolution();
            return survey.DepthUnit == DepthUnit.Unspecified ? $"'{parts[1]}' is neither mm nor 1/32in" : null;
        }
        double? value = parts[1].Length == 0 ? null : double.TryParse(parts[1], NumberStyles.Float, CultureInfo.InvariantCulture, out var number) ? number : double.NaN;
        if (value is double.NaN) return $"'{parts[1]}' is not a number; use a point as the decimal mark";
        if (parts[0] == "distance")
        {
            if (value is { } distance) survey.Distance = distance;
            else survey.ClearDistance();
            return null;
        }
        var place = parts[0].Split('.', 2);
        var groove = 0;
        if (place.Length == 2 && !int.TryParse(place[1], NumberStyles.None, CultureInfo.InvariantCulture, out groove)) return $"'{parts[0]}' is not a place such as 2LO.2";
        var tyre = survey.Tyres.FirstOrDefault(t => t.Position == place[0]);
        var readings = tyre?.Grooves.Where(g => g.Groove == groove).ToList() ?? [];
        if (readings.Count == 0) return $"the survey has no depth at {parts[0]}; it has {string.Join(", ", survey.Tyres.SelectMany(t => t.Grooves.Select(g => $"{t.Position}.{g.Groove}")).Distinct())}";
        foreach (var reading in readings)
        {
            if (value is { } depth) reading.Depth = depth;
            else tyre!.Grooves.Remove(reading);
        }
        return null;
    }
}
