namespace WearWatch.Storage.Facts;

/// <summary>Names of the kinds of fact, as stored and as shown.</summary>
public static class FactKind
{
    public const string Depot = "depot", Vehicle = "vehicle", Coupling = "coupling", Tyre = "tyre", Fitting = "fitting", Survey = "survey",
        DriverReport = "driver_report", WorkshopRecord = "workshop_record", UsualRoute = "usual_route", Price = "price",
        DepthLimit = "depth_limit", Tolerance = "tolerance", Setting = "setting", Decision = "decision", Withdrawal = "withdrawal",
        SteeringChunk = "steering_chunk", UnreadRow = "unread_row";
}

/// <summary>Why something was held or refused, or what the sender should know at once.</summary>
/// <param name="Code">Short constant such as <c>depth_negative</c>.</param>
/// <param name="Field">Path of the field inside what was sent; empty where it is the whole.</param>
/// <param name="Message">A plain sentence.</param>
/// <param name="Safety">Must be shown at once.</param>
public sealed record Remark(string Code, string Field, string Message, bool Safety = false)
{
    /// <summary>What may have happened, where the message is a question.</summary>
    public IReadOnlyList<RemarkChoice>? Choices { get; init; }
}

/// <summary>One answer to a question: the words an answer is recorded in, a plain sentence, and its probability from the readings alone.</summary>
public sealed record RemarkChoice(string Answer, string Words, double Probability);

/// <summary>A withdrawal: an earlier fact taken back, or a held one let through.</summary>
public sealed record Withdrawal
{
    public required WithdrawalKind Kind { get; init; }
    public required string FactId { get; init; }
    public required DateTimeOffset At { get; init; }
    public string? Reason { get; init; }
}

public enum WithdrawalKind { Retract, Release }

/// <summary>One fact ready to be stored, or kept aside.</summary>
public sealed record FactRow
{
    public required string Depot { get; init; }
    public required string Id { get; init; }
    public required string Kind { get; init; }
    public string? VehicleId { get; init; }
    public string? TractorId { get; init; }
    public string? TyreId { get; init; }
    public required DateTimeOffset At { get; init; }
    public required byte[] ContentHash { get; init; }
    /// <summary>What was sent, as bytes of the contract's message.</summary>
    public required byte[] Sent { get; init; }
    /// <summary>The record in stored units; null where it could not be made.</summary>
    public object? Body { get; init; }
    public int Readings { get; init; }
    public string? Replaces { get; init; }
    public string? Retracts { get; init; }
    public string? Releases { get; init; }
    /// <summary>Fact that a decision is about; known to the batch, not stored apart.</summary>
    public string? About { get; init; }
    public string RecordedBy { get; init; } = "";
}

/// <summary>A fact that is stored already.</summary>
public sealed record KnownFact
{
    public required string Depot { get; init; }
    public required string Id { get; init; }
    public required string Kind { get; init; }
    public string? VehicleId { get; init; }
    public string? TractorId { get; init; }
    public required byte[] ContentHash { get; init; }
    public required bool Held { get; init; }
    public required IReadOnlyList<Remark> Remarks { get; init; }
}

/// <summary>A record with the id of the fact it came in with and the time it holds from.</summary>
public sealed record Dated<T>(string FactId, DateTimeOffset At, T Body);

/// <summary>A depot's id and a fact's id: what names a fact.</summary>
public readonly record struct FactKey(string Depot, string Id);
