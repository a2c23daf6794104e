using WearWatch.Contracts.V1;

namespace WearWatch.Import;

/// <summary>
/// Turns the files of an import folder into facts of the contract, in the order in which they must be sent. The format
/// is written down in demo-data/README.md; column lists here repeat it and nothing else does.
/// </summary>
internal sealed class FolderFacts(string folder)
{
    private const string Id = "id! replaces recorded_by ";

    private readonly Dictionary<string, string> _homeDepot = [];

    /// <summary>Rows and files that could not be read.</summary>
    public List<RowProblem> Problems { get; } = [];

    /// <summary>Facts of each file, sent file by file.</summary>
    public IEnumerable<(string File, IReadOnlyList<Fact> Facts)> Files()
    {
        yield return Rows("depots", Id + "depot_id! name traffic_side! jurisdiction! time_zone! currency!", Depot);
        yield return Vehicles();
        yield return Rows("couplings", Id + "trailer_id! tractor_id! from! to", (row, fact) =>
        {
            fact.DepotId = Home(row, "trailer_id");
            fact.Coupling = new() { TrailerId = row.Text("trailer_id"), TractorId = row.Text("tractor_id"), From = row.Time("from"), To = row.Time("to") };
        });
        yield return Rows("tyres", Id + "tyre_id! number pattern size new_depth depth_unit retread_count depot_id", (row, fact) =>
        {
            fact.DepotId = row.Text("depot_id") is { Length: > 0 } depot ? depot : FirstDepot;
            fact.Tyre = new() { TyreId = row.Text("tyre_id"), Number = row.Text("number"), Pattern = row.Text("pattern"), Size = row.Text("size"), DepthUnit = DepthUnitOf(row), RetreadCount = row.Whole("retread_count") ?? 0 };
            if (row.Number("new_depth") is { } depth) fact.Tyre.NewDepth = depth;
        });
        yield return Rows("fittings", Id + "vehicle_id! at! event! position! from_position tyre_id pattern new_depth depth_unit distance distance_unit retread_count seasonal winter", Fitting);
        yield return Surveys();
        yield return Rows("driver_reports", Id + "vehicle_id! at! symptom! note", (row, fact) =>
            fact.DriverReport = new() { VehicleId = row.Text("vehicle_id"), At = row.Time("at"), Symptom = row.Enum<Symptom>("symptom"), Note = row.Text("note") });
        yield return WorkshopRecords();
        yield return Rows("routes", Id + "vehicle_id! from route loop left_turn_share urban", (row, fact) =>
        {
            fact.UsualRoute = new() { VehicleId = row.Text("vehicle_id"), From = row.Text("from"), Route = row.Text("route"), Loop = row.Flag("loop"), Urban = row.Flag("urban") };
            if (row.Number("left_turn_share") is { } share) fact.UsualRoute.LeftTurnShare = share;
        });
        yield return Rows("prices", Id + "depot_id! kind! class amount! currency! from!", (row, fact) =>
            fact.Price = new() { Kind = row.Enum<PriceKind>("kind"), VehicleClass = row.Enum<VehicleClass>("class"), Amount = row.Number("amount") ?? double.NaN, Currency = row.Text("currency"), From = row.Text("from") });
        yield return Rows("limits", Id + "depot_id! jurisdiction! class axle winter_only limit! depth_unit source! from!", (row, fact) =>
        {
            fact.DepthLimit = new() { Jurisdiction = row.Text("jurisdiction"), VehicleClass = row.Enum<VehicleClass>("class"), WinterOnly = row.Flag("winter_only"), Limit = row.Number("limit") ?? double.NaN, DepthUnit = DepthUnitOf(row), Source = row.Text("source"), From = row.Text("from") };
            if (row.Whole("axle") is { } axle) fact.DepthLimit.Axle = axle;
        });
        yield return Rows("tolerances", Id + "depot_id! class! quantity! plus_minus! angle_unit from!", (row, fact) =>
            fact.Tolerance = new() { VehicleClass = row.Enum<VehicleClass>("class"), Quantity = row.Enum<Quantity>("quantity"), PlusMinus = row.Number("plus_minus") ?? double.NaN, AngleUnit = AngleUnitOf(row), From = row.Text("from") });
        yield return Rows("settings", Id + "depot_id! name! class value! from!", (row, fact) =>
            fact.Setting = new() { Name = row.Enum<SettingName>("name"), VehicleClass = row.Enum<VehicleClass>("class"), Value = row.Number("value") ?? double.NaN, From = row.Text("from") });
        yield return Rows("decisions", Id + "depot_id! kind! vehicle_id about at! until answer who", (row, fact) =>
            fact.Decision = new() { Kind = row.Enum<DecisionKind>("kind"), VehicleId = row.Text("vehicle_id"), About = row.Text("about"), At = row.Time("at"), Until = row.Text("until"), Answer = row.Text("answer"), Who = row.Text("who") });
        yield return Rows("withdrawals", Id + "depot_id! kind! fact_id! at! reason", (row, fact) =>
            fact.Withdrawal = new() { Kind = row.Enum<WithdrawalKind>("kind"), FactId = row.Text("fact_id"), At = row.Time("at"), Reason = row.Text("reason") });
    }

