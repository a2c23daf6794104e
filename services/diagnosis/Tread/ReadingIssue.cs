using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Tread;

public enum IssueWeight
{
    /// <summary>Cannot be used as it is; kept with the reason, to be corrected and sent again.</summary>
    Refuse,
    /// <summary>Kept, and left out of the figures until someone has looked.</summary>
    Hold,
    /// <summary>Stored and used; the person should know.</summary>
    Tell,
}

/// <summary>One answer to a tread survey at the door.</summary>
/// <param name="Code">Stable word for programs, such as <c>depth_grew</c>.</param>
/// <param name="Weight">What it does to the survey.</param>
/// <param name="Field">Where, such as <c>tyres[3].depths[1].depth_mm</c>.</param>
/// <param name="Message">A plain sentence for a technician who stands in the cold.</param>
/// <param name="Position">Tyre, where it is about one.</param>
/// <param name="Groove">Groove, where it is about one.</param>
public sealed record ReadingIssue(string Code, IssueWeight Weight, string Field, string Message, Position? Position = null, int? Groove = null)
{
    /// <summary>What may have happened, likeliest first: then the message is a question, and one of these its answer.</summary>
    public IReadOnlyList<WeighedExplanation> Choices { get; init; } = [];
}
