using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Causes;

/// <summary>How common each cause is before anything is measured, and how far beyond tolerance faults lie.</summary>
/// <remarks>Shares from memory; confirmed workshop outcomes of the fleet replace them.</remarks>
public sealed record FaultPriors
{
    public static FaultPriors Default { get; } = new();

    /// <summary>Share of vehicles with an angle beyond tolerance, above 0 and below 1.</summary>
    public double MisalignedShare { get; init; } = 0.20;

    /// <summary>Share of faults between 1 and 1.5 times tolerance; most of the rest lie between 1.5 and 4 times.</summary>
    public double SlightShare { get; init; } = 0.40;

    /// <summary>Share of faults beyond 4 times tolerance (up to 5).</summary>
    public double GrossShare { get; init; } = 0.03;

    /// <summary>Relative frequency of each angle among faults; spread over the axles and wheels that have it.</summary>
    public IReadOnlyDictionary<Quantity, double> AngleWeights { get; init; } = new Dictionary<Quantity, double>
    {
        [Quantity.FrontTotalToe] = 2.5,
        [Quantity.RearTotalToe] = 1.5,
        [Quantity.Camber] = 1.2,
        [Quantity.CamberSplit] = 0.8,
        [Quantity.CasterSplit] = 1.0,
        [Quantity.Thrust] = 1.5,
        [Quantity.TandemSkew] = 1.5,
        [Quantity.TrailerSkew] = 1.5,
    };

    /// <summary>Share of vehicles that carry each look-alike in a form worth naming.</summary>
    public IReadOnlyDictionary<Quantity, double> LookAlikeShares { get; init; } = new Dictionary<Quantity, double>
    {
        [Quantity.Conicity] = 0.06,
        [Quantity.Pressure] = 0.06,
        [Quantity.Crown] = 0.03,
        [Quantity.Drag] = 0.03,
        [Quantity.Damper] = 0.03,
        [Quantity.Duty] = 0.06,
        [Quantity.SensorZeroOrFrontToeSplit] = 0.12,
    };
}
