using System.Globalization;
using Google.Protobuf;
using WearWatch.Diagnosis.Rules;
using WearWatch.Storage.Analysis;
using FindingMessage = WearWatch.Contracts.V1.Finding;

namespace WearWatch.Analysis;

/// <summary>Gives findings their lasting ids and puts a diagnosis into the form in which it is stored.</summary>
internal static class Publication
{
    public static DiagnosisToPublish Of(DueVehicle due, VehicleDiagnosis d, IReadOnlyList<OpenFindingKey> open, DateTimeOffset now)
    {
        var known = open.ToDictionary(f => (f.Kind, f.Place));
        var messages = new List<FindingMessage>();
        var findings = new List<FindingToPublish>();
        // Two rules may see the same condition in the same place; the stronger one speaks.
        foreach (var finding in d.Findings.GroupBy(f => (Kind: Kind(f), Place: Place(f))).Select(g => (g.Key, Strongest: g.MaxBy(f => f.Strength)!)))
        {
            var before = known.GetValueOrDefault(finding.Key);
            var message = DiagnosisMessage.Of(finding.Strongest, d.Figures);
            message.Id = before?.FindingId ?? $"{due.VehicleId}.{finding.Key.Kind}.{finding.Key.Place}.r{due.Revision}";
            message.OpenedAt = Google.Protobuf.WellKnownTypes.Timestamp.FromDateTimeOffset(before is null ? now : DateTime.SpecifyKind(before.OpenedAt, DateTimeKind.Utc));
            message.OpenedBecause = before?.OpenedBecause ?? Because(finding.Strongest);
            messages.Add(message);
            findings.Add(new FindingToPublish
            {
                FindingId = message.Id,
                Kind = finding.Key.Kind,
                Place = finding.Key.Place,
                AlignmentMends = finding.Strongest.AlignmentMends,
                Safety = finding.Strongest.Kind is FindingKind.BelowLimit or FindingKind.UnsafeTyre,
                Strength = finding.Strongest.Strength,
                Body = JsonFormatter.Default.Format(message),
                Because = message.OpenedBecause,
            });
        }
        var diagnosis = DiagnosisMessage.Of(d);
        diagnosis.Findings.Add(messages);
        return new DiagnosisToPublish
        {
            Due = due,
            VehicleClass = diagnosis.VehicleClass,
            FleetFit = d.FleetFit,
            Method = Diagnosing.Method,
            AsOf = diagnosis.AsOf,
            MisalignedProbability = d.Verdict.MisalignedProbability,
            Body = JsonFormatter.Default.Format(diagnosis),
            Findings = findings,
            UnsafeTyres = [.. d.UnsafeTyres.Select(u => new UnsafeTyreToPublish
            {
                Position = u.Position.ToString(),
                DepthMm = u.DepthMm,
                LimitMm = u.Limit?.LimitMm,
                LimitSource = u.Limit?.Source ?? "",
                SurveyId = u.SurveyId,
                MeasuredAt = u.At.UtcDateTime,
                Held = u.Held,
                Sentence = u.Sentence,
            })],
        };
    }

    internal static string Kind(Finding finding) =>
        DiagnosisMessage.Snake(finding.Kind.ToString());

    private static string Place(Finding finding) => string.Create(CultureInfo.InvariantCulture,
        $"{(finding.Axle is { } axle ? axle : "vehicle")}{finding.Side switch { Diagnosis.Facts.Side.Left => "L", Diagnosis.Facts.Side.Right => "R", _ => "" }}{finding.Dual switch { Diagnosis.Facts.Dual.Outer => "O", Diagnosis.Facts.Dual.Inner => "I", _ => "" }}");

    private static string Because(Finding finding) => finding.EvidenceFor.Count > 0 ? finding.EvidenceFor[0].Statement : finding.Sentence;
}
