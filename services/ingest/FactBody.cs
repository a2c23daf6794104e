using WearWatch.Storage.Facts;

namespace WearWatch.Ingest;

/// <summary>A fact as its converter read it: the record in stored units, what it belongs to, how it is judged.</summary>
internal sealed record FactBody(string Kind, object Record, DateTimeOffset At)
{
    public string? VehicleId { get; init; }
    public string? TractorId { get; init; }
    public string? TyreId { get; init; }
    /// <summary>Depths, of a survey.</summary>
    public int Readings { get; init; }
    public string? Retracts { get; init; }
    public string? Releases { get; init; }
    /// <summary>Fact that a decision is about.</summary>
    public string? About { get; init; }
    /// <summary>Judges it against what is known: the vehicle exists, has that position, ran no distance back.</summary>
    public Action<FactContext, Judgement>? Judge { get; init; }
}

/// <summary>What came of judging one fact against what is known.</summary>
internal sealed class Judgement(string depot, string? replaces)
{
    private readonly List<Remark> _remarks = [];

    /// <summary>Depot that sent the fact.</summary>
    public string Depot { get; } = depot;

    /// <summary>Fact that this one corrects; not to be compared with.</summary>
    public string? Replaces { get; } = replaces;

    public IReadOnlyList<Remark> Remarks => _remarks;

    public bool Refused { get; private set; }

    public bool Held { get; private set; }

    /// <summary>Held fact that this one lets through.</summary>
    public string? Releases { get; set; }

    public void Refuse(string code, string field, string message)
    {
        Refused = true;
        _remarks.Add(new Remark(code, field, message));
    }

    public void Hold(string code, string field, string message, IReadOnlyList<RemarkChoice>? choices = null)
    {
        Held = true;
        Tell(code, field, message, choices: choices);
    }

    public void Tell(string code, string field, string message, bool safety = false, IReadOnlyList<RemarkChoice>? choices = null) =>
        _remarks.Add(new Remark(code, field, message, safety) { Choices = choices });

    /// <summary>Refuses a fact on a vehicle that no fact describes.</summary>
    public void NeedsVehicle(FactContext context, string vehicleId, string field)
    {
        if (!context.VehicleIsKnown(vehicleId)) Refuse("unknown_vehicle", field, $"vehicle {vehicleId} is not known; send its vehicle fact first");
    }
}
