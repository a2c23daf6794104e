using System.Globalization;
using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Tread;

/// <summary>
/// Explanations as the words of an answer: <c>as_written</c>, <c>sides_swapped</c>, <c>axles_swapped 1 2</c>,
/// <c>groove_mistyped 2LO 2 7.1</c> (mm meant, where known), <c>tyre_changed 1L</c>; with <c>moved</c> before them where the
/// tyres themselves were exchanged and not their depths on paper. Several are separated by semicolons.
/// </summary>
public static class ExplanationText
{
    private const string MovedWord = "moved";

    private enum Part { Axle, OtherAxle, Position, OtherPosition, Groove }

    private static readonly Dictionary<string, (ExplanationKind Kind, Part[] Parts)> s_words = new()
    {
        ["as_written"] = (ExplanationKind.AsWritten, []),
        ["sides_swapped"] = (ExplanationKind.SidesSwapped, []),
        ["axle_sides_swapped"] = (ExplanationKind.AxleSidesSwapped, [Part.Axle]),
        ["axles_swapped"] = (ExplanationKind.AxlesSwapped, [Part.Axle, Part.OtherAxle]),
        ["positions_exchanged"] = (ExplanationKind.PositionsExchanged, [Part.Position, Part.OtherPosition]),
        ["grooves_reversed"] = (ExplanationKind.GroovesReversed, []),
        ["thirty_seconds_taken_for_mm"] = (ExplanationKind.ThirtySecondsTakenForMm, []),
        ["mm_taken_for_thirty_seconds"] = (ExplanationKind.MmTakenForThirtySeconds, []),
        ["other_vehicle"] = (ExplanationKind.OtherVehicle, []),
        ["groove_mistyped"] = (ExplanationKind.GrooveMistyped, [Part.Position, Part.Groove]),
        ["read_on_wear_bar"] = (ExplanationKind.ReadOnWearBar, [Part.Position, Part.Groove]),
        ["tyre_misread"] = (ExplanationKind.TyreMisread, [Part.Position]),
        ["tyre_changed"] = (ExplanationKind.TyreChanged, [Part.Position]),
        ["regrooved"] = (ExplanationKind.Regrooved, [Part.Position]),
        ["turned_on_rim"] = (ExplanationKind.TurnedOnRim, [Part.Position]),
        ["counter_replaced"] = (ExplanationKind.CounterReplaced, []),
        ["distance_mistyped"] = (ExplanationKind.DistanceMistyped, []),
    };

    /// <summary>Every word there is, for a message that names them.</summary>
    public static string Words => string.Join(", ", s_words.Keys);

    public static string Write(Explanation e)
    {
        var (word, form) = s_words.FirstOrDefault(w => w.Value.Kind == e.Kind);
        if (word is null) (word, form) = ("as_written", (ExplanationKind.AsWritten, []));
        object?[] parts = [e.Moved ? MovedWord : null, word, .. form.Parts.Select(p => (object?)(p switch
        {
            Part.Axle => e.Axle,
            Part.OtherAxle => e.OtherAxle,
            Part.Position => e.Position,
            Part.OtherPosition => e.OtherPosition,
            _ => e.Groove,
        })), e.Kind is ExplanationKind.GroovesReversed or ExplanationKind.AsWritten ? e.Position?.ToString() ?? e.Side?.ToString().ToLowerInvariant() : e.MeantMm?.ToString("0.0#", CultureInfo.InvariantCulture)];
        return string.Join(' ', parts.Where(p => p is not null).Select(p => Convert.ToString(p, CultureInfo.InvariantCulture)));
    }

    /// <summary>Several answers in one; null where one of them is not understood.</summary>
    public static IReadOnlyList<Explanation>? ReadAll(string text)
    {
        var list = text.Split(';', StringSplitOptions.RemoveEmptyEntries | StringSplitOptions.TrimEntries).Select(Read).ToList();
        return list.Count == 0 || list.Contains(null) ? null : [.. list.OfType<Explanation>()];
    }

    /// <summary>Null where the words are not understood.</summary>
    public static Explanation? Read(string text)
    {
        var words = new Queue<string>(text.Split(' ', StringSplitOptions.RemoveEmptyEntries));
        var moved = words.Count > 1 && words.Peek() == MovedWord;
        if (moved) words.Dequeue();
        if (words.Count == 0 || !s_words.TryGetValue(words.Dequeue(), out var form)) return null;
        var read = new Explanation(form.Kind) { Moved = moved };
        if (moved && !read.CanBeDoneToTyres) return null;
        foreach (var part in form.Parts)
        {
            if (!words.TryDequeue(out var word) || With(read, part, word) is not { } next) return null;
            read = next;
        }
        if (words.TryDequeue(out var more))
        {
            if (Last(read, more) is not { } whole) return null;
            read = whole;
        }
        return words.Count == 0 ? read : null;
    }

    private static Explanation? With(Explanation e, Part part, string word)
    {
        var whole = int.TryParse(word, NumberStyles.None, CultureInfo.InvariantCulture, out var number);
        var place = Position.TryParse(word, out var position);
        return part switch
        {
            Part.Axle when whole && number is >= 1 and <= Position.MaxAxle => e with { Axle = number },
            Part.OtherAxle when whole && number is >= 1 and <= Position.MaxAxle && number != e.Axle => e with { OtherAxle = number },
            Part.Position when place => e with { Position = position },
            Part.OtherPosition when place && position != e.Position => e with { OtherPosition = position },
            Part.Groove when whole && number <= SurveyCheck.MaxGroove => e with { Groove = number },
            _ => null,
        };
    }

    /// <summary>The depth meant, of a groove mistyped; the side or the tyre, of grooves reversed; the one tyre, of what is as written.</summary>
    private static Explanation? Last(Explanation e, string word) => e.Kind switch
    {
        ExplanationKind.GrooveMistyped when double.TryParse(word, NumberStyles.Float, CultureInfo.InvariantCulture, out var mm) && mm is >= 0 and <= SurveyCheck.DeepestMm => e with { MeantMm = mm },
        ExplanationKind.GroovesReversed when word is "left" or "right" => e with { Side = word == "left" ? Side.Left : Side.Right },
        ExplanationKind.GroovesReversed or ExplanationKind.AsWritten when Position.TryParse(word, out var position) => e with { Position = position },
        _ => null,
    };
}
