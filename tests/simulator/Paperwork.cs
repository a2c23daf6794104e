using WearWatch.Simulator.Best;

namespace WearWatch.Simulator;

/// <summary>What is written down of a vehicle besides surveys and signals: registration, axles, routes, drivers' words, workshop records.</summary>
public static class Paperwork
{
    public static void Describe(FleetVehicle v, Scenario s, Rows rows)
    {
        var random = new RandomStream(s.Seed, 7, v.Index);
        var type = v.Type;
        var name = type.Class.ToString().ToLowerInvariant();
        var from = s.Start.AddDays(-random.Whole(200, 900)).ToString("yyyy-MM-dd");
        var plate = v.Depot.Jurisdiction switch
        {
            "DE" => $"LX-{(char)('A' + v.Index % 26)}{(char)('K' + v.Index % 13)} {100 + v.Index * 7}",
            "AT" => $"IX {200 + v.Index * 3} {(char)('A' + v.Index % 26)}Z",
            _ => $"TW{v.RegistrationYear[2..]} {(char)('A' + v.Index % 24)}QX",
        };
        rows.Add("vehicles", $"veh-{v.Id}", v.Id, v.Depot.Id, name, from, $"{100 + v.Index}", plate,
            random.Chance(0.95) ? Math.Round(v.KmPerWeek / 10) * 10 : null, type.GrossMassKg, Math.Round(type.WheelbaseM, 2),
            type.IsTrailer ? null : type.SteeringRatio, type.Assist, type.IsTrailer ? null : type.Consumption, type.Electric,
            v.Sensors.Channels.Length > 0 ? $"unit-{1000 + v.Index * 17}" : null,
            random.Chance(0.06) ? s.End.AddDays(random.Whole(40, 300)).ToString("yyyy-MM-dd") : null,
            random.Chance(0.08) ? s.End.AddDays(random.Whole(20, 250)).ToString("yyyy-MM-dd") : null);
        for (var a = 0; a < type.Axles.Length; a++) DescribeAxle(v, a, rows, random);
        Route(v, rows, random, from);
    }

    private static void DescribeAxle(FleetVehicle v, int a, Rows rows, RandomStream random)
    {
        var (type, axle) = (v.Type, v.Type.Axles[a]);
        var front = a == 0 && !type.IsTrailer;
        var toe = front ? Tolerances.FrontTotalToe(type.Class) : Tolerances.RearTotalToe(type.Class);
        var camber = Tolerances.Camber(type.Class, front);
        var minutes = type.Class == VehicleClass.Van && v.Index % 3 == 0;
        var known = random.Chance(0.85);
        double? In(double deg) => known ? Math.Round(minutes ? deg * 60 : deg, 4) : null;
        rows.Add("axles", v.Id, a + 1, axle.Suspension, axle.Steered, axle.Driven, axle.Lifting, axle.Duals,
            In(toe.Target), In(camber.Target), In(toe.PlusMinus), In(camber.PlusMinus), minutes ? "min" : "deg",
            axle.TyreSize, Math.Round(axle.TyrePriceEur * v.Depot.PriceFactor), axle.PressureKpa, axle.TrackM);
    }

    private static void Route(FleetVehicle v, Rows rows, RandomStream random, string from)
    {
        var loop = v.Type.Class == VehicleClass.Bus;
        if (!loop && random.Chance(0.35)) return;
        var share = Math.Clamp(0.5 + v.Duty.OneWayDeg * 4, 0.05, 0.95);
        var urban = loop || v.LookAlikes.Any(l => l.Kind == "habit");
        rows.Add("routes", $"r-{v.Id}", v.Id, from, $"{v.Depot.Id.ToLowerInvariant()}-{v.Routes[0] + 1}", loop,
            loop || random.Chance(0.4) ? Math.Round(share, 2) : null, urban);
    }

    /// <summary>Chance in a week that a driver reports a pull he must hold, N·m at the column.</summary>
    public static double ChanceOfPull(VehicleType type, double pullNm) =>
        0.09 * Math.Max(0, Math.Abs(pullNm / (type.Assist == "electric" ? 1 : 2.5)) - 0.45);

    /// <summary>Chance in a week that he reports a steering wheel that stands off centre, deg.</summary>
    public static double ChanceOfNotStraight(double offCentreDeg) => 0.012 * Math.Max(0, Math.Abs(offCentreDeg) - 3.5);

    /// <summary>Chance in a week of a word that nothing stands behind, one of four.</summary>
    public const double ChanceOfNothing = 0.004;

