using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Changes;

/// <summary>
/// Watches the trips that came since the last fleet fit with a CUSUM and an EWMA. What it raises is provisional: the next fit, which
/// sees the roads anew, dates the change or drops it.
/// </summary>
public static class RunningWatch
{
    /// <summary>False alarms of one series of a vehicle in order, per year: one in twenty years, shared by the two charts.</summary>
    public const double FalseAlarmsPerYear = 0.05;

    /// <summary>Slack of the CUSUM: soonest for a shift of one standard deviation of a trip.</summary>
    public const double Slack = 0.5;

    /// <summary>Memory of the EWMA, km (from memory): some weeks of a van, one of a long-haul truck.</summary>
    public const double MemoryKm = 3000;

    /// <summary>Trips that must agree: one alone is a load, a wind or a sensor more often than a bent arm.</summary>
    private const int LeastTrips = 2;

    /// <summary>A trip counts for at most so many standard deviations, so that one gross trip cannot fill a chart.</summary>
    private const double MostPerTrip = 4;

    private const int Classes = 40;

    /// <param name="series">With the readings since the level's last one; older ones are left out.</param>
    /// <param name="level">Where the series stood at the fit.</param>
    /// <param name="kmPerWeek">The vehicle's use, above zero.</param>
    /// <returns>At most one change, provisional; null while the charts are quiet.</returns>
    public static DatedChange? Watch(ChangeSeries series, RunningLevel level, double kmPerWeek)
    {
        var trips = Trips.Of(series.Readings.Where(r => r.At > level.Through), level.TripSd);
        if (trips.Count < LeastTrips) return null;
        var (cusumLimit, ewmaLimit) = Limits(level.TripsPerYear, kmPerWeek);
        var (cusum, ewma, last) = (new Cusum(), new Ewma(), level.Through);
        for (var i = 0; i < trips.Count; i++)
        {
            var trip = trips[i];
            var sd = Math.Sqrt(level.Scale * (trip.OwnVariance + level.TripSd * level.TripSd) + level.Level.StandardError * level.Level.StandardError);
            var z = Math.Clamp((trip.Mean - level.Level.Value) / sd, -MostPerTrip, MostPerTrip);
            cusum = cusum.With(z, Slack);
            ewma = ewma.With(z, Ewma.Weight((trip.From - last).TotalDays / 7 * kmPerWeek, MemoryKm));
            last = trip.From;
            var up = cusum.Up >= cusum.Down;
            var since = up ? cusum.UpSince : cusum.DownSince;
            if (since >= LeastTrips && (Math.Max(cusum.Up, cusum.Down) > cusumLimit || ewma.Beyond(ewmaLimit) && ewma.Z > 0 == up)) return Raised(series, level, trips, i - since + 1);
        }
        return null;
    }

    /// <summary>Limits of the two charts, each for half of the false alarms.</summary>
    public static (double Cusum, double Ewma) Limits(double tripsPerYear, double kmPerWeek)
    {
        var wanted = Math.Max(100, 2 * tripsPerYear / FalseAlarmsPerYear);
        var weight = Math.Clamp(Ewma.Weight(kmPerWeek * 52.18 / Math.Max(1, tripsPerYear), MemoryKm), 0.05, 1);
        return (RunLength.LimitFor(wanted, h => RunLength.Cusum(Slack, h, classes: Classes)), RunLength.LimitFor(wanted, l => RunLength.Ewma(weight, l, classes: Classes)));
    }

    /// <summary>The change as the trips since the chart last stood at zero show it.</summary>
    private static DatedChange Raised(ChangeSeries series, RunningLevel level, IReadOnlyList<Trip> trips, int first)
    {
        var (weights, sum) = (0.0, 0.0);
        foreach (var t in trips.Skip(first))
        {
            var w = 1 / (level.Scale * (t.OwnVariance + level.TripSd * level.TripSd));
            (weights, sum) = (weights + w, sum + w * t.Mean);
        }
        var size = new Estimate(sum / weights, Math.Sqrt(1 / weights)) - level.Level;
        var from = first > 0 ? trips[first - 1].From : level.Through;
        var to = trips[first].To;
        return new()
        {
            Quantity = series.Quantity,
            Axle = series.Axle,
            Form = ChangeForm.Sudden,
            From = from,
            To = to,
            Likely = from + (to - from) / 2,
            Size = size,
            Before = level.Level.Value,
            After = level.Level.Value + size.Value,
            TripsBefore = level.Trips,
            TripsAfter = trips.Count - first,
            Happened = ChangeDating.Happened(series.Events, from, to, from + (to - from) / 2),
            Provisional = true,
            Rests = [.. trips.Skip(first).SelectMany(t => t.Readings.Select(r => r.Rests)).Distinct().Take(3)],
        };
    }
}
