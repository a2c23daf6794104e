using System.Globalization;
using WearWatch.Contracts.V1;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;
using Range = WearWatch.Contracts.V1.Range;

namespace WearWatch.Analysis;

/// <summary>Puts the fleet's study of hands and gauges into the contract's message.</summary>
internal static class ReaderStudyMessage
{
    /// <summary>Surveys below which a reader's figures are too few to be acted on (common practice, no source).</summary>
    private const int FewSurveys = 8;

    public static GetReaderStudyResponse Of((long Id, FleetSnapshot Snapshot) fit)
    {
        var study = fit.Snapshot.Wear.Readers;
        var message = new GetReaderStudyResponse
        {
            AsOf = fit.Snapshot.AsOf.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture),
            FleetFit = fit.Id,
            TechnicianSpread = Mm(study.TechnicianSpreadMm),
            GaugeSpread = Mm(study.GaugeSpreadMm),
            Repeatability = Mm(study.RepeatabilityMm),
        };
        message.Technicians.Add(study.Technicians.Select(Of));
        message.Gauges.Add(study.Gauges.Select(Of));
        return message;
    }

    private static ReaderFigures Of(ReaderRow row) => new()
    {
        Reader = row.Reader,
        Readings = row.Readings,
        Surveys = row.Surveys,
        Bias = new Range { Value = row.BiasMm, Low = row.BiasLow, High = row.BiasHigh, Unit = "mm" },
        Repeatability = new Range { Value = row.RepeatabilityMm, Low = row.RepeatabilityLow, High = row.RepeatabilityHigh, Unit = "mm" },
        Few = row.Surveys < FewSurveys,
    };

    private static Range? Mm(Interval? i) => i is { } known ? DiagnosisMessage.Of(known, "mm") : null;
}
