using System.Globalization;
using WearWatch.Contracts.V1;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;
using Range = WearWatch.Contracts.V1.Range;

namespace WearWatch.Analysis;

/// <summary>Puts the figures of one tyre into the contract's message: depth, rate, distance left and the dates that follow.</summary>
internal static class TyreMessage
{
    public static TyreDiagnosis Of(TyreFigures t, VehicleDiagnosis d)
    {
        var tyre = new TyreDiagnosis
        {
            Position = t.Position.ToString(),
            RateMmPer1000Km = DiagnosisMessage.Of(t.RateMmPer1000Km, "mm/1000 km"),
            RateBorrowed = t.RateBorrowed,
            DepthMm = DiagnosisMessage.Of(t.RemainingMm, "mm"),
            RemainingKm = Km(t.RemainingKm),
            LimitSource = t.LimitSource ?? "",
            EdgeSlopeMmPer1000Km = DiagnosisMessage.Of(t.EdgeSlopeMmPer1000Km, "mm/1000 km"),
            ToChangeKm = Km(t.ToChangeKm),
        };
        if (t.LimitMm is { } limit) tyre.LimitMm = limit;
        if (t.ChangeAtMm is { } change) tyre.ChangeAtMm = change;
        if (t.GoverningGroove is { } groove) tyre.GoverningGroove = groove;
        if (t.SurveyIds.Count > 0 && d.Surveys.TryGetValue(t.SurveyIds[^1], out var last))
        {
            tyre.GaugeStepMm = last.StepMm;
            tyre.LimitOn = Dates(t.RemainingKm, last.On, d.Use);
            tyre.ChangeOn = Dates(t.ToChangeKm, last.On, d.Use);
        }
        tyre.SurveyIds.Add(t.SurveyIds);
        tyre.Grooves.Add(t.Across.Select(g => new TreadGroove { Groove = g.Groove, DepthMm = g.DepthMm }));
        tyre.Points.Add(t.Points.Select(p => new Contracts.V1.WearPoint { DistanceKm = p.Km, DepthMm = p.DepthMm }));
        return tyre;
    }

    public static UnsafeTyre Of(Diagnosis.Tread.UnsafeTyre u, VehicleDiagnosis d)
    {
        var tyre = new UnsafeTyre
        {
            VehicleId = d.Figures.Vehicle.VehicleId,
            Depot = d.Figures.Depot.DepotId,
            Position = u.Position.ToString(),
            LimitSource = u.Limit?.Source ?? "",
            SurveyId = u.SurveyId,
            MeasuredAt = Google.Protobuf.WellKnownTypes.Timestamp.FromDateTimeOffset(u.At),
            Held = u.Held,
            Sentence = u.Sentence,
        };
        if (u.DepthMm is { } depth) tyre.DepthMm = depth;
        if (u.Limit is { } limit) tyre.LimitMm = limit.LimitMm;
        return tyre;
    }

    /// <summary>Use with the 90 % interval of a single week.</summary>
    public static Range? Use(VehicleUse use) => DiagnosisMessage.Of(new Estimate(use.KmPerWeek, use.WeekSdKm), "km");

    private static Range? Km(Interval? km) => km is { } known ? DiagnosisMessage.Of(known, "km") : null;

    private static DateRange? Dates(Interval? km, DateOnly from, VehicleUse use) =>
        km is { } left && use.Reaches(from, left) is { } on ? new DateRange { Likely = Day(on.Likely), Earliest = Day(on.Earliest), Latest = Day(on.Latest) } : null;

    private static string Day(DateOnly day) => day.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture);
}
