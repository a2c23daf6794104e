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

    /// <summary>The study from the biases found and from the scatter about the tyres' lines.</summary>
    /// <param name="blocks">The fleet's tyres with their lines.</param>
    /// <param name="technicians">Biases by number.</param>
    /// <param name="gauges">Biases by number.</param>
    /// <param name="spreads">Carries the spreads of the biases.</param>
    internal static ReaderStudy Of(FleetTyre[][] blocks, IReadOnlyList<ReaderBias> technicians, IReadOnlyList<ReaderBias> gauges, ReaderStudy spreads)
    {
        if (technicians.Count + gauges.Count == 0) return spreads;
        Parallel.ForEach(blocks, block =>
        {
            foreach (var tyre in block) tyre.Scatter ??= OfMeans(tyre, technicians, gauges);
        });
        var byTechnician = ReaderRepeatability.Of(blocks, technicians.Count, byGauge: false);
        var byGauge = ReaderRepeatability.Of(blocks, gauges.Count, byGauge: true);
        return spreads with
        {
            Technicians = Rows(technicians, byTechnician.ByReader),
            Gauges = Rows(gauges, byGauge.ByReader),
            RepeatabilityMm = byTechnician.All.RepeatabilityMm,
        };
    }

    /// <summary>Where one depth stands for a tyre; means over grooves hold too little of a single reading.</summary>
    private static TyreScatter? OfMeans(FleetTyre tyre, IReadOnlyList<ReaderBias> technicians, IReadOnlyList<ReaderBias> gauges)
    {
        var points = tyre.Points;
        if (tyre.Shaped) return null;
        Span<double> bias = points.Length <= 256 ? stackalloc double[points.Length] : new double[points.Length];
        for (var i = 0; i < bias.Length; i++)
            bias[i] = (points[i].Technician >= 0 ? technicians[points[i].Technician].BiasMm.Value : 0) + (points[i].Gauge >= 0 ? gauges[points[i].Gauge].BiasMm.Value : 0);
        return TyreScatter.OfMeans(points, bias);
    }

    /// <summary>Biases against the mean of their kind: what all share cannot show.</summary>
    private static ReaderRow[] Rows(IReadOnlyList<ReaderBias> biases, RepeatabilityFigures[] figures)
    {
        var middle = biases.Count > 0 ? biases.Average(b => b.BiasMm.Value) : 0;
        return [.. biases.Select((b, i) => new ReaderRow
        {
            Reader = b.Reader,
            Readings = figures[i].Readings,
            Surveys = figures[i].Surveys,
            BiasMm = b.BiasMm.Value - middle,
            BiasStandardError = b.AgainstOthersSdMm,
            RepeatabilityMm = figures[i].RepeatabilityMm.Value,
            RepeatabilityLow = figures[i].RepeatabilityMm.Low,
            RepeatabilityHigh = figures[i].RepeatabilityMm.High,
        })];
    }
}
