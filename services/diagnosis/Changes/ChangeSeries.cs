using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Changes;

/// <summary>One reading of a quantity that ought to stay as it is.</summary>
/// <param name="At">UTC.</param>
/// <param name="Trip">Readings of one trip share an error.</param>
/// <param name="Value">In the unit of the quantity.</param>
/// <param name="Variance">Of the reading alone, without the trip's share; above zero.</param>
/// <param name="Rests">Id of what it rests on.</param>
public readonly record struct ChangeReading(DateTimeOffset At, string Trip, double Value, double Variance, string Rests);

/// <summary>Readings of one trip, as one point of the series.</summary>
internal sealed record Trip
{
    /// <summary>In order of time, gross ones drawn in.</summary>
    public required IReadOnlyList<ChangeReading> Readings { get; init; }
    public required double Mean { get; init; }
    /// <summary>Variance of the mean without the trip's share.</summary>
    public required double OwnVariance { get; init; }
    public DateTimeOffset From => Readings[0].At;
    public DateTimeOffset To => Readings[^1].At;

    /// <summary>All readings moved by as much.</summary>
    public Trip Moved(double by) => this with { Mean = Mean + by, Readings = [.. Readings.Select(r => r with { Value = r.Value + by })] };
}

/// <summary>Readings of one vehicle put in order and gathered into trips; a function of the readings, not of their order.</summary>
internal static class Trips
{
    /// <summary>A silence as long as this, or a trip longer than the other, begins a new trip even where the stream goes on.</summary>
    private static readonly TimeSpan s_silence = TimeSpan.FromHours(1), s_longest = TimeSpan.FromHours(4);

    /// <summary>Readings on either side that the drawing in looks at within a trip.</summary>
    private const int Reach = 2;

    /// <summary>Readings on either side of a step within a trip.</summary>
    private const int LeastReadings = 2;

    /// <summary>χ² that a step within a trip must save before the trip is cut there: the step of a kerb struck on the way.</summary>
    private const double StepPrice = 30;

    /// <summary>A step within a trip is also several times what trips differ by, or it is the road's.</summary>
    private const double StepOverTripSd = 4;

    /// <param name="readings">In any order.</param>
    /// <param name="tripSd">Standard deviation of what the readings of one trip share.</param>
    public static IReadOnlyList<Trip> Of(IEnumerable<ChangeReading> readings, double tripSd)
    {
        var trips = new List<Trip>();
        var open = new List<ChangeReading>();
        var sorted = readings.Where(r => double.IsFinite(r.Value) && r.Variance > 0 && double.IsFinite(r.Variance)).ToArray();
        Array.Sort(sorted, InOrder);
        foreach (var r in sorted)
        {
            if (open.Count > 0 && (r.Trip != open[0].Trip || r.At - open[^1].At > s_silence || r.At - open[0].At > s_longest)) Close();
            open.Add(r);
        }
        if (open.Count > 0) Close();
        return trips;

        void Close()
        {
            var whole = Of(open);
            if (Step(whole, tripSd) is { } at) trips.AddRange(Of(open[..at]), Of(open[at..]));
            else trips.Add(whole);
            open.Clear();
        }
    }

    /// <summary>Where a trip holds a sudden step of its own, the first reading after it.</summary>
    private static int? Step(Trip trip, double tripSd)
    {
        var r = trip.Readings;
        if (r.Count < 2 * LeastReadings) return null;
        var whole = new LevelSums();
        foreach (var x in r) whole = whole.With(x.Value, 1 / x.Variance);
        var left = new LevelSums();
        var (best, gain) = (0, StepPrice);
        for (var at = 1; at <= r.Count - LeastReadings; at++)
        {
            left = left.With(r[at - 1].Value, 1 / r[at - 1].Variance);
            if (at < LeastReadings) continue;
            var right = whole.Less(left);
            var saved = whole.Scatter - left.Scatter - right.Scatter;
            if (saved > gain && Math.Abs(right.Mean - left.Mean) > StepOverTripSd * tripSd) (best, gain) = (at, saved);
        }
        return best > 0 ? best : null;
    }

    private static int InOrder(ChangeReading a, ChangeReading b)
    {
        var by = a.At.UtcTicks.CompareTo(b.At.UtcTicks);
        if (by == 0) by = string.CompareOrdinal(a.Trip, b.Trip);
        if (by == 0) by = string.CompareOrdinal(a.Rests, b.Rests);
        return by == 0 ? a.Value.CompareTo(b.Value) : by;
    }

    private static Trip Of(List<ChangeReading> readings)
    {
        double[] values = new double[readings.Count], deviations = new double[readings.Count];
        for (var i = 0; i < values.Length; i++) (values[i], deviations[i]) = (readings[i].Value, Math.Sqrt(readings[i].Variance));
        var drawn = RunningMedian.DrawIn(values, deviations, Reach);
        var kept = new ChangeReading[drawn.Length];
        var (weights, sum) = (0.0, 0.0);
        for (var i = 0; i < drawn.Length; i++)
        {
            kept[i] = readings[i] with { Value = drawn[i] };
            weights += 1 / readings[i].Variance;
            sum += drawn[i] / readings[i].Variance;
        }
        return new() { Readings = kept, Mean = sum / weights, OwnVariance = 1 / weights };
    }
}

/// <summary>Draws single gross values in to where their neighbours stand; a step stays as sharp as it is.</summary>
internal static class RunningMedian
{
    /// <summary>Standard deviations from the running median at which a value is held: Hampel's identifier with its usual 3.</summary>
    private const double Bound = 3;

    /// <param name="values">In order of time.</param>
    /// <param name="deviations">Standard deviation of each.</param>
    /// <param name="reach">Neighbours on either side; fewer at the ends.</param>
    /// <remarks>F. R. Hampel, Technometrics 27 (1985) 95; as a filter: Davies and Gather, J. Am. Stat. Assoc. 88 (1993) 782.</remarks>
    public static double[] DrawIn(ReadOnlySpan<double> values, ReadOnlySpan<double> deviations, int reach)
    {
        var drawn = values.ToArray();
        if (values.Length <= reach) return drawn;
        var window = new double[2 * reach + 1];
        for (var i = 0; i < values.Length; i++)
        {
            var (from, to) = (Math.Max(0, i - reach), Math.Min(values.Length, i + reach + 1));
            var part = window.AsSpan(0, to - from);
            values[from..to].CopyTo(part);
            part.Sort();
            var middle = Medians.OfSorted(part);
            var bound = Bound * deviations[i];
            drawn[i] = Math.Clamp(values[i], middle - bound, middle + bound);
        }
        return drawn;
    }
}
