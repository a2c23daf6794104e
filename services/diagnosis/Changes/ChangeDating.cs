using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Changes;

/// <summary>A series ready to be cut, and what is needed to judge it.</summary>
public sealed record ChangeSeries
{
    public required ChangeQuantity Quantity { get; init; }
    /// <summary>The axle, for wear.</summary>
    public int? Axle { get; init; }
    /// <summary>In any order.</summary>
    public required IReadOnlyList<ChangeReading> Readings { get; init; }
    /// <summary>Standard deviation of the error that the readings of one trip share, in the unit of the values.</summary>
    public required double TripSd { get; init; }
    /// <summary>In any order.</summary>
    public IReadOnlyList<ChangeEvent> Events { get; init; } = [];
}

/// <summary>How a series runs at its end: what the running charts start from until the next fit.</summary>
/// <param name="Quantity">What it is.</param>
/// <param name="Level">Level since the last change, with its error.</param>
/// <param name="TripSd">Standard deviation of a trip beyond its readings' own errors.</param>
/// <param name="Scale">Factor on all variances that this vehicle's own scatter asks for.</param>
/// <param name="Through">Time of the last reading used.</param>
/// <param name="TripsPerYear">How often a trip was read.</param>
/// <param name="Trips">Trips behind the level.</param>
public sealed record RunningLevel(ChangeQuantity Quantity, Estimate Level, double TripSd, double Scale, DateTimeOffset Through, double TripsPerYear, int Trips);

/// <summary>Finds and dates the changes of one series.</summary>
public static class ChangeDating
{
    /// <summary>Trips a level must rest on; fewer are left to the running charts.</summary>
    private const int LeastTrips = 2;

    /// <summary>Trips and days before a slope may be called a drift.</summary>
    private const int DriftTrips = 6;
    private const double DriftDays = 28;

    /// <summary>Trips on either side that the drawing in of gross trips looks at.</summary>
    private const int Reach = 2;

    /// <summary>How far from the range, days, a record still counts as having happened then: paper is dated by the day, and late.</summary>
    private const double NearDays = 2;

    /// <summary>Trips' worth that the stated errors count for against a vehicle's own scatter.</summary>
    private const double PriorTrips = 10;

    /// <summary>Error of a sensor's scale and of the road's gain, as a share of a step's size (from memory).</summary>
    private const double ScaleError = 0.02;

    private const double MostCorrelation = 0.6;

    /// <summary>Standard deviations at which a trip is not taken together with the others of its day.</summary>
    private const double ApartSd = 3.5;

    /// <summary>
    /// Price of a change in χ²: 2 ln n pays for the choice among n days (Yao, Stat. Probab. Lett. 6 (1988) 181), the constant for
    /// what noise alone finds within that choice and for tails beyond the normal; the tests hold it to a false change in twenty
    /// vehicle-years and more.
    /// </summary>
    public static double Penalty(int days) => 2 * Math.Log(Math.Max(2, days)) + 8;

    /// <returns>Changes in order of time; none with fewer than four trips.</returns>
    public static IReadOnlyList<DatedChange> Find(ChangeSeries series) => Read(series).Changes;

    /// <summary>Changes, and where the series stands since the last of them; null with fewer than four trips.</summary>
    public static (IReadOnlyList<DatedChange> Changes, RunningLevel? Now) Read(ChangeSeries series)
    {
        var trips = Trips.Of(series.Readings, series.TripSd);
        if (trips.Count < 2 * LeastTrips) return ([], null);
        var variance = series.TripSd * series.TripSd;
        var scale = OwnScatter(trips, variance);
        trips = DrawnIn(trips, variance * scale, scale);
        var (cost, segments) = Cut(trips, variance, scale);
        var correlated = Correlation(trips, cost, segments, variance, scale);
        if (correlated > 0)
        {
            scale *= (1 + correlated) / (1 - correlated);
            // Wider errors never bring a change where there was none.
            if (segments.Count > 1 || segments[0].Sloped) (cost, segments) = Cut(trips, variance, scale);
            else cost = TripCost(trips, variance, scale);
        }
        var wander = Wander(cost, segments);
        var changes = new List<DatedChange>();
        for (var k = 0; k < segments.Count; k++)
        {
            if (k > 0) changes.Add(Sudden(series, trips, cost, segments[k - 1], segments[k], variance, scale, wander));
            if (segments[k].Sloped && Drifts(trips, segments[k])) changes.Add(Drift(series, trips, cost, segments[k]));
        }
        return (changes.OrderBy(c => c.Likely).ThenBy(c => c.Form).ToArray(), Now(series, trips, cost, segments[^1], scale));
    }