    /// <summary>Home depot of a vehicle named in vehicles.csv; the first depot of the folder for one that is not.</summary>
    public string HomeDepot(string vehicleId) => _homeDepot.GetValueOrDefault(vehicleId, FirstDepot);

    /// <summary>Depot that sends what belongs to no vehicle of the folder.</summary>
    public string FirstDepot { get; private set; } = "";

    private void Depot(CsvRow row, Fact fact)
    {
        fact.DepotId = row.Text("depot_id");
        if (FirstDepot.Length == 0) FirstDepot = fact.DepotId;
        fact.Depot = new()
        {
            DepotId = fact.DepotId,
            Name = row.Text("name"),
            TrafficSide = row.Enum<TrafficSide>("traffic_side"),
            Jurisdiction = row.Text("jurisdiction"),
            TimeZone = row.Text("time_zone"),
            Currency = row.Text("currency"),
        };
    }

    private (string, IReadOnlyList<Fact>) Vehicles()
    {
        var axles = CsvTable.Read(folder, "axles", "vehicle_id! axle! suspension steered driven lifting duals target_total_toe target_camber tolerance_total_toe tolerance_camber angle_unit tyre_size tyre_price pressure_kpa track_m toe_adjustable camber_adjustable caster_adjustable scrub_radius_mm trail_mm", Problems);
        var byVehicle = (axles?.Rows ?? []).ToLookup(r => r.Text("vehicle_id"));
        var facts = Rows("vehicles", Id + "vehicle_id! depot_id! class! from fleet_number registration vin km_per_week gross_mass_kg wheelbase_m steering_ratio assist consumption_per_100_km electric telematics_units leaves_on next_alignment_on", (row, fact) =>
        {
            var vehicle = Vehicle(row);
            foreach (var axle in byVehicle[vehicle.VehicleId])
            {
                vehicle.Axles.Add(AxleOf(axle));
                if (axle.Problem is { } problem) row.Fail<bool>(problem.Column, $"axles line {problem.Line}: {problem.Message}");
            }
            fact.Vehicle = vehicle;
            _homeDepot[vehicle.VehicleId] = row.Text("depot_id");
        });
        Orphans(byVehicle, _homeDepot.Keys, "vehicle_id", "vehicles");
        return facts;
    }

    private static Vehicle Vehicle(CsvRow row)
    {
        var vehicle = new Vehicle
        {
            VehicleId = row.Text("vehicle_id"),
            VehicleClass = row.Enum<VehicleClass>("class"),
            From = row.Text("from"),
            FleetNumber = row.Text("fleet_number"),
            Registration = row.Text("registration"),
            Vin = row.Text("vin"),
            Assist = row.Enum<SteeringAssist>("assist"),
            Electric = row.Flag("electric"),
            LeavesOn = row.Text("leaves_on"),
            NextAlignmentOn = row.Text("next_alignment_on"),
        };
        vehicle.TelematicsUnits.Add(row.Words("telematics_units"));
        if (row.Number("km_per_week") is { } km) vehicle.KmPerWeek = km;
        if (row.Number("gross_mass_kg") is { } mass) vehicle.GrossMassKg = mass;
        if (row.Number("wheelbase_m") is { } wheelbase) vehicle.WheelbaseM = wheelbase;
        if (row.Number("steering_ratio") is { } ratio) vehicle.SteeringRatio = ratio;
        if (row.Number("consumption_per_100_km") is { } consumption) vehicle.ConsumptionPer100Km = consumption;
        return vehicle;
    }

