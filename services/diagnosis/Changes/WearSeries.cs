using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Changes;

/// <summary>
/// Wear rate of each axle from one survey to the next, as a share of the fleet's normal rate for its positions, so that tyres of
/// different age and place stand on one scale. Only readings of the same fitting are compared.
/// </summary>
public static class WearSeries
{
    /// <summary>Distance between two surveys below which an increment says nothing, km.</summary>
    private const double LeastKm = 300;

    /// <summary>What a month's wear differs by without cause: season, load and driver, share (from memory).</summary>
    private const double IntervalSd = 0.15;

    public static IReadOnlyList<ChangeSeries> Of(VehicleTread vehicle, FleetWear fleet, DateOnly asOf, IReadOnlyList<ChangeEvent> events)
    {
        var context = new HistoryContext(fleet.For, s => fleet.BiasOf(s).Mm, Tread.GaugeNoise.RepeatSdMm, Tread.GaugeNoise.TechnicianSdMm);
        var history = VehicleHistory.Of(vehicle, asOf, context);
        var series = new List<ChangeSeries>();
        foreach (var axle in history.Fittings.GroupBy(f => f.Position.Axle).OrderBy(g => g.Key))
        {
            var readings = axle.OrderBy(f => f.Position).SelectMany(f => Increments(vehicle, fleet, history, f)).GroupBy(r => r.Survey).OrderBy(g => g.Key).Select(g => Mean(history, g.Key, [.. g])).ToArray();
            if (readings.Length > 0) series.Add(new() { Quantity = ChangeQuantity.WearRate, Axle = axle.Key, Readings = readings, TripSd = IntervalSd, Events = events });
        }
        return series;
    }

    private readonly record struct Increment(int Survey, DateTimeOffset At, double Share, double Variance, double CommonVariance);

    private static IEnumerable<Increment> Increments(VehicleTread vehicle, FleetWear fleet, VehicleHistory history, Fitting fitting)
    {
        var normal = fleet.For(vehicle.Vehicle, fitting.Position).RateMmPer1000Km;
        for (var i = 1; i < fitting.Points.Count; i++)
        {
            var (a, b) = (fitting.Points[i - 1], fitting.Points[i]);
            var km = b.Km - a.Km;
            // A survey that hardly holds as written says nothing of an increment.
            if (km < LeastKm || Math.Min(a.Weight, b.Weight) < 0.5) continue;
            var (sa, sb) = (history.Surveys[a.Survey].Survey, history.Surveys[b.Survey].Survey);
            var (ba, bb) = (fleet.BiasOf(sa), fleet.BiasOf(sb));
            var unit = normal * km / 1000;
            var own = Square(a.Mean.StandardError) / a.Weight + Square(b.Mean.StandardError) / b.Weight + 2 * Square(FittingLines.WanderSdMm);
            var sameHand = sa.Technician is not null && sa.Technician == sb.Technician && sa.Gauge == sb.Gauge;
            // What one hand reads too deep falls out of the difference.
            var common = sameHand ? 0 : Square(ba.OwnSd) + Square(bb.OwnSd);
            var share = (a.Mean.Value - ba.Mm - b.Mean.Value + bb.Mm) / unit;
            yield return new(b.Survey, sa.At + (sb.At - sa.At) / 2, share, own / Square(unit) + Square(share * (a.KmSd + b.KmSd) / km), common / Square(unit));
        }
    }

    /// <summary>Mean of the axle's tyres; the readers' error is theirs in common.</summary>
    private static ChangeReading Mean(VehicleHistory history, int survey, IReadOnlyList<Increment> tyres)
    {
        var weights = tyres.Sum(t => 1 / t.Variance);
        var share = tyres.Sum(t => t.Share / t.Variance) / weights;
        var id = history.Surveys[survey].SurveyId;
        return new(tyres.Min(t => t.At), id, share, 1 / weights + tyres.Average(t => t.CommonVariance), id);
    }

    private static double Square(double x) => x * x;
}
