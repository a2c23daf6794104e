using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Wear;

/// <summary>What the fleet's readings say of one technician or one gauge.</summary>
public sealed record ReaderRow
{
    /// <summary>Technician or gauge as written in the surveys.</summary>
    public required string Reader { get; init; }
    /// <summary>Tyre readings that the figures rest on.</summary>
    public required int Readings { get; init; }
    /// <summary>Surveys with at least one of those.</summary>
    public required int Surveys { get; init; }
    /// <summary>By how much it reads too deep against the fleet's others of its kind, mm; pulled towards zero where little is known.</summary>
    public required double BiasMm { get; init; }
    /// <summary>Standard error of that, mm.</summary>
    public required double BiasStandardError { get; init; }
    /// <summary>Standard deviation of one reading repeated by the same hand with the same gauge, rounding taken off, mm.</summary>
    public required double RepeatabilityMm { get; init; }
    /// <summary>Bounds of the 90 % interval of the repeatability, mm.</summary>
    public required double RepeatabilityLow { get; init; }
    public required double RepeatabilityHigh { get; init; }

    /// <summary>Bounds of the 90 % interval of the bias, mm.</summary>
    public double BiasLow => BiasMm - Estimate.Z90 * BiasStandardError;
    public double BiasHigh => BiasMm + Estimate.Z90 * BiasStandardError;
}

/// <summary>Bias and repeatability of each technician and each gauge across the fleet, as crossed effects on the depths of all its tyres.</summary>
public sealed record ReaderStudy
{
    /// <summary>In order of their names.</summary>
    public IReadOnlyList<ReaderRow> Technicians { get; init; } = [];
    /// <summary>In order of their names.</summary>
    public IReadOnlyList<ReaderRow> Gauges { get; init; } = [];
    /// <summary>Spread of the technicians' biases, standard deviation, mm.</summary>
    public Interval? TechnicianSpreadMm { get; init; }
    /// <summary>Spread of the gauges' biases, standard deviation, mm.</summary>
    public Interval? GaugeSpreadMm { get; init; }
    /// <summary>Repeatability over all readers, mm.</summary>
    public Interval? RepeatabilityMm { get; init; }
}
