using WearWatch.Diagnosis.Facts;
using WearWatch.Storage.Facts;
using Contract = WearWatch.Contracts.V1;

namespace WearWatch.Ingest;

/// <summary>What drivers said and what came back from the workshop.</summary>
internal static class Workshop
{
    public static FactBody DriverReport(Contract.DriverReport sent, Problems p)
    {
        var record = new DriverReport
        {
            VehicleId = p.Id(sent.VehicleId, "driver_report.vehicle_id"),
            At = p.Time(sent.At, "driver_report.at"),
            Symptom = p.Required<Contract.Symptom, Symptom>(sent.Symptom, "driver_report.symptom"),
            Note = p.Text(sent.Note, "driver_report.note"),
        };
        return new FactBody(FactKind.DriverReport, record, record.At)
        {
            VehicleId = record.VehicleId,
            Judge = (context, judgement) => judgement.NeedsVehicle(context, record.VehicleId, "driver_report.vehicle_id"),
        };
    }

    public static FactBody Record(Contract.WorkshopRecord sent, Problems p)
    {
        if (sent.Angles.Count > Limits.AnglesPerRecord) p.Refuse("too_many", "workshop_record.angles", $"at most {Limits.AnglesPerRecord}");
        var record = new WorkshopRecord
        {
            VehicleId = p.Id(sent.VehicleId, "workshop_record.vehicle_id"),
            At = p.Time(sent.At, "workshop_record.at"),
            SentBecause = p.Named<Contract.SentBecause, SentBecause>(sent.SentBecause, "workshop_record.sent_because") ?? SentBecause.Unknown,
            Result = p.Named<Contract.WorkshopResult, WorkshopResult>(sent.Result, "workshop_record.result") ?? WorkshopResult.Unknown,
            Angles = sent.Angles.Take(Limits.AnglesPerRecord).Select((angle, i) => Angle(angle, $"workshop_record.angles[{i}]", p)).ToList(),
            DistanceKm = p.Converted(sent.HasDistance, sent.Distance, "workshop_record.distance", Measures.Km(sent.DistanceUnit), "workshop_record.distance_unit", 0, Limits.DistanceKm, "km"),
            Cost = (decimal?)p.Optional(sent.HasCost, sent.Cost, "workshop_record.cost", 0, Limits.Money),
            Note = p.Text(sent.Note, "workshop_record.note"),
        };
        return new FactBody(FactKind.WorkshopRecord, record, record.At)
        {
            VehicleId = record.VehicleId,
            Judge = (context, judgement) => Judge(record, context, judgement),
        };
    }

    private static MeasuredAngle Angle(Contract.MeasuredAngle sent, string path, Problems p)
    {
        var quantity = p.Required<Contract.Quantity, Quantity>(sent.Quantity, $"{path}.quantity");
        if (!quantity.IsAngle()) p.Refuse("not_an_angle", $"{path}.quantity", "is no alignment angle");
        var deg = Measures.Deg(sent.AngleUnit);
        return new MeasuredAngle
        {
            Quantity = quantity,
            Axle = sent.HasAxle ? p.Whole(sent.Axle, $"{path}.axle", 1, Limits.AxlesPerVehicle) : null,
            Side = p.Named<Contract.Side, Side>(sent.Side, $"{path}.side"),
            BeforeDeg = p.Converted(sent.HasBefore, sent.Before, $"{path}.before", deg, $"{path}.angle_unit", -Limits.AngleDeg, Limits.AngleDeg, "deg"),
            AfterDeg = p.Converted(sent.HasAfter, sent.After, $"{path}.after", deg, $"{path}.angle_unit", -Limits.AngleDeg, Limits.AngleDeg, "deg"),
            AsWritten = p.Text(sent.AsWritten, $"{path}.as_written"),
        };
    }

    private static void Judge(WorkshopRecord record, FactContext context, Judgement judgement)
    {
        judgement.NeedsVehicle(context, record.VehicleId, "workshop_record.vehicle_id");
        if (context.Vehicle(record.VehicleId, record.At) is not { } vehicle) return;
        for (var i = 0; i < record.Angles.Count; i++)
        {
            if (record.Angles[i].Axle is { } axle && vehicle.AxleAt(axle) is null)
                judgement.Refuse("unknown_axle", $"workshop_record.angles[{i}].axle", $"vehicle {vehicle.VehicleId} has {vehicle.Axles.Count} axles");
        }
    }
}
