using WearWatch.Diagnosis.Facts;
using WearWatch.Storage.Facts;
using Contract = WearWatch.Contracts.V1;

namespace WearWatch.Ingest;

/// <summary>Tread surveys: their form here; what depths, positions and distances can be is judged by <see cref="SurveyJudge"/>.</summary>
internal static class Surveys
{
    private const double DefaultResolutionMm = 0.1;

    public static FactBody Survey(Contract.TreadSurvey sent, Problems p)
    {
        var mm = Measures.Mm(sent.DepthUnit);
        if (mm is null) p.Unit("survey.depth_unit");
        if (sent.Tyres.Count is 0 or > Limits.TyresPerSurvey) p.Refuse("tyres_count", "survey.tyres", $"must be 1 to {Limits.TyresPerSurvey} tyres");
        var source = p.Named<Contract.DistanceSource, DistanceSource>(sent.DistanceSource, "survey.distance_source");
        var record = new TreadSurvey
        {
            VehicleId = p.Id(sent.VehicleId, "survey.vehicle_id"),
            At = p.Time(sent.At, "survey.at"),
            Technician = p.Text(sent.Technician, "survey.technician"),
            Gauge = p.Text(sent.Gauge, "survey.gauge"),
            ResolutionMm = p.Converted(sent.HasResolution, sent.Resolution, "survey.resolution", mm, "survey.depth_unit", 0.001, 5, "mm")
                ?? (sent.DepthUnit == Contract.DepthUnit.ThirtySecondsInch ? Measures.MmPer32ndInch : DefaultResolutionMm),
            Place = p.OptionalId(sent.Place, "survey.place"),
            DistanceKm = p.Converted(sent.HasDistance, sent.Distance, "survey.distance", Measures.Km(sent.DistanceUnit), "survey.distance_unit", 0, Limits.DistanceKm, "km"),
            DistanceSource = source ?? (sent.HasDistance ? DistanceSource.Odometer : DistanceSource.None),
            CounterReplaced = sent.CounterReplaced,
            Finished = sent.Finished,
            Tyres = sent.Tyres.Take(Limits.TyresPerSurvey).Select((tyre, i) => Tyre(tyre, $"survey.tyres[{i}]", mm ?? 1, p)).ToList(),
        };
        if (sent.HasDistance && source == DistanceSource.None) p.Refuse("distance_source", "survey.distance_source", "is none although a distance is given");
        return new FactBody(FactKind.Survey, record, record.At)
        {
            VehicleId = record.VehicleId,
            Readings = record.Tyres.Sum(t => t.Depths.Count),
            Judge = (context, judgement) => SurveyJudge.Judge(record, context, judgement),
        };
    }

    private static TyreReadings Tyre(Contract.TyreReadings sent, string path, double mm, Problems p)
    {
        if (sent.Grooves.Count > Limits.DepthsPerTyre) p.Refuse("too_many", $"{path}.grooves", $"at most {Limits.DepthsPerTyre} depths a tyre");
        var notReached = p.Text(sent.NotReached, $"{path}.not_reached");
        if (notReached is not null && sent.Grooves.Count > 0) p.Refuse("not_reached_but_read", $"{path}.not_reached", "a tyre that was not reached has no depths");
        return new TyreReadings
        {
            Position = p.Position(sent.Position, $"{path}.position"),
            Depths = sent.Grooves.Take(Limits.DepthsPerTyre).Select((depth, i) => Depth(depth, $"{path}.grooves[{i}]", mm, p)).ToList(),
            PressureKpa = p.Optional(sent.HasPressureKpa, sent.PressureKpa, $"{path}.pressure_kpa", 0, Limits.PressureKpa, "kPa"),
            PressureWarm = sent.PressureWarm,
            HandRub = p.Named<Contract.HandRub, HandRub>(sent.HandRub, $"{path}.hand_rub") ?? HandRub.NotTaken,
            Seen = sent.Seen.Select((seen, i) => p.Required<Contract.Seen, Seen>(seen, $"{path}.seen[{i}]")).Distinct().ToList(),
            NotReached = notReached,
        };
    }

    private static GrooveDepth Depth(Contract.GrooveDepth sent, string path, double mm, Problems p) => new(
        p.Whole(sent.Groove, $"{path}.groove", 0, Limits.Groove),
        p.Finite(sent.Depth * mm, $"{path}.depth"),
        p.Optional(sent.HasClockDeg, sent.ClockDeg, $"{path}.clock_deg", 0, 360, "deg"),
        sent.HasOutboardEdge ? p.Number(sent.OutboardEdge * mm, $"{path}.outboard_edge", -Limits.DepthMm, Limits.DepthMm, "mm") : null);
}