    /// <summary>Costs of the trips, and the segments in trips; a change is sought between days, and dated among the trips afterwards.</summary>
    private static (SegmentCost Cost, IReadOnlyList<Segment> Segments) Cut(IReadOnlyList<Trip> trips, double tripVariance, double scale)
    {
        var trip = TripCost(trips, tripVariance, scale);
        var days = Days(trips, trip);
        var penalty = Penalty(days.Count - 1);
        var (t, y, w) = (new double[days.Count - 1], new double[days.Count - 1], new double[days.Count - 1]);
        for (var d = 0; d < t.Length; d++)
        {
            var (mean, variance, time) = trip.Mean(days[d], days[d + 1]);
            (t[d], y[d], w[d]) = (time, mean, 1 / variance);
        }
        var cut = Segmentation.Pelt(new SegmentCost(t, y, w, penalty, LeastSloped(t)), penalty, LeastTrips);
        return (trip, [.. cut.Segments.Select(s => new Segment(days[s.From], days[s.To], s.Sloped))]);
    }

    private static SegmentCost TripCost(IReadOnlyList<Trip> trips, double tripVariance, double scale) =>
        new([.. trips.Select(t => Day(trips, t))], [.. trips.Select(t => t.Mean)], [.. trips.Select(t => 1 / (scale * (t.OwnVariance + tripVariance)))]);

    /// <summary>
    /// First trips of the days, and the end. Trips of a day are taken together, which loses nothing to a change between days, unless
    /// one stands apart from those before it.
    /// </summary>
    private static List<int> Days(IReadOnlyList<Trip> trips, SegmentCost cost)
    {
        var starts = new List<int> { 0 };
        for (var i = 1; i < trips.Count; i++)
        {
            var (before, error, _) = cost.Mean(starts[^1], i);
            var (mean, variance, _) = cost.Mean(i, i + 1);
            if (trips[i].From.UtcDateTime.Date != trips[i - 1].From.UtcDateTime.Date || Math.Abs(mean - before) > ApartSd * Math.Sqrt(error + variance)) starts.Add(i);
        }
        starts.Add(trips.Count);
        return starts;
    }

    /// <summary>
    /// Factor on the stated variances from the scatter of neighbouring trips, which a step hardly touches; drawn to 1 by ten trips'
    /// worth, and never below one half.
    /// </summary>
    private static double OwnScatter(IReadOnlyList<Trip> trips, double tripVariance)
    {
        var differences = new double[trips.Count - 1];
        for (var i = 0; i < differences.Length; i++)
            differences[i] = Math.Abs(trips[i + 1].Mean - trips[i].Mean) / Math.Sqrt(trips[i + 1].OwnVariance + trips[i].OwnVariance + 2 * tripVariance);
        var sd = Medians.MadToSd * Medians.Median(differences);
        return Math.Max(0.5, (PriorTrips + differences.Length * sd * sd) / (PriorTrips + differences.Length));
    }

    private static IReadOnlyList<Trip> DrawnIn(IReadOnlyList<Trip> trips, double tripVariance, double scale)
    {
        var means = RunningMedian.DrawIn([.. trips.Select(t => t.Mean)], [.. trips.Select(t => Math.Sqrt(scale * t.OwnVariance + tripVariance))], Reach);
        return [.. trips.Select((t, i) => means[i] == t.Mean ? t : t.Moved(means[i] - t.Mean))];
    }

    /// <summary>First autocorrelation of the trips about their segments, drawn to zero by ten trips' worth: what wanders is not a change.</summary>
    private static double Correlation(IReadOnlyList<Trip> trips, SegmentCost cost, IReadOnlyList<Segment> segments, double tripVariance, double scale)
    {
        var (lagged, square, pairs) = (0.0, 0.0, 0);
        foreach (var s in segments)
        {
            var level = Level(cost, s);
            double? before = null;
            for (var i = s.From; i < s.To; i++)
            {
                var z = (trips[i].Mean - level(Day(trips, trips[i]))) / Math.Sqrt(scale * (trips[i].OwnVariance + tripVariance));
                square += z * z;
                if (before is { } b) (lagged, pairs) = (lagged + b * z, pairs + 1);
                before = z;
            }
        }
        // A segment's own mean takes about 1/n off each lag (Kendall, Biometrika 41 (1954) 403).
        var own = square > 0 ? lagged / square + segments.Count / (double)trips.Count : 0;
        return Math.Clamp(own * pairs / (pairs + PriorTrips), 0, MostCorrelation);
    }

    /// <summary>Halves of segments that the stated errors count for against the wander found.</summary>
    private const double PriorHalves = 2;

    /// <summary>
    /// Factor on the variance of a level because levels wander: shifts and drifts too small to be cut (tyres, pressures, seasons) sit in
    /// the trips' mean, and neither the scatter of neighbours nor their correlation shows them. Told by the two halves of each segment,
    /// which ought to agree; never below 1.
    /// </summary>
    private static double Wander(SegmentCost cost, IReadOnlyList<Segment> segments)
    {
        var (sum, count) = (PriorHalves, PriorHalves);
        foreach (var s in segments.Where(s => !s.Sloped && s.To - s.From >= 2 * LeastTrips))
        {
            var (first, firstVariance, _) = cost.Mean(s.From, (s.From + s.To) / 2);
            var (second, secondVariance, _) = cost.Mean((s.From + s.To) / 2, s.To);
            (sum, count) = (sum + (first - second) * (first - second) / (firstVariance + secondVariance), count + 1);
        }
        return Math.Max(1, sum / count);
    }

