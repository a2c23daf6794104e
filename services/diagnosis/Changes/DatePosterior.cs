using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Changes;

/// <summary>
/// When a change fell, given that there is one between its neighbours: every gap between two readings is a candidate, the levels on
/// either side are integrated out under a flat prior, and within a trip the trip's shared error is integrated out too, so that a step
/// in the middle of a trip is dated to the minute.
/// </summary>
/// <remarks>One change in a normal sequence: A. F. M. Smith, Biometrika 62 (1975) 407.</remarks>
internal static class DatePosterior
{
    /// <summary>
    /// Prior weight of a candidate in days of exposure. A recorded event counts as so many ordinary days: about one sudden change in two
    /// years without a record, and one at every few such events (from memory). A logged trip counts as one day, for kerbs are met driving.
    /// </summary>
    private static double Days(EventKind kind) => kind switch { EventKind.KerbStrike => 200, EventKind.Workshop => 150, EventKind.SteerTyres => 100, _ => 30 };

    private const double TripDays = 1;

    /// <summary>Weight against the best candidate's that no quantile would notice.</summary>
    private const double Negligible = 1e-9;

    /// <summary>Least weight of a gap: minutes on the road count for more than minutes at rest.</summary>
    private const double ShortGapDays = 0.05;

    /// <summary>Log likelihood below the best gap from which on neither a gap nor a trip beside it is looked at: e⁻³⁰, where prior weights span e¹³.</summary>
    private const double Hopeless = 30;

    private readonly record struct Candidate(DateTimeOffset From, DateTimeOffset To, double LogWeight, double Size, double SizeVariance);

    /// <param name="trips">Those between the neighbouring changes.</param>
    /// <param name="left">Level of the stretch before as a function of time, less its value at the change: zero without drift.</param>
    /// <param name="right">The same for the stretch after.</param>
    /// <param name="tripVariance">Of the error that a trip's readings share.</param>
    /// <param name="scale">Factor on all variances.</param>
    /// <param name="events">What was recorded.</param>
    public static (DateTimeOffset From, DateTimeOffset To, DateTimeOffset Likely, Estimate Size) Of(IReadOnlyList<Trip> trips, Func<DateTimeOffset, double> left, Func<DateTimeOffset, double> right, double tripVariance, double scale, IReadOnlyList<ChangeEvent> events)
    {
        var candidates = Candidates(trips, left, right, tripVariance, scale, events);
        var top = candidates.Max(c => c.LogWeight);
        var parts = candidates.Select(c => (c.From, c.To, Weight: Math.Exp(c.LogWeight - top), c.Size, c.SizeVariance)).Where(c => c.Weight > Negligible).OrderBy(c => c.From).ThenBy(c => c.To).ToArray();
        var total = parts.Sum(p => p.Weight);
        var mean = parts.Sum(p => p.Weight * p.Size) / total;
        var variance = parts.Sum(p => p.Weight * (p.SizeVariance + (p.Size - mean) * (p.Size - mean))) / total;
        var mixture = parts.Select(p => (p.From, p.To, p.Weight / total)).ToArray();
        return (Quantile(mixture, 0.05), Quantile(mixture, 0.95), Quantile(mixture, 0.5), new(mean, Math.Sqrt(variance)));
    }

    private static List<Candidate> Candidates(IReadOnlyList<Trip> trips, Func<DateTimeOffset, double> left, Func<DateTimeOffset, double> right, double tripVariance, double scale, IReadOnlyList<ChangeEvent> events)
    {
        var n = trips.Count;
        var before = new LevelSums[n + 1];
        var after = new LevelSums[n + 1];
        for (var j = 0; j < n; j++) before[j + 1] = before[j].With(trips[j].Mean - left(Middle(trips[j])), Weight(trips[j]));
        for (var j = n - 1; j >= 0; j--) after[j] = after[j + 1].With(trips[j].Mean - right(Middle(trips[j])), Weight(trips[j]));
        var candidates = new List<Candidate>();
        var gaps = new (double Log, double Size, double Variance)[n];
        var top = double.NegativeInfinity;
        for (var j = 1; j < n; j++)
        {
            gaps[j] = Likelihood(before[j], after[j], null);
            top = Math.Max(top, gaps[j].Log);
        }
        for (var j = 1; j < n; j++)
            if (gaps[j].Log > top - Hopeless) Gap(trips[j - 1].To, trips[j].From, (trips[j].From - trips[j - 1].To).TotalDays, gaps[j]);
        for (var j = 1; j < n - 1; j++)
        {
            // A step on the way shows in the gaps before and after the trip too, if less well.
            if (Math.Max(gaps[j].Log, gaps[j + 1].Log) < top - Hopeless) continue;
            var readings = trips[j].Readings;
            // The outermost trips stay whole: one of them may hold the neighbouring change.
            for (var r = 1; r < readings.Count; r++)
            {
                var split = Split(readings, r, left, right, tripVariance, scale);
                Gap(readings[r - 1].At, readings[r].At, TripDays / (readings.Count - 1), Likelihood(before[j], after[j + 1], split));
            }
        }
        return candidates;

        double Weight(Trip t) => 1 / (scale * (t.OwnVariance + tripVariance));

        void Gap(DateTimeOffset from, DateTimeOffset to, double days, (double Log, double Size, double Variance) likelihood)
        {
            Add(from, to, Math.Max(ShortGapDays, days), likelihood.Log, likelihood.Size, likelihood.Variance);
            foreach (var e in events.Where(e => e.TimeKnown ? e.At > from && e.At <= to : e.At.UtcDateTime.Date.AddDays(1) > from.UtcDateTime && e.At.UtcDateTime.Date <= to.UtcDateTime))
            {
                var (begin, end) = e.TimeKnown ? (e.At, e.At) : (Later(from, Day(e.At)), Earlier(to, Day(e.At).AddDays(1)));
                Add(begin, end, Days(e.Kind), likelihood.Log, likelihood.Size, likelihood.Variance);
            }
        }

        void Add(DateTimeOffset from, DateTimeOffset to, double days, double log, double size, double variance) =>
            candidates.Add(new(from, to, log + Math.Log(days), size, variance));
    }

