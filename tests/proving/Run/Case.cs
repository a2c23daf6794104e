using WearWatch.Contracts.V1;
using WearWatch.Proving.Plain;

namespace WearWatch.Proving.Run;

/// <summary>One vehicle of one fleet: the truth, what the product said over its public contract, and what plain figures say.</summary>
internal sealed record Case
{
    public required ulong Seed { get; init; }
    public required DateOnly From { get; init; }
    public required DateOnly End { get; init; }
    public required TrueVehicle Truth { get; init; }
    /// <summary>Blunders by survey id; the fleet's.</summary>
    public required IReadOnlyDictionary<string, string> Blunders { get; init; }
    /// <summary>Null where the product gave none.</summary>
    public required Contracts.V1.Diagnosis? Diagnosis { get; init; }
    /// <summary>The best possible on the same data; null where it was not worked out.</summary>
    public BestVerdict? Best { get; init; }
    /// <summary>Place in the worklist, from 1; last where it is not listed.</summary>
    public required int Rank { get; init; }
    public required PlainVehicle Plain { get; init; }
    /// <summary>The same vehicle of the same seed with the bank taken off its logged trips; null where no such fleet was made.</summary>
    public Case? OnFlatRoads { get; init; }
    /// <summary>What the door asked about a survey when it was imported.</summary>
    public required IReadOnlyDictionary<string, string> Asked { get; init; }

    public double Probability => Diagnosis?.MisalignedProbability ?? 0;
    /// <summary>Causes that the product names, most probable first.</summary>
    public IReadOnlyList<SaidCause> Causes => _causes ??= [.. (Diagnosis?.Causes ?? []).Select(c => new SaidCause(WireName(c.Quantity), c.HasAxle ? c.Axle : null, WireName(c.Side), c.Low, c.High))];
    private IReadOnlyList<SaidCause>? _causes;
    public bool Large => Truth.Stratum == "large";
    public double Years => (End.DayNumber - From.DayNumber) / 365.25;

    /// <summary>The product's note on a survey and the door's question, in one text; empty where it was taken as written.</summary>
    public string SaidOf(string surveyId) =>
        string.Join(' ', (Diagnosis?.SurveyNotes ?? []).Where(n => n.SurveyId == surveyId).Select(n => n.Note).Append(Asked.GetValueOrDefault(surveyId, "")));

    /// <summary>SteeringPull as steering_pull; side as L, R or null.</summary>
    public static string WireName(Quantity quantity) => string.Concat(quantity.ToString().Select((c, i) => char.IsUpper(c) && i > 0 ? $"_{char.ToLowerInvariant(c)}" : $"{char.ToLowerInvariant(c)}"));

    public static string? WireName(Side side) => side switch { Side.Left => "L", Side.Right => "R", _ => null };
}
