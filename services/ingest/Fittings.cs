using WearWatch.Diagnosis.Facts;
using WearWatch.Storage.Facts;
using Contract = WearWatch.Contracts.V1;

namespace WearWatch.Ingest;

/// <summary>Tyres, and what was done to them on a vehicle.</summary>
internal static class Fittings
{
    private const double LeastNewDepthMm = 1;

    public static FactBody Tyre(Contract.Tyre sent, Problems p)
    {
        var record = new Tyre
        {
            TyreId = p.Id(sent.TyreId, "tyre.tyre_id"),
            Number = p.Text(sent.Number, "tyre.number"),
            Pattern = p.Text(sent.Pattern, "tyre.pattern"),
            Size = p.Text(sent.Size, "tyre.size"),
            NewDepthMm = p.Converted(sent.HasNewDepth, sent.NewDepth, "tyre.new_depth", Measures.Mm(sent.DepthUnit), "tyre.depth_unit", LeastNewDepthMm, Limits.DepthMm, "mm"),
            RetreadCount = p.Whole(sent.RetreadCount, "tyre.retread_count", 0, 10),
        };
        return new FactBody(FactKind.Tyre, record, FactReader.Always) { TyreId = record.TyreId };
    }

    public static FactBody Fitting(Contract.FittingRecord sent, Problems p)
    {
        var record = new FittingRecord
        {
            VehicleId = p.Id(sent.VehicleId, "fitting.vehicle_id"),
            At = p.Time(sent.At, "fitting.at"),
            Event = p.Required<Contract.FittingEvent, FittingEvent>(sent.Event, "fitting.event"),
            Position = p.Position(sent.Position, "fitting.position"),
            FromPosition = sent.FromPosition.Length == 0 ? null : p.Position(sent.FromPosition, "fitting.from_position"),
            TyreId = p.OptionalId(sent.TyreId, "fitting.tyre_id"),
            Pattern = p.Text(sent.Pattern, "fitting.pattern"),
            NewDepthMm = p.Converted(sent.HasNewDepth, sent.NewDepth, "fitting.new_depth", Measures.Mm(sent.DepthUnit), "fitting.depth_unit", LeastNewDepthMm, Limits.DepthMm, "mm"),
            DistanceKm = p.Converted(sent.HasDistance, sent.Distance, "fitting.distance", Measures.Km(sent.DistanceUnit), "fitting.distance_unit", 0, Limits.DistanceKm, "km"),
            RetreadCount = p.Whole(sent.RetreadCount, "fitting.retread_count", 0, 10),
            Seasonal = sent.Seasonal,
            Winter = sent.Winter,
        };
        if (record.Event == FittingEvent.Moved && sent.FromPosition.Length == 0) p.Refuse("missing", "fitting.from_position", "is required where a tyre was moved");
        return new FactBody(FactKind.Fitting, record, record.At)
        {
            VehicleId = record.VehicleId,
            TyreId = record.TyreId,
            Judge = (context, judgement) => Judge(record, context, judgement),
        };
    }

    private static void Judge(FittingRecord record, FactContext context, Judgement judgement)
    {
        judgement.NeedsVehicle(context, record.VehicleId, "fitting.vehicle_id");
        if (context.Vehicle(record.VehicleId, record.At) is not { } vehicle) return;
        Has(vehicle, record.Position, "fitting.position", judgement);
        if (record.FromPosition is { } from) Has(vehicle, from, "fitting.from_position", judgement);
        DistanceBack(record, context, judgement);
    }

    /// <summary>Refuses a position that the vehicle does not have.</summary>
    public static bool Has(Vehicle vehicle, Position position, string field, Judgement judgement)
    {
        if (vehicle.Positions().Contains(position)) return true;
        judgement.Refuse("unknown_position", field,
            $"vehicle {vehicle.VehicleId} has no position {position}; it has {string.Join(' ', vehicle.Positions())}");
        return false;
    }

    /// <summary>Holds a fitting whose distance does not lie between those of the surveys on either side.</summary>
    private static void DistanceBack(FittingRecord record, FactContext context, Judgement judgement)
    {
        if (record.DistanceKm is not { } km) return;
        var surveys = context.Surveys(record.VehicleId).Where(s => s.Body.DistanceKm is not null).ToList();
        var before = surveys.LastOrDefault(s => s.At <= record.At);
        var after = surveys.FirstOrDefault(s => s.At > record.At);
        if (before is { } b && km < b.Body.DistanceKm)
            judgement.Hold("distance_back", "fitting.distance", $"{km:0} km is less than the {b.Body.DistanceKm:0} km of {b.At:yyyy-MM-dd}");
        else if (after is { Body.CounterReplaced: false } a && km > a.Body.DistanceKm)
            judgement.Hold("distance_back", "fitting.distance", $"{km:0} km is more than the {a.Body.DistanceKm:0} km of {a.At:yyyy-MM-dd}");
    }
}
