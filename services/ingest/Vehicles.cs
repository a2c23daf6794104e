using WearWatch.Diagnosis.Facts;
using WearWatch.Storage.Facts;
using Contract = WearWatch.Contracts.V1;

namespace WearWatch.Ingest;

/// <summary>Depots, vehicles with their axles, couplings and usual routes.</summary>
internal static class Vehicles
{
    public static FactBody Depot(Contract.Depot sent, string depotId, Problems p)
    {
        var id = p.Id(sent.DepotId, "depot.depot_id");
        if (id != depotId) p.Refuse("depot_differs", "depot.depot_id", "a depot's own fact names itself in depot_id of the fact");
        var record = new Depot
        {
            DepotId = id,
            Name = p.Text(sent.Name, "depot.name"),
            TrafficSide = p.Required<Contract.TrafficSide, TrafficSide>(sent.TrafficSide, "depot.traffic_side"),
            Jurisdiction = p.RequiredText(sent.Jurisdiction, "depot.jurisdiction"),
            TimeZone = p.RequiredText(sent.TimeZone, "depot.time_zone"),
            Currency = Currency(sent.Currency, "depot.currency", p),
        };
        if (!TimeZoneInfo.TryFindSystemTimeZoneById(record.TimeZone, out _)) p.Refuse("time_zone_unknown", "depot.time_zone", "is not an IANA time zone such as Europe/Berlin");
        return new FactBody(FactKind.Depot, record, FactReader.Always);
    }

    /// <summary>ISO 4217: three capital letters; whether a currency by that code exists is not checked.</summary>
    public static string Currency(string text, string field, Problems p)
    {
        if (text.Length != 3 || !text.All(char.IsAsciiLetterUpper)) p.Refuse("currency_malformed", field, "must be an ISO 4217 code such as EUR");
        return text;
    }

    public static FactBody Vehicle(Contract.Vehicle sent, string depotId, Problems p)
    {
        var from = p.Date(sent.From, "vehicle.from");
        if (sent.Axles.Count is 0 or > Limits.AxlesPerVehicle) p.Refuse("axles_count", "vehicle.axles", $"must be 1 to {Limits.AxlesPerVehicle} axles");
        if (sent.TelematicsUnits.Count > Limits.UnitsPerVehicle) p.Refuse("too_many", "vehicle.telematics_units", $"at most {Limits.UnitsPerVehicle}");
        var record = new Vehicle
        {
            VehicleId = p.Id(sent.VehicleId, "vehicle.vehicle_id"),
            Depot = depotId,
            Class = p.Required<Contract.VehicleClass, VehicleClass>(sent.VehicleClass, "vehicle.vehicle_class"),
            Axles = sent.Axles.Take(Limits.AxlesPerVehicle).Select((axle, i) => Axle(axle, i, p)).ToList(),
            FleetNumber = p.Text(sent.FleetNumber, "vehicle.fleet_number"),
            Registration = p.Text(sent.Registration, "vehicle.registration"),
            Vin = p.Text(sent.Vin, "vehicle.vin"),
            From = from,
            KmPerWeek = p.Optional(sent.HasKmPerWeek, sent.KmPerWeek, "vehicle.km_per_week", 0, 10_000, "km"),
            GrossMassKg = p.Optional(sent.HasGrossMassKg, sent.GrossMassKg, "vehicle.gross_mass_kg", 300, 100_000, "kg"),
            WheelbaseM = p.Optional(sent.HasWheelbaseM, sent.WheelbaseM, "vehicle.wheelbase_m", 1, 20, "m"),
            SteeringRatio = p.Optional(sent.HasSteeringRatio, sent.SteeringRatio, "vehicle.steering_ratio", 5, 40),
            Assist = p.Named<Contract.SteeringAssist, SteeringAssist>(sent.Assist, "vehicle.assist") ?? SteeringAssist.Unknown,
            ConsumptionPer100Km = p.Optional(sent.HasConsumptionPer100Km, sent.ConsumptionPer100Km, "vehicle.consumption_per_100_km", 0, 1_000),
            Electric = sent.Electric,
            TelematicsUnits = sent.TelematicsUnits.Take(Limits.UnitsPerVehicle).Select((unit, i) => p.Text(unit, $"vehicle.telematics_units[{i}]")).OfType<string>().ToList(),
            LeavesOn = p.Date(sent.LeavesOn, "vehicle.leaves_on"),
            NextAlignmentOn = p.Date(sent.NextAlignmentOn, "vehicle.next_alignment_on"),
        };
        return new FactBody(FactKind.Vehicle, record, Start(from)) { VehicleId = record.VehicleId };
    }