    /// <summary>As many trips as a drift must last at the series' usual pace.</summary>
    private static int LeastSloped(double[] days) => Math.Max(DriftTrips, (int)Math.Ceiling(days.Length * DriftDays / Math.Max(DriftDays, days[^1] - days[0])));

    private static bool Drifts(IReadOnlyList<Trip> trips, Segment s) =>
        s.To - s.From >= DriftTrips && (trips[s.To - 1].From - trips[s.From].From).TotalDays >= DriftDays;

    private static DatedChange Sudden(ChangeSeries series, IReadOnlyList<Trip> trips, SegmentCost cost, Segment a, Segment b, double tripVariance, double scale, double wander)
    {
        // A trip next to a neighbouring change may hold part of that change's step; it is left out where enough others are there.
        var first = a.From > 0 && a.To - a.From > LeastTrips ? a.From + 1 : a.From;
        var end = b.To < trips.Count && b.To - b.From > LeastTrips ? b.To - 1 : b.To;
        Trip[] between = [.. trips.Skip(first).Take(end - first)];
        // Slopes are taken about the place of the cut, so that the levels meet the step there.
        var at = (Day(trips, trips[b.From - 1]) + Day(trips, trips[b.From])) / 2;
        var (left, right) = (a.Sloped ? cost.Slope(a.From, a.To).Slope : 0, b.Sloped ? cost.Slope(b.From, b.To).Slope : 0);
        var (from, to, likely, size) = DatePosterior.Of(between, t => left * (DayOf(trips, t) - at), t => right * (DayOf(trips, t) - at), tripVariance, scale, series.Events);
        size = size with { StandardError = Math.Sqrt(wander * size.StandardError * size.StandardError + ScaleError * ScaleError * size.Value * size.Value) };
        var before = Level(cost, a)(at);
        return new()
        {
            Quantity = series.Quantity,
            Form = ChangeForm.Sudden,
            Axle = series.Axle,
            From = from,
            To = to,
            Likely = likely,
            Size = size,
            Before = before,
            After = before + size.Value,
            TripsBefore = a.To - a.From,
            TripsAfter = b.To - b.From,
            Happened = Happened(series.Events, from, to, likely),
            Rests = [.. Ids(trips.Take(a.To).TakeLast(2)), .. Ids(trips.Skip(b.From).Take(2))],
        };
    }

    private static DatedChange Drift(ChangeSeries series, IReadOnlyList<Trip> trips, SegmentCost cost, Segment s)
    {
        var (slope, variance) = cost.Slope(s.From, s.To);
        var (begin, end) = (trips[s.From].From, trips[s.To - 1].From);
        var days = (end - begin).TotalDays;
        var level = Level(cost, s);
        return new()
        {
            Quantity = series.Quantity,
            Form = ChangeForm.Drift,
            Axle = series.Axle,
            From = begin,
            To = end,
            Likely = begin + (end - begin) / 2,
            Size = new(slope * days, Math.Sqrt(variance) * days),
            Before = level(Day(trips, trips[s.From])),
            After = level(Day(trips, trips[s.To - 1])),
            TripsBefore = s.To - s.From,
            TripsAfter = s.To - s.From,
            Rests = [.. Ids(trips.Skip(s.From).Take(2)), .. Ids(trips.Take(s.To).TakeLast(2))],
        };
    }

    private static RunningLevel Now(ChangeSeries series, IReadOnlyList<Trip> trips, SegmentCost cost, Segment last, double scale)
    {
        var (mean, variance, _) = cost.Mean(last.From, last.To);
        if (last.Sloped) (mean, variance) = (Level(cost, last)(Day(trips, trips[last.To - 1])), 4 * variance);
        var years = Math.Max(1 / 52.0, (trips[^1].From - trips[0].From).TotalDays / 365.25);
        return new(series.Quantity, new(mean, Math.Sqrt(variance)), series.TripSd, scale, trips[^1].To, (trips.Count - 1) / years, last.To - last.From);
    }

    private static Func<double, double> Level(SegmentCost cost, Segment s)
    {
        var (mean, _, time) = cost.Mean(s.From, s.To);
        var slope = s.Sloped ? cost.Slope(s.From, s.To).Slope : 0;
        return day => mean + slope * (day - time);
    }

    internal static IReadOnlyList<ChangeEvent> Happened(IReadOnlyList<ChangeEvent> events, DateTimeOffset from, DateTimeOffset to, DateTimeOffset likely) =>
        [.. events.Where(e => e.At >= from.AddDays(-NearDays) && e.At <= to.AddDays(NearDays))
            .OrderBy(e => (e.At - likely).Duration()).ThenBy(e => e.At).ThenBy(e => e.Rests, StringComparer.Ordinal)];

    private static IEnumerable<string> Ids(IEnumerable<Trip> trips) => trips.SelectMany(t => t.Readings.Select(r => r.Rests)).Distinct().Take(3);

    private static double Day(IReadOnlyList<Trip> trips, Trip trip) => DayOf(trips, trip.From);

    private static double DayOf(IReadOnlyList<Trip> trips, DateTimeOffset at) => (at - trips[0].From).TotalDays;
}
