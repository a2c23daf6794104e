using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>What the history of a vehicle is read against: the fleet's figures, or the built-in ones before there is a fleet.</summary>
internal sealed record HistoryContext(Func<Vehicle, Position, NormalWear> Normal, Func<TreadSurvey, double> BiasMm, double RepeatSdMm, double TechnicianSdMm)
{
    /// <summary>Try other readings of the history as a whole against the first one found; the fleet's fit, which stands what a few vehicles get wrong, goes without.</summary>
    public bool Thorough { get; init; }

    /// <summary>How often each thing goes wrong.</summary>
    public ErrorRates Errors { get; init; } = ErrorRates.FromMemory;
}

/// <summary>A vehicle's surveys put on one distance axis, cut into fittings, and each survey explained.</summary>
internal sealed class VehicleHistory
{
    public required VehicleTread Tread { get; init; }
    public required IReadOnlyList<StoredSurvey> Surveys { get; init; }
    public required DistanceAxis Axis { get; init; }
    public required IReadOnlyList<Fitting> Fittings { get; init; }
    public required IReadOnlyList<SurveyJudgement> Judgements { get; init; }
    public required IReadOnlyList<InferredFitting> Inferred { get; init; }

    /// <summary>The first moment that no longer belongs to a day's knowledge.</summary>
    public static DateTimeOffset End(DateOnly asOf) => new(asOf.AddDays(1).ToDateTime(TimeOnly.MinValue), TimeSpan.Zero);

    public static VehicleHistory Of(VehicleTread tread, DateOnly asOf, HistoryContext context)
    {
        var end = End(asOf);
        var surveys = tread.Surveys.Where(s => s.Survey.At < end).OrderBy(s => s.Survey.At).ThenBy(s => s.SurveyId, StringComparer.Ordinal).ToList();
        var records = tread.Fittings.Where(f => f.At < end).OrderBy(f => f.At).ThenBy(f => f.Position).ThenBy(f => f.Event).ToList();
        var axis = DistanceAxis.Of(tread.Vehicle, [.. surveys.Select(s => s.Survey)]);
        var cuts = new FittingCuts(tread, surveys, records, axis);
        var reader = new HistoryReader(tread, surveys, axis, cuts, context);
        reader.Explain();
        return new VehicleHistory
        {
            Tread = tread,
            Surveys = surveys,
            Axis = axis,
            Fittings = reader.Fittings(),
            Judgements = reader.Judgements(),
            Inferred = reader.Inferred,
        };
    }
}