    private static Axle AxleOf(CsvRow row)
    {
        var axle = new Axle
        {
            Number = row.Whole("axle") ?? 0,
            Suspension = row.Enum<Suspension>("suspension"),
            Steered = row.Flag("steered"),
            Driven = row.Flag("driven"),
            Lifting = row.Flag("lifting"),
            Duals = row.Flag("duals"),
            AngleUnit = AngleUnitOf(row),
            TyreSize = row.Text("tyre_size"),
        };
        if (row.Number("target_total_toe") is { } toe) axle.TargetTotalToe = toe;
        if (row.Number("target_camber") is { } camber) axle.TargetCamber = camber;
        if (row.Number("tolerance_total_toe") is { } toeTolerance) axle.ToleranceTotalToe = toeTolerance;
        if (row.Number("tolerance_camber") is { } camberTolerance) axle.ToleranceCamber = camberTolerance;
        if (row.Number("tyre_price") is { } price) axle.TyrePrice = price;
        if (row.Number("pressure_kpa") is { } pressure) axle.PressureKpa = pressure;
        if (row.Number("track_m") is { } track) axle.TrackM = track;
        if (row.Number("scrub_radius_mm") is { } scrub) axle.ScrubRadiusMm = scrub;
        if (row.Number("trail_mm") is { } trail) axle.TrailMm = trail;
        // Left empty, the table of suspensions says what can be set.
        if (row.Text("toe_adjustable").Length > 0) axle.ToeAdjustable = row.Flag("toe_adjustable");
        if (row.Text("camber_adjustable").Length > 0) axle.CamberAdjustable = row.Flag("camber_adjustable");
        if (row.Text("caster_adjustable").Length > 0) axle.CasterAdjustable = row.Flag("caster_adjustable");
        return axle;
    }

    private static void Fitting(CsvRow row, Fact fact)
    {
        fact.Fitting = new()
        {
            VehicleId = row.Text("vehicle_id"),
            At = row.Time("at"),
            Event = row.Enum<FittingEvent>("event"),
            Position = row.Text("position"),
            FromPosition = row.Text("from_position"),
            TyreId = row.Text("tyre_id"),
            Pattern = row.Text("pattern"),
            DepthUnit = DepthUnitOf(row),
            DistanceUnit = DistanceUnitOf(row),
            RetreadCount = row.Whole("retread_count") ?? 0,
            Seasonal = row.Flag("seasonal"),
            Winter = row.Flag("winter"),
        };
        if (row.Number("new_depth") is { } depth) fact.Fitting.NewDepth = depth;
        if (row.Number("distance") is { } distance) fact.Fitting.Distance = distance;
    }

    private (string, IReadOnlyList<Fact>) Surveys()
    {
        var readings = (CsvTable.Read(folder, "readings", "survey_id! position! groove! depth! clock_deg outboard_edge", Problems)?.Rows ?? []).ToLookup(r => r.Text("survey_id"));
        var notes = (CsvTable.Read(folder, "survey_tyres", "survey_id! position! pressure_kpa pressure_warm hand_rub seen not_reached", Problems)?.Rows ?? []).ToLookup(r => r.Text("survey_id"));
        var ids = new HashSet<string>();
        var facts = Rows("surveys", Id + "vehicle_id! at! technician gauge resolution depth_unit place distance distance_unit distance_source counter_replaced finished", (row, fact) =>
        {
            ids.Add(fact.Id);
            var survey = new TreadSurvey
            {
                VehicleId = row.Text("vehicle_id"),
                At = row.Time("at"),
                Technician = row.Text("technician"),
                Gauge = row.Text("gauge"),
                DepthUnit = DepthUnitOf(row),
                Place = row.Text("place"),
                DistanceUnit = DistanceUnitOf(row),
                DistanceSource = row.Enum<DistanceSource>("distance_source"),
                CounterReplaced = row.Flag("counter_replaced"),
                Finished = row.Flag("finished", whenEmpty: true),
            };
            if (row.Number("resolution") is { } resolution) survey.Resolution = resolution;
            if (row.Number("distance") is { } distance) survey.Distance = distance;
            AddTyres(survey, row, readings[fact.Id], notes[fact.Id]);
            fact.Survey = survey;
        });
        Orphans(readings, ids, "survey_id", "surveys");
        Orphans(notes, ids, "survey_id", "surveys");
        return facts;
    }

