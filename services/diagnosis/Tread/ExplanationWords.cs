using System.Globalization;

namespace WearWatch.Diagnosis.Tread;

/// <summary>Explanations in the words of someone who stands at the vehicle: short ones for the end of a question, a sentence for each answer.</summary>
internal static class ExplanationWords
{
    /// <summary>The end of a question: 'typed wrong, or a new tyre?'.</summary>
    public static string Ask(IEnumerable<WeighedExplanation> choices)
    {
        var words = choices.Select(c => Short(c.Explanation)).Where(w => w.Length > 0).Distinct().Take(3).ToList();
        return words.Count == 0 ? "please look again." : $"{string.Join(", ", words.SkipLast(1))}{(words.Count > 1 ? ", or " : "")}{words[^1]}?";
    }

    private static string Short(Explanation e) => (e.Kind, e.Moved) switch
    {
        (ExplanationKind.SidesSwapped, false) => "left and right exchanged on paper",
        (ExplanationKind.AxleSidesSwapped, false) => $"left and right of axle {e.Axle} exchanged on paper",
        (ExplanationKind.AxlesSwapped, false) => $"axles {e.Axle} and {e.OtherAxle} exchanged on paper",
        (ExplanationKind.PositionsExchanged, false) => $"{e.Position} and {e.OtherPosition} exchanged on paper",
        (_, true) => "the tyres moved",
        (ExplanationKind.GroovesReversed, _) => "grooves counted from the inboard side",
        (ExplanationKind.ThirtySecondsTakenForMm, _) => "32nds of an inch written as mm",
        (ExplanationKind.MmTakenForThirtySeconds, _) => "mm written as 32nds of an inch",
        (ExplanationKind.OtherVehicle, _) => "another vehicle",
        (ExplanationKind.GrooveMistyped, _) => "typed wrong",
        (ExplanationKind.ReadOnWearBar, _) => "read on a wear bar",
        (ExplanationKind.TyreMisread, _) => "read at another wheel",
        (ExplanationKind.TyreChanged, _) => "a new tyre",
        (ExplanationKind.Regrooved, _) => "regrooved",
        (ExplanationKind.TurnedOnRim, _) => "turned on the rim",
        (ExplanationKind.CounterReplaced, _) => "was the counter replaced",
        (ExplanationKind.DistanceMistyped, _) => "typed wrong",
        _ => "",
    };

    /// <summary>One answer as a plain sentence.</summary>
    public static string Answer(Explanation e) => (e.Kind, e.Moved) switch
    {
        (ExplanationKind.SidesSwapped, false) => "Left and right were exchanged on paper.",
        (ExplanationKind.SidesSwapped, true) => "The tyres were moved across from left to right.",
        (ExplanationKind.AxleSidesSwapped, false) => $"Left and right of axle {e.Axle} were exchanged on paper.",
        (ExplanationKind.AxleSidesSwapped, true) => $"The tyres of axle {e.Axle} were moved across.",
        (ExplanationKind.AxlesSwapped, false) => $"Axles {e.Axle} and {e.OtherAxle} were exchanged on paper.",
        (ExplanationKind.AxlesSwapped, true) => $"The tyres of axles {e.Axle} and {e.OtherAxle} changed places.",
        (ExplanationKind.PositionsExchanged, false) => $"{e.Position} and {e.OtherPosition} were exchanged on paper.",
        (ExplanationKind.PositionsExchanged, true) => $"The tyres of {e.Position} and {e.OtherPosition} changed places.",
        (ExplanationKind.GroovesReversed, _) => $"The grooves{(e.Position is { } p ? $" of {p}" : e.Side is { } s ? $" on the {s.ToString().ToLowerInvariant()}" : "")} were counted from the inboard side.",
        (ExplanationKind.ThirtySecondsTakenForMm, _) => "The gauge showed 32nds of an inch; they were written as mm.",
        (ExplanationKind.MmTakenForThirtySeconds, _) => "The gauge showed mm; they were written as 32nds of an inch.",
        (ExplanationKind.OtherVehicle, _) => "This was another vehicle: leave the survey out.",
        (ExplanationKind.GrooveMistyped, _) => e.MeantMm is { } mm
            ? string.Create(CultureInfo.InvariantCulture, $"Groove {e.Groove} of {e.Position} was typed wrong: {mm:0.0#} mm was meant.")
            : e.Groove == 0 ? $"The depth of {e.Position} was typed wrong: leave it out." : $"Groove {e.Groove} of {e.Position} was typed wrong: leave it out.",
        (ExplanationKind.ReadOnWearBar, _) => $"Groove {e.Groove} of {e.Position} was read on a wear bar: leave it out.",
        (ExplanationKind.TyreMisread, _) => $"{e.Position} was read at another wheel: leave it out.",
        (ExplanationKind.TyreChanged, _) => $"Another tyre was put on at {e.Position}.",
        (ExplanationKind.Regrooved, _) => $"The tyre at {e.Position} was regrooved.",
        (ExplanationKind.TurnedOnRim, _) => $"The tyre at {e.Position} was turned on its rim.",
        (ExplanationKind.CounterReplaced, _) => "The counter was replaced or reset.",
        (ExplanationKind.DistanceMistyped, _) => "The distance was typed wrong: leave it out.",
        _ => e.Position is { } one ? $"{one} is as written." : "It is as written.",
    };
}
