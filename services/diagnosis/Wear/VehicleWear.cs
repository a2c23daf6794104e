using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>What the gauge says of one vehicle.</summary>
public sealed record VehicleWearResult
{
    /// <summary>One per position of the vehicle, front to rear, left before right.</summary>
    public required IReadOnlyList<TyreFigures> Tyres { get; init; }
    /// <summary>One per survey, oldest first.</summary>
    public required IReadOnlyList<SurveyJudgement> Surveys { get; init; }
    /// <summary>How the places wore whatever tyres stood there, around every possible onset of a fault; null without readings.</summary>
    public VehicleWearHistory? History { get; init; }
    public required IReadOnlyList<InferredFitting> Inferred { get; init; }
    /// <summary>Use, km per week, from the counter where it was read, to turn distances into dates.</summary>
    public required double KmPerWeek { get; init; }
    /// <summary>Distance run since the last survey until the as-of date, km, as far as known.</summary>
    public Estimate? KmSinceLastSurvey { get; init; }
}

/// <summary>Wear of the tyres now on one vehicle, read against its fleet.</summary>
public static class VehicleWear
{
    public static VehicleWearResult Estimate(VehicleTread vehicle, FleetWear fleet, DateOnly asOf)
    {
        var technicianSd = fleet.Technicians.Count > 1 ? 0.12 : GaugeNoise.TechnicianSdMm;
        var context = new HistoryContext(fleet.For, s => fleet.BiasOf(s).Mm, GaugeNoise.RepeatSdMm, technicianSd) { Thorough = true, Errors = fleet.Errors };
        var history = VehicleHistory.Of(vehicle, asOf, context);
        var readers = history.Surveys.Select(s => s.Survey.Technician).OfType<string>().Distinct().Order(StringComparer.Ordinal).ToList();
        // The bias itself is already off the depths; its error is shared by the surveys of one reader.
        var biases = history.Surveys.Select(s => (new Estimate(0, fleet.BiasOf(s.Survey).OwnSd), s.Survey.Technician is { } t ? readers.IndexOf(t) : -1)).ToList();
        var tyres = new TyreWear(vehicle, fleet, asOf, history, biases);
        var end = new DateTimeOffset(asOf.ToDateTime(TimeOnly.MinValue), TimeSpan.Zero);
        return new VehicleWearResult
        {
            Tyres = [.. history.Fittings.Where(f => f.Current).OrderBy(f => f.Position).Select(tyres.Figures)],
            Surveys = history.Judgements,
            History = new WearAround(history, fleet, biases, asOf).Read(),
            Inferred = history.Inferred,
            KmPerWeek = history.Axis.KmPerWeek,
            KmSinceLastSurvey = history.Surveys.Count == 0 ? null : history.Axis.At(end > history.Surveys[^1].Survey.At ? end : history.Surveys[^1].Survey.At) is var now
                ? new Estimate(now.Value - history.Axis.At(history.Surveys[^1].Survey.At).Value, now.StandardError) : null,
        };
    }
}