    private static Axle Axle(Contract.Axle sent, int index, Problems p)
    {
        var path = $"vehicle.axles[{index}]";
        if (sent.Number != index + 1) p.Refuse("axle_number", $"{path}.number", "axles are numbered from 1 at the front without gaps");
        var deg = Measures.Deg(sent.AngleUnit);
        double? Angle(bool given, double value, string name, double least) =>
            p.Converted(given, value, $"{path}.{name}", deg, $"{path}.angle_unit", least, Limits.AngleDeg, "deg");
        return new Axle
        {
            Number = sent.Number,
            Suspension = p.Named<Contract.Suspension, Suspension>(sent.Suspension, $"{path}.suspension") ?? Suspension.Unknown,
            Steered = sent.Steered,
            Driven = sent.Driven,
            Lifting = sent.Lifting,
            Duals = sent.Duals,
            TargetTotalToeDeg = Angle(sent.HasTargetTotalToe, sent.TargetTotalToe, "target_total_toe", -Limits.AngleDeg),
            TargetCamberDeg = Angle(sent.HasTargetCamber, sent.TargetCamber, "target_camber", -Limits.AngleDeg),
            ToleranceTotalToeDeg = Angle(sent.HasToleranceTotalToe, sent.ToleranceTotalToe, "tolerance_total_toe", 0),
            ToleranceCamberDeg = Angle(sent.HasToleranceCamber, sent.ToleranceCamber, "tolerance_camber", 0),
            TyreSize = p.Text(sent.TyreSize, $"{path}.tyre_size"),
            TyrePrice = (decimal?)p.Optional(sent.HasTyrePrice, sent.TyrePrice, $"{path}.tyre_price", 0, Limits.Money),
            PressureKpa = p.Optional(sent.HasPressureKpa, sent.PressureKpa, $"{path}.pressure_kpa", 100, 1_500, "kPa"),
            TrackM = p.Optional(sent.HasTrackM, sent.TrackM, $"{path}.track_m", 0.8, 3, "m"),
            ToeAdjustable = sent.HasToeAdjustable ? sent.ToeAdjustable : null,
            CamberAdjustable = sent.HasCamberAdjustable ? sent.CamberAdjustable : null,
            CasterAdjustable = sent.HasCasterAdjustable ? sent.CasterAdjustable : null,
            ScrubRadiusMm = p.Optional(sent.HasScrubRadiusMm, sent.ScrubRadiusMm, $"{path}.scrub_radius_mm", -150, 150, "mm"),
            TrailMm = p.Optional(sent.HasTrailMm, sent.TrailMm, $"{path}.trail_mm", -50, 100, "mm"),
        };
    }

    public static FactBody Coupling(Contract.Coupling sent, Problems p)
    {
        var record = new Coupling
        {
            TrailerId = p.Id(sent.TrailerId, "coupling.trailer_id"),
            TractorId = p.Id(sent.TractorId, "coupling.tractor_id"),
            From = p.Time(sent.From, "coupling.from"),
            To = sent.To is null ? null : p.Time(sent.To, "coupling.to"),
        };
        if (record.To < record.From) p.Refuse("time_back", "coupling.to", "lies before from");
        if (record.TrailerId == record.TractorId) p.Refuse("same_vehicle", "coupling.tractor_id", "a vehicle does not tow itself");
        return new FactBody(FactKind.Coupling, record, record.From)
        {
            VehicleId = record.TrailerId,
            TractorId = record.TractorId,
            Judge = (context, judgement) =>
            {
                judgement.NeedsVehicle(context, record.TrailerId, "coupling.trailer_id");
                judgement.NeedsVehicle(context, record.TractorId, "coupling.tractor_id");
                if (context.Vehicle(record.TrailerId, record.From) is { Class: not VehicleClass.Trailer })
                    judgement.Refuse("not_a_trailer", "coupling.trailer_id", $"vehicle {record.TrailerId} is not a trailer");
            },
        };
    }

    public static FactBody UsualRoute(Contract.UsualRoute sent, Problems p)
    {
        var from = p.Date(sent.From, "usual_route.from");
        var record = new UsualRoute
        {
            VehicleId = p.Id(sent.VehicleId, "usual_route.vehicle_id"),
            From = from,
            Route = p.Text(sent.Route, "usual_route.route"),
            Loop = sent.Loop,
            LeftTurnShare = p.Optional(sent.HasLeftTurnShare, sent.LeftTurnShare, "usual_route.left_turn_share", 0, 1),
            Urban = sent.Urban,
        };
        return new FactBody(FactKind.UsualRoute, record, Start(from))
        {
            VehicleId = record.VehicleId,
            Judge = (context, judgement) => judgement.NeedsVehicle(context, record.VehicleId, "usual_route.vehicle_id"),
        };
    }

    /// <summary>Midnight (UTC) of a date; from ever where there is none.</summary>
    public static DateTimeOffset Start(DateOnly? date) =>
        date is { } day ? new DateTimeOffset(day.ToDateTime(TimeOnly.MinValue), TimeSpan.Zero) : FactReader.Always;
}
