using WearWatch.Diagnosis.Changes;

namespace WearWatch.Diagnosis.Tests.Changes;

/// <summary>Readings of a vehicle trip by trip, with a known change.</summary>
internal sealed class SteeringHistory(int seed)
{
    public static readonly DateTimeOffset First = new(2025, 1, 6, 10, 0, 0, TimeSpan.Zero);

    private readonly Random _random = new(seed);

    public int Trips { get; init; } = 104;
    public double DaysBetween { get; init; } = 7;
    public int RunsPerTrip { get; init; } = 8;
    public double RunSd { get; init; } = 0.3;
    public double TripSd { get; init; } = 0.3;
    /// <summary>Days after the first trip; never where infinite.</summary>
    public double StepAtDay { get; init; } = double.PositiveInfinity;
    public double Step { get; init; } = 3;
    public double DriftPerDay { get; init; }
    /// <summary>Correlation of one trip's error with the next one's.</summary>
    public double TripCorrelation { get; init; }
    /// <summary>Degrees of freedom of Student's law of the errors; normal where 0.</summary>
    public int Freedom { get; init; }
    public IReadOnlyList<ChangeEvent> Events { get; init; } = [];

    public double Normal() => Math.Sqrt(-2 * Math.Log(1 - _random.NextDouble())) * Math.Cos(2 * Math.PI * _random.NextDouble());

    public double Uniform() => _random.NextDouble();

    /// <summary>A draw of variance 1.</summary>
    private double Error()
    {
        if (Freedom == 0) return Normal();
        var squares = Enumerable.Range(0, Freedom).Sum(_ => Math.Pow(Normal(), 2));
        return Normal() / Math.Sqrt(squares / Freedom) / Math.Sqrt(Freedom / (Freedom - 2.0));
    }

    public ChangeSeries Make()
    {
        var readings = new List<ChangeReading>();
        var shared = TripSd * Error();
        for (var t = 0; t < Trips; t++)
        {
            shared = TripCorrelation * shared + Math.Sqrt(1 - TripCorrelation * TripCorrelation) * TripSd * Error();
            var day = t * DaysBetween;
            for (var r = 0; r < RunsPerTrip; r++)
            {
                var at = day + r * 5 / 1440.0;
                var level = 1 + (at >= StepAtDay ? Step : 0) + DriftPerDay * at;
                readings.Add(new(First.AddDays(at), $"trip-{t:000}", level + shared + RunSd * Error(), RunSd * RunSd, $"trip-{t:000}/{r}"));
            }
        }
        return new() { Quantity = ChangeQuantity.OffCentreAngle, Readings = readings, TripSd = TripSd, Events = Events };
    }
}
