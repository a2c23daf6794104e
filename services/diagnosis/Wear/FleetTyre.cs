using System.Runtime.CompilerServices;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>One figure's line as the fleet fit keeps it.</summary>
/// <param name="Fit">Null with fewer than two places.</param>
/// <param name="Count">Readings.</param>
internal readonly record struct KeptLine(LineFit? Fit, int Count)
{
    public Estimate? Slope(NoiseFigures noise) => Fit is { } f ? FittingLines.Widened(f.Slope, f.ChiSquare, Count, noise) : null;
}

/// <summary>Sums for the correlation of neighbouring residuals.</summary>
internal record struct NeighbourSums(double Products, double Squares, double Pairs)
{
    public static NeighbourSums operator +(NeighbourSums a, NeighbourSums b) => new(a.Products + b.Products, a.Squares + b.Squares, a.Pairs + b.Pairs);

    /// <summary>
    /// Takes in the residuals of one line, corrected for what fitting a line alone does to them: near −2/n for white noise at
    /// even spacing.
    /// </summary>
    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    public void Add(ReadOnlySpan<double> standardised)
    {
        var n = standardised.Length;
        if (n < 5) return;
        double square = 0, products = 0, before = 0;
        for (var i = 0; i < n; i++)
        {
            var r = Math.Clamp(standardised[i], -3, 3);
            square += r * r;
            if (i > 0) products += r * before;
            before = r;
        }
        square /= n - 2;
        Products += products + 2 * square * (n - 1.0) / n;
        Squares += square * (n - 1);
        Pairs += n - 1;
    }
}

/// <summary>A fitting reduced to what the fleet fit needs, with its lines of the present round.</summary>
internal sealed class FleetTyre
{
    public required int Vehicle { get; init; }
    public required VehicleClass Class { get; init; }
    public required AxleRole Role { get; init; }
    public required Dual Dual { get; init; }
    /// <summary>+1 on the side to which the road usually falls, −1 on the other.</summary>
    public required int Fall { get; init; }
    /// <summary>Feather at its last survey that took it, mm.</summary>
    public required Estimate? Feather { get; init; }
    /// <summary>The first point is the start of a tyre fitted new.</summary>
    public required bool FittedNew { get; init; }
    /// <summary>A measured point tells more than the mean.</summary>
    public required bool Shaped { get; init; }
    /// <summary>Where the points are kept.</summary>
    public required ReadOnlyMemory<LinePoint> Kept { private get; init; }

    /// <summary>In order of distance.</summary>
    public ReadOnlySpan<LinePoint> Points => Kept.Span;

    /// <summary>Scatter of the readings, for the study of those who took them; null where there is none to be seen.</summary>
    public TyreScatter? Scatter { get; set; }

    public KeptLine Mean { get; private set; }
    public KeptLine Edge { get; private set; }
    public KeptLine Shoulder { get; private set; }

    /// <summary>Loss of mean depth, mm per 1000 km.</summary>
    public Estimate? Rate(NoiseFigures noise) => Mean.Slope(noise) is { } s ? -s : null;

    /// <summary>Fits the three lines anew, each from where it stood.</summary>
    public void FitLines(NoiseFigures noise, ReaderTable readers, double rateMmPer1000Km, ref NeighbourSums neighbours)
    {
        Mean = Line(TreadFigure.Mean, Mean.Fit, noise, readers, rateMmPer1000Km, ref neighbours);
        Edge = Line(TreadFigure.Edge, Edge.Fit, noise, readers, rateMmPer1000Km, ref neighbours);
        Shoulder = Line(TreadFigure.Shoulder, Shoulder.Fit, noise, readers, rateMmPer1000Km, ref neighbours);
    }

    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    private KeptLine Line(TreadFigure figure, LineFit? before, NoiseFigures noise, ReaderTable readers, double rate, ref NeighbourSums neighbours)
    {
        var points = Points;
        if (figure != TreadFigure.Mean && !Shaped) return default;
        var room = points.Length <= 64;
        Span<LineReading> readings = room ? stackalloc LineReading[points.Length] : new LineReading[points.Length];
        Span<double> standardised = room ? stackalloc double[points.Length] : new double[points.Length];
        var count = 0;
        var loss = FittedNew ? RunIn.MiddleLoss(points) : 0;
        foreach (ref readonly var raw in points)
        {
            var p = FittedNew ? noise.RunIn.OnLine(raw, points[0].Mean.Value, loss) : raw;
            if (FittingLines.Reading(p, figure, noise, figure == TreadFigure.Mean ? readers.Bias(p) : default, rate) is { } reading) readings[count++] = reading;
        }
        var fit = LineSolver.Fit(readings[..count], standardised, before is { } b ? (b.Slope.Value, b.AtLast.Value) : null);
        if (fit is not null && figure != TreadFigure.Mean) neighbours.Add(standardised[..count]);
        return new(fit, count);
    }
}

/// <summary>Room for the points of many fittings in few large arrays, which the collector of garbage neither moves nor looks into.</summary>
internal sealed class PointStore
{
    private const int Slab = 4096;

    private LinePoint[] _slab = [];
    private int _used;

    public Memory<LinePoint> Take(int count)
    {
        if (_slab.Length - _used < count) (_slab, _used) = (new LinePoint[Math.Max(Slab, count)], 0);
        _used += count;
        return _slab.AsMemory(_used - count, count);
    }
}

/// <summary>Bias of each technician with each gauge in the present round; before the first, nothing but the prior's width.</summary>
internal sealed class ReaderTable(IReadOnlyList<ReaderBias> technicians, IReadOnlyList<ReaderBias> gauges)
{
    private readonly Estimate[] _technicians = [.. technicians.Select(Own)];
    private readonly Estimate[] _gauges = [.. gauges.Select(Own)];

    private static Estimate Own(ReaderBias b) => b.BiasMm with { StandardError = b.AgainstOthersSdMm };

    public Estimate Bias(in LinePoint p)
    {
        if (!p.Measured) return new(0, 0);
        var technician = p.Technician >= 0 && _technicians.Length > 0 ? _technicians[p.Technician] : new(0, GaugeNoise.TechnicianSdMm);
        return p.Gauge >= 0 && _gauges.Length > 0 ? technician + _gauges[p.Gauge] : technician;
    }
}
