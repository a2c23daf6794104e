using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>One tyre's shape at one survey, placed on the distance axis.</summary>
internal sealed record FittingPoint
{
    /// <summary>Index of the survey in order of time; −1 for the start of the fitting.</summary>
    public required int Survey { get; init; }
    public required double Km { get; init; }
    public double KmSd { get; init; }
    public required Estimate Mean { get; init; }
    public Estimate? Edge { get; init; }
    public Estimate? Shoulder { get; init; }
    /// <summary>0 to 1: how far the survey is believed as it stands.</summary>
    public double Weight { get; init; } = 1;
    /// <summary>True for the start of a tyre fitted new: its depth is the nominal one, and the first of its wear was not like the rest.</summary>
    public bool New { get; init; }
    public TreadShape? Shape { get; init; }
    /// <summary>The readings behind it, after the explanation.</summary>
    public TyreReadings? Readings { get; init; }
}

/// <summary>A tyre on a position from one distance to another, with all that was learnt of it there.</summary>
internal sealed record Fitting
{
    public required string VehicleId { get; init; }
    public required Position Position { get; init; }
    public required AxleRole Role { get; init; }
    public required VehicleClass Class { get; init; }
    public string? TyreId { get; init; }
    public string? Pattern { get; init; }
    public double? NewDepthMm { get; init; }
    public bool Winter { get; init; }
    /// <summary>Where the fitting began, if that and the depth then are known.</summary>
    public FittingPoint? Start { get; init; }
    /// <summary>Surveys, oldest first.</summary>
    public required IReadOnlyList<FittingPoint> Points { get; init; }
    /// <summary>This fitting is the last on its position.</summary>
    public bool Current { get; init; }

    /// <summary>Points of a line through this fitting, the known start included.</summary>
    public IReadOnlyList<FittingPoint> LinePoints => Start is null ? Points : [Start, .. Points];
}