    /// <summary>Bench repeatability, deg (from memory).</summary>
    public const double BenchRepeatDeg = 0.02;

    /// <summary>Drivers notice a holding torque of some 0.5 N·m or a wheel 5° off, and do not often say so.</summary>
    public static void DriverReports(FleetVehicle v, Scenario s, IReadOnlyList<(double Pull, double OffCentre)> days, Rows rows, VehicleLog? log)
    {
        if (v.Type.IsTrailer) return;
        var random = new RandomStream(s.Seed, 8, v.Index);
        var count = 0;
        for (var day = 3; day < s.Days; day += 7)
        {
            var (pull, off) = days[day];
            string? symptom = null;
            if (random.Chance(ChanceOfPull(v.Type, pull))) symptom = pull > 0 ? "pulls_right" : "pulls_left";
            else if (random.Chance(ChanceOfNotStraight(off))) symptom = "wheel_not_straight";
            else if (v.CuppedPosition >= 0 && v.Positions[v.CuppedPosition].Axle == 0 && random.Chance(0.05)) symptom = "shakes";
            else if (random.Chance(ChanceOfNothing)) symptom = random.Pick<string>(["pulls_left", "pulls_right", "wheel_not_straight", "shakes"]);
            if (count < 3) log?.DriverWeeks.Add(new(day, symptom));
            if (symptom is null || count >= 3) continue;
            rows.Add("driver_reports", $"d-{v.Id}-{++count}", v.Id, s.Time(day + 0.7), symptom, null);
        }
    }

    public static void Workshop(FleetVehicle v, Scenario s, Func<double, double> odometer, Rows rows, VehicleLog? log)
    {
        var random = new RandomStream(s.Seed, 9, v.Index);
        if (!double.IsPositiveInfinity(v.Fault?.RepairDay ?? double.PositiveInfinity))
        {
            var day = v.Fault!.RepairDay;
            Record(v, s, random, "w1", day, "suspected", "adjusted", v.GeometryAt(day - 0.1), v.AfterRepair, odometer, rows, log);
        }
        else if (v.Fault is null && random.Chance(0.2))
        {
            var day = Math.Floor(random.Between(0.05, 0.9) * s.Days) + 0.5;
            Record(v, s, random, "w1", day, "routine", "in_order", random.Chance(0.6) ? v.GeometryAt(day) : null, null, odometer, rows, log);
        }
        else if (v.Fault is { Mode: FaultMode.Before } && random.Chance(0.2))
        {
            var day = Math.Floor(random.Between(0.3, 0.8) * s.Days) + 0.5;
            Record(v, s, random, "w1", day, "suspected", random.Pick<string>(["could_not_adjust", "parts_needed"]), v.GeometryAt(day), null, odometer, rows, log);
        }
    }

    private static void Record(FleetVehicle v, Scenario s, RandomStream random, string key, double day, string why, string result,
        Geometry? before, Geometry? after, Func<double, double> odometer, Rows rows, VehicleLog? log)
    {
        var id = $"{key}-{v.Id}";
        double? distance = v.DistanceSource == "none" ? null : Math.Round(odometer(day));
        double? cost = result == "adjusted" ? Math.Round(v.Type.JobPriceEur * v.Depot.PriceFactor) : null;
        rows.Add("workshop_records", id, v.Id, s.Time(day), why, result, distance, cost, null);
        log?.BenchWords.Add(new(day, result == "in_order"));
        if (before is null) return;
        var (first, then) = (before.Angles(v.Type), after?.Angles(v.Type));
        for (var i = 0; i < first.Count; i++)
        {
            // Paper often leaves an angle out.
            double? Bench(double deg) => Math.Round(deg + BenchRepeatDeg * random.Normal(), 2);
            if (random.Chance(0.12)) continue;
            var b = Bench(first[i].Value);
            var a = then is null ? null : Bench(then[i].Value);
            var asWritten = first[i].Quantity == "front_total_toe" && random.Chance(0.2) ? $"toe {Math.Round(first[i].Value * 7, 1)} mm" : null;
            if (asWritten is null) log?.Bench.Add(after is null ? new(day, i, b!.Value) : new(day + 0.01, i, a!.Value));
            rows.Add("workshop_angles", id, first[i].Quantity, first[i].Axle, first[i].Side, asWritten is null ? b : null, asWritten is null ? a : null, "deg", asWritten);
        }
    }
}
