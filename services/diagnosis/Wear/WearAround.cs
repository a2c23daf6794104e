using MathNet.Numerics.LinearAlgebra;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// Reads a vehicle's places around every possible onset. What was measured before the last adjustment tells of angles that
/// are no more, and is left out.
/// </summary>
internal sealed class WearAround
{
    /// <summary>How far wear wanders, share of normal: of the whole vehicle (season, loads), of one place and of its one-edge part; and for how many weeks (from memory).</summary>
    private const double VehicleWander = 0.12, PlaceWander = 0.06, EdgeWander = 0.04, WanderWeeks = 8;

    /// <summary>What differs from one walk to the next in the same hand, mm (from memory).</summary>
    private const double WalkSdMm = 0.03;

    private readonly VehicleHistory _history;
    private readonly FleetWear _fleet;
    private readonly IReadOnlyList<(Estimate Bias, int Reader)> _biases;
    private readonly double _since, _memory;
    private readonly double[] _breaks; // 1000 km

    public WearAround(VehicleHistory history, FleetWear fleet, IReadOnlyList<(Estimate Bias, int Reader)> biases, DateOnly asOf)
    {
        (_history, _fleet, _biases) = (history, fleet, biases);
        var end = new DateTimeOffset(asOf.ToDateTime(TimeOnly.MinValue), TimeSpan.Zero);
        _since = history.Tread.AdjustedAt is { } a ? history.Axis.At(a).Value : double.NegativeInfinity;
        _breaks = [.. Onsets.DaysAgo.Select(days => double.IsInfinity(days) ? double.NegativeInfinity : history.Axis.At(end.AddDays(-days)).Value / 1000)];
        _memory = WanderWeeks * Math.Max(history.Axis.KmPerWeek, 10) / 1000;
    }

    public VehicleWearHistory? Read()
    {
        PlaceHistory[] places = [.. _history.Fittings.GroupBy(f => f.Position).Where(g => g.Any(f => f.Points.Count > 0)).OrderBy(g => g.Key).Select(g => Place([.. g]))];
        return places.Length == 0 ? null : new VehicleWearHistory
        {
            Surveys = _history.Surveys.Count,
            SharedPrecision = SharedPrecision(places.Average(p => p.NormalRateMmPer1000Km)),
            Places = places,
        };
    }

    private PlaceHistory Place(IReadOnlyList<Fitting> fittings)
    {
        var position = fittings[0].Position;
        var normal = _fleet.For(_history.Tread.Vehicle, position);
        var (rate, noise) = (normal.RateMmPer1000Km, _fleet.Noise);
        var mean = new PlaceSlopes(_history.Surveys.Count, new(PlaceWander * rate, _memory), new(VehicleWander * rate, _memory));
        var edge = new PlaceSlopes(0, new(EdgeWander * rate, _memory), default(SlopeWander) with { Memory = 1 });
        foreach (var fitting in fittings)
        {
            if (fitting.Points.Count == 0) continue;
            var points = Since(fitting.LinePoints);
            var newMm = fitting.NewDepthMm ?? WearPrior.For(fitting.Class, fitting.Role).NewDepthMm;
            var depths = Readings(points, TreadFigure.Mean, rate);
            mean.Add([.. depths.Select(r => r with { Y = noise.RunIn.SettledMm(newMm - r.Y, newMm) })], [.. points.Select(p => p.Survey)], _breaks,
                [.. depths.Select(r => noise.RunIn.SettledSdMm(newMm - r.Y))], noise.SlopeFactor(points.Count));
            if (UnknownStart(fitting, normal) is { } start) points = Since([start, .. fitting.Points]);
            var edges = Readings(points, TreadFigure.Edge, rate);
            edge.Add(edges, [.. edges.Select(_ => -1)], _breaks, [.. edges.Select(_ => 0.0)], noise.SlopeFactor(edges.Count));
        }
        return new PlaceHistory
        {
            Position = position,
            NormalRateMmPer1000Km = rate,
            NormalLogRateSd = normal.LogRate.StandardError,
            BetweenLogSd = normal.LogRateBetweenSd,
            NormalEdgePerMm = normal.EdgePerMmAt(position, _history.Tread.Depot.TrafficSide).Value,
            ByOnset =
            [
                .. _breaks.Select(at => new PlaceWear
                {
                    Rate = mean.Around(at),
                    Edge = edge.Around(at),
                    Before = Felt(fittings, double.NegativeInfinity, at * 1000),
                    After = Felt(fittings, at * 1000, double.PositiveInfinity),
                }),
            ],
        };
    }

    private FittingPoint? UnknownStart(Fitting fitting, NormalWear normal)
    {
        var own = FittingLines.Fit(fitting.LinePoints, _fleet.Noise, s => _biases[s], normal.RateMmPer1000Km).Rate(_fleet.Noise);
        return TyreWear.WithUnknownStart(fitting, RatePosterior.Of(own, normal).Rate);
    }

    /// <summary>What the depths of one walk share: the hand's bias as far as it is not known, the day, and what the vehicle's wear as a whole had wandered.</summary>
    private double[] SharedPrecision(double rateMmPer1000Km)
    {
        var n = _history.Surveys.Count;
        var wander = new SlopeWander(VehicleWander * rateMmPer1000Km, _memory);
        var km = _history.Surveys.Select(s => _history.Axis.At(s.Survey.At).Value / 1000).ToArray();
        var covariance = Matrix<double>.Build.Dense(n, n, (i, j) => wander.Covariance(km[i] - km[0], km[j] - km[0])
            + (i == j ? WalkSdMm * WalkSdMm : 0)
            + (i == j || (_biases[i].Reader >= 0 && _biases[i].Reader == _biases[j].Reader) ? _biases[i].Bias.StandardError * _biases[j].Bias.StandardError : 0));
        return covariance.Inverse().ToRowMajorArray();
    }

    private List<LineReading> Readings(List<FittingPoint> points, TreadFigure figure, double rate)
    {
        var readings = new List<LineReading>(points.Count);
        foreach (var p in points)
        {
            var (bias, reader) = p.Survey < 0 ? (new(0, 0), -1) : _biases[p.Survey];
            if (FittingLines.Reading(LinePoint.Of(p, reader, -1), figure, _fleet.Noise, bias, rate) is { } reading) readings.Add(reading);
        }
        return readings;
    }

    private List<FittingPoint> Since(IReadOnlyList<FittingPoint> points) => [.. points.Where(p => p.Km >= _since)];

    private Rubs Felt(IReadOnlyList<Fitting> fittings, double from, double to)
    {
        var rubs = fittings.SelectMany(f => f.Points).Where(p => p.Km >= _since && p.Km > from && p.Km <= to).CountBy(p => p.Readings?.HandRub ?? HandRub.NotTaken).ToDictionary();
        return new(rubs.GetValueOrDefault(HandRub.CatchesOutward), rubs.GetValueOrDefault(HandRub.CatchesInward), rubs.GetValueOrDefault(HandRub.Neither));
    }
}