    /// <summary>Information that a trip cut in two gives on the levels before and after: its shared error is integrated out.</summary>
    private readonly record struct Cut(double P11, double P12, double P22, double B1, double B2, double Square);

    private static Cut Split(IReadOnlyList<ChangeReading> readings, int at, Func<DateTimeOffset, double> left, Func<DateTimeOffset, double> right, double tripVariance, double scale)
    {
        var (a, b, whole) = (new LevelSums(), new LevelSums(), new LevelSums());
        foreach (var r in readings) whole = whole.With(r.Value, 1 / (scale * r.Variance));
        for (var i = 0; i < at; i++) a = a.With(readings[i].Value - left(readings[i].At), 1 / (scale * readings[i].Variance));
        for (var i = at; i < readings.Count; i++) b = b.With(readings[i].Value - right(readings[i].At), 1 / (scale * readings[i].Variance));
        var trip = scale * tripVariance;
        var (s11, s22) = (1 / a.W + trip, 1 / b.W + trip);
        var determinant = s11 * s22 - trip * trip;
        var (p11, p12, p22) = (s22 / determinant, -trip / determinant, s11 / determinant);
        var (m1, m2) = (a.Mean, b.Mean);
        var square = p11 * m1 * m1 + 2 * p12 * m1 * m2 + p22 * m2 * m2;
        // Within the halves and, against the whole trip, what its own scatter would have cost uncut.
        return new(p11, p12, p22, p11 * m1 + p12 * m2, p12 * m1 + p22 * m2, square + a.Scatter + b.Scatter - whole.Scatter);
    }

    /// <summary>Log likelihood of a candidate with both levels integrated out, and the size of the step with its variance.</summary>
    private static (double Log, double Size, double Variance) Likelihood(LevelSums before, LevelSums after, Cut? cut)
    {
        var c = cut ?? default;
        var (h11, h12, h22) = (before.W + c.P11, c.P12, after.W + c.P22);
        var (b1, b2) = (before.Wy + c.B1, after.Wy + c.B2);
        var determinant = h11 * h22 - h12 * h12;
        var (l, r) = ((h22 * b1 - h12 * b2) / determinant, (h11 * b2 - h12 * b1) / determinant);
        var square = before.Wyy + after.Wyy + c.Square - (b1 * l + b2 * r);
        return (-0.5 * square - 0.5 * Math.Log(determinant), r - l, (h11 + h22 + 2 * h12) / determinant);
    }

    private static DateTimeOffset Quantile((DateTimeOffset From, DateTimeOffset To, double Weight)[] mixture, double share)
    {
        var (low, high) = (mixture.Min(m => m.From), mixture.Max(m => m.To));
        while (high - low > TimeSpan.FromSeconds(1))
        {
            var middle = low + (high - low) / 2;
            var below = mixture.Sum(m => m.Weight * (m.To <= middle ? 1 : m.From >= middle ? 0 : (middle - m.From) / (m.To - m.From)));
            if (below < share) low = middle;
            else high = middle;
        }
        return high;
    }

    private static DateTimeOffset Middle(Trip trip) => trip.From + (trip.To - trip.From) / 2;

    private static DateTimeOffset Day(DateTimeOffset at) => new(at.UtcDateTime.Date, TimeSpan.Zero);

    private static DateTimeOffset Later(DateTimeOffset a, DateTimeOffset b) => a > b ? a : b;

    private static DateTimeOffset Earlier(DateTimeOffset a, DateTimeOffset b) => a < b ? a : b;
}