    private void AddTyres(TreadSurvey survey, CsvRow row, IEnumerable<CsvRow> readings, IEnumerable<CsvRow> notes)
    {
        TyreReadings At(string position)
        {
            var tyre = survey.Tyres.FirstOrDefault(t => t.Position == position);
            if (tyre is null) survey.Tyres.Add(tyre = new TyreReadings { Position = position });
            return tyre;
        }

        foreach (var reading in readings)
        {
            var depth = new GrooveDepth { Groove = reading.Whole("groove") ?? -1, Depth = reading.Number("depth") ?? double.NaN };
            if (reading.Number("clock_deg") is { } clock) depth.ClockDeg = clock;
            if (reading.Number("outboard_edge") is { } edge) depth.OutboardEdge = edge;
            // A reading that cannot be read costs that reading alone; the rest of the walk is sent.
            if (reading.Problem is { } problem) Problems.Add(problem);
            else At(reading.Text("position")).Grooves.Add(depth);
        }
        foreach (var note in notes)
        {
            var tyre = At(note.Text("position"));
            if (note.Number("pressure_kpa") is { } pressure) tyre.PressureKpa = pressure;
            tyre.PressureWarm = note.Flag("pressure_warm");
            tyre.HandRub = note.Enum<HandRub>("hand_rub");
            tyre.NotReached = note.Text("not_reached");
            foreach (var word in note.Words("seen"))
            {
                var seen = EnumWords.Of<Seen>().FirstOrDefault(w => w.Word == word).Value;
                if (seen == Seen.Unspecified) note.Fail<bool>("seen", $"'{word}' is not one of cord, cut, bulge, cupped, flat_spot, heel_toe, unsafe");
                else tyre.Seen.Add(seen);
            }
            if (note.Problem is { } problem) Problems.Add(problem);
        }
    }

    private (string, IReadOnlyList<Fact>) WorkshopRecords()
    {
        var angles = (CsvTable.Read(folder, "workshop_angles", "record_id! quantity! axle side before after angle_unit as_written", Problems)?.Rows ?? []).ToLookup(r => r.Text("record_id"));
        var ids = new HashSet<string>();
        var facts = Rows("workshop_records", Id + "vehicle_id! at! sent_because result distance distance_unit cost note", (row, fact) =>
        {
            ids.Add(fact.Id);
            var record = new WorkshopRecord
            {
                VehicleId = row.Text("vehicle_id"),
                At = row.Time("at"),
                SentBecause = row.Enum<SentBecause>("sent_because"),
                Result = row.Enum<WorkshopResult>("result"),
                DistanceUnit = DistanceUnitOf(row),
                Note = row.Text("note"),
            };
            if (row.Number("distance") is { } distance) record.Distance = distance;
            if (row.Number("cost") is { } cost) record.Cost = cost;
            foreach (var line in angles[fact.Id])
            {
                var angle = new MeasuredAngle
                {
                    Quantity = line.Enum<Quantity>("quantity"),
                    Side = line.Word("side", Side.Unspecified, ("L", Side.Left), ("R", Side.Right)),
                    AngleUnit = AngleUnitOf(line),
                    AsWritten = line.Text("as_written"),
                };
                if (line.Whole("axle") is { } axle) angle.Axle = axle;
                if (line.Number("before") is { } before) angle.Before = before;
                if (line.Number("after") is { } after) angle.After = after;
                if (line.Problem is { } problem) Problems.Add(problem);
                else record.Angles.Add(angle);
            }
            fact.WorkshopRecord = record;
        });
        Orphans(angles, ids, "record_id", "workshop_records");
        return facts;
    }

    private (string, IReadOnlyList<Fact>) Rows(string name, string columns, Action<CsvRow, Fact> fill)
    {
        var facts = new List<Fact>();
        var table = CsvTable.Read(folder, name, columns, Problems);
        foreach (var row in table?.Rows ?? [])
        {
            var fact = new Fact { Id = row.Text("id"), Replaces = row.Text("replaces"), RecordedBy = row.Text("recorded_by") };
            fact.DepotId = row.Table.IndexOf("depot_id") is not null ? row.Text("depot_id") : Home(row, "vehicle_id");
            fill(row, fact);
            if (row.Problem is { } problem) Problems.Add(problem);
            else facts.Add(fact);
        }
        return (table?.File ?? $"{name}.csv", facts);
    }

    private string Home(CsvRow row, string column) => HomeDepot(row.Text(column));

    private void Orphans(ILookup<string, CsvRow> children, IEnumerable<string> parents, string column, string parentFile)
    {
        var known = parents.ToHashSet();
        foreach (var group in children.Where(g => !known.Contains(g.Key)))
        {
            var first = group.First();
            Problems.Add(new(first.Table.File, first.Line, column, $"'{group.Key}' is not in {parentFile} ({group.Count()} rows)") { Text = first.AsText });
        }
    }

    private static DepthUnit DepthUnitOf(CsvRow row) => row.Word("depth_unit", DepthUnit.Mm, ("mm", DepthUnit.Mm), ("1/32in", DepthUnit.ThirtySecondsInch));

    private static DistanceUnit DistanceUnitOf(CsvRow row) => row.Word("distance_unit", DistanceUnit.Km, ("km", DistanceUnit.Km), ("mi", DistanceUnit.Miles));

    private static AngleUnit AngleUnitOf(CsvRow row) => row.Word("angle_unit", AngleUnit.Degrees, ("deg", AngleUnit.Degrees), ("min", AngleUnit.Minutes));
}
