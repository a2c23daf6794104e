using System.Text.Json;
using System.Text.Json.Serialization;

namespace WearWatch.Proving.Run;

/// <summary>What the simulator wrote into truth.json, as far as it is scored. Units as tests/simulator/README.md.</summary>
internal sealed record Truth
{
    public required ulong Seed { get; init; }
    public required DateOnly From { get; init; }
    public required DateOnly End { get; init; }
    public required IReadOnlyList<TrueVehicle> Vehicles { get; init; }
    /// <summary>Blunders planted in surveys.</summary>
    public required IReadOnlyList<Blunder> Surveys { get; init; }

    internal static readonly JsonSerializerOptions s_json = new()
    {
        PropertyNamingPolicy = JsonNamingPolicy.SnakeCaseLower,
        NumberHandling = JsonNumberHandling.AllowNamedFloatingPointLiterals,
    };

    public static Truth Read(string path) => JsonSerializer.Deserialize<Truth>(File.ReadAllText(path), s_json) ?? throw new InvalidDataException($"{path} is empty");
}

internal sealed record Blunder(string SurveyId, string Kind);

internal sealed record TrueVehicle
{
    public required string VehicleId { get; init; }
    public required string Class { get; init; }
    public required string TrafficSide { get; init; }
    public required bool Misaligned { get; init; }
    /// <summary><c>large</c>, <c>small</c> or <c>none</c>.</summary>
    public required string Stratum { get; init; }
    /// <summary>Beyond tolerance, largest first.</summary>
    public required IReadOnlyList<TrueQuantity> Quantities { get; init; }
    public required IReadOnlyList<TrueLookalike> Lookalikes { get; init; }
    public DateOnly? RepairedOn { get; init; }
    /// <summary><c>gauge_only</c>, <c>angle</c> or <c>torque</c>.</summary>
    public required string Signals { get; init; }
    public required bool AssistMeasured { get; init; }
    /// <summary>Whether it logs where it is.</summary>
    public bool Position { get; init; }
    public double? SteeringPullNm { get; init; }
    public double? SteeringPullTorsionBarNm { get; init; }
    public double? OffCentreDeg { get; init; }
    public required IReadOnlyList<TrueTyre> Tyres { get; init; }
    public required IReadOnlyList<TrueSurvey> Surveys { get; init; }
    public required IReadOnlyList<string> UnrecordedEvents { get; init; }
    public required IReadOnlyList<TrueStep> Steps { get; init; }
    public required double NetBenefit { get; init; }
}

internal sealed record TrueQuantity(string Quantity, int? Axle, string? Side, double Value, double Target, double Tolerance, double Ratio, DateOnly? Since, string? Mode);

internal sealed record TrueLookalike(string Kind, double Size);

internal sealed record TrueTyre(string Position, double RemainingKm, double LimitMm, double SinceKm, double OdometerKm);

/// <summary>One walk: how many axles, and how far left and right differ in standard errors of the readings.</summary>
internal sealed record TrueSurvey(string SurveyId, DateOnly Date, double OdometerKm, int Axles, double LeftRightErrors);

/// <summary>A sudden change of at least 0.3 N·m at the column or 2° at the wheel.</summary>
internal sealed record TrueStep(DateOnly Date, double SteeringPullNm, double OffCentreDeg, string Because);

/// <summary>What the simulator, knowing all but the wheel angles, says of one vehicle on the same data.</summary>
internal sealed record BestVerdict(string VehicleId, double Probability, IReadOnlyList<SaidCause> Causes)
{
    private sealed record All(IReadOnlyList<BestVerdict> Vehicles);

    public static IReadOnlyDictionary<string, BestVerdict> Read(string path) =>
        JsonSerializer.Deserialize<All>(File.ReadAllText(path), Truth.s_json)!.Vehicles.ToDictionary(v => v.VehicleId);
}

/// <summary>A cause as it was named, in the words of truth.json; the interval holds 90 %, deg.</summary>
internal sealed record SaidCause(string Quantity, int? Axle, string? Side, double Low, double High);
