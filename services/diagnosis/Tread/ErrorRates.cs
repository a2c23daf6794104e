namespace WearWatch.Diagnosis.Tread;

/// <summary>
/// How often each thing goes wrong that makes a survey read otherwise than the tyres are, as a share before its depths are looked at.
/// The defaults are from memory, inside the 1-3 % of blunders usual in depots; a fleet with surveys enough states its own.
/// </summary>
public sealed record ErrorRates
{
    internal static readonly ErrorRates FromMemory = new();

    // Shares of surveys.
    public double SidesSwapped { get; init; } = 0.01;
    public double AxleSidesSwapped { get; init; } = 0.005;
    public double AxlesSwapped { get; init; } = 0.004;
    /// <summary>Two wheels of one side, or two duals.</summary>
    public double PositionsExchanged { get; init; } = 0.004;
    public double GroovesReversed { get; init; } = 0.002;
    /// <summary>Of surveys whose gauge has a step that agrees with it; likewise the next.</summary>
    public double ThirtySecondsTakenForMm { get; init; } = 0.004;
    public double MmTakenForThirtySeconds { get; init; } = 0.004;
    public double OtherVehicle { get; init; } = 0.002;
    /// <summary>Tyres exchanged between places without a record since the survey before.</summary>
    public double TyresMoved { get; init; } = 0.005;

    /// <summary>All tyres of an axle changed without a record since the survey before, share of axles and surveys.</summary>
    public double AxleChanged { get; init; } = 0.015;

    // Shares of tyres and surveys.
    /// <summary>Changed, or turned on the rim, without a record since the survey before.</summary>
    public double TyreChanged { get; init; } = 0.01;
    public double TyreMisread { get; init; } = 0.01;

    // Shares of grooves read.
    public double GrooveMistyped { get; init; } = 0.003;
    public double ReadOnWearBar { get; init; } = 0.002;
}
