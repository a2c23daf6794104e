using System.Text.Json;
using System.Text.Json.Serialization;

namespace WearWatch.Simulator;

/// <summary>What only the simulator knows, written outside the import folder.</summary>
public static class Truth
{
    private static readonly JsonSerializerOptions Json = new()
    {
        PropertyNamingPolicy = JsonNamingPolicy.SnakeCaseLower,
        WriteIndented = true,
        Encoder = System.Text.Encodings.Web.JavaScriptEncoder.UnsafeRelaxedJsonEscaping,
        NumberHandling = JsonNumberHandling.AllowNamedFloatingPointLiterals,
    };

    public static void Write(string path, Scenario scenario, IReadOnlyList<VehicleHistory> histories, IReadOnlyList<Technician> technicians, IReadOnlyList<Planted> alsoPlanted, int tyres)
    {
        var planted = histories.SelectMany(h => h.Surveys.Planted).Concat(alsoPlanted).ToList();
        var vehicles = histories.Select(h => Of(h, scenario)).ToList();
        var truth = new
        {
            scenario.Seed,
            From = scenario.Start.ToString("yyyy-MM-dd"),
            End = scenario.End.ToString("yyyy-MM-dd"),
            Samples = histories.Sum(h => h.Samples),
            Vehicles = vehicles,
            Tyres = tyres,
            PlantedCounts = planted.GroupBy(p => p.Kind).OrderBy(g => g.Key, StringComparer.Ordinal).ToDictionary(g => g.Key, g => g.Count()),
            Surveys = planted.Select(p => new { p.SurveyId, p.Kind, Note = p.Note }).ToList(),
            Technicians = technicians.Select(t => new { t.Id, t.Gauge, BiasMm = R(t.BiasMm), RepeatMm = R(t.RepeatMm), In32nds = t.In32nds }).ToList(),
        };
        File.WriteAllText(path, JsonSerializer.Serialize(truth, Json) + "\n");
    }

    private static double R(double x, int digits = 4) => Math.Round(x, digits);

    private static object Of(VehicleHistory h, Scenario s)
    {
        var (v, day) = (h.Vehicle, (double)s.Days);
        var now = v.GeometryAt(day);
        var angles = now.Angles(v.Type);
        var worst = angles.Max(a => a.Ratio);
        var money = Money.Of(v, h.Tyres, now);
        var slip = v.MeanSlip(now, h.Tyres.Tyres);
        var signals = v.Sensors.Kind;
        var steered = !v.Type.IsTrailer && signals != "gauge_only";
        return new
        {
            VehicleId = v.Id,
            Class = v.Type.Class.ToString().ToLowerInvariant(),
            TypeName = v.Type.Name,
            Depot = v.Depot.Id,
            TrafficSide = v.Depot.RoadSide > 0 ? "right" : "left",
            KmPerWeek = R(v.KmPerWeek, 1),
            Misaligned = worst > 1,
            Stratum = worst >= 1.5 ? "large" : worst > 1 ? "small" : "none",
            WorstRatio = R(worst),
            Quantities = angles.Where(a => a.Ratio > 1).OrderByDescending(a => a.Ratio).Select(a => Quantity(a, v.Fault, s)).ToList(),
            AllAngles = angles.Select(a => new { a.Quantity, a.Axle, a.Side, Value = R(a.Value), Ratio = R(a.Ratio) }).ToList(),
            Lookalikes = v.LookAlikes.Select(l => new { l.Kind, Size = R(l.Size), l.Unit, l.Note }).ToList(),
            RepairedOn = v.Fault is { } f && !double.IsPositiveInfinity(f.RepairDay) ? s.Date(f.RepairDay) : null,
            Signals = signals,
            AssistMeasured = v.Sensors.Has("assist_torque"),
            Position = v.Sensors.Has("latitude"),
            PullCompensation = v.Sensors.PullCompensation,
            SteeringPullNm = steered ? R(h.Steering.Pull) : (double?)null,
            SteeringPullTorsionBarNm = steered ? R(h.Steering.Pull / (1 + v.Sensors.Boost)) : (double?)null,
            OffCentreDeg = steered ? R(h.Steering.OffCentre) : (double?)null,
            AngleZeroDeg = steered ? R(v.Sensors.AngleZeroDeg) : (double?)null,
            TorqueZeroNm = signals == "torque" ? R(v.Sensors.TorqueZeroNm) : (double?)null,
            LateralBias = steered ? R(v.Sensors.LateralBias) : (double?)null,
            DriverFactor = R(v.Duty.Driver),
            WearExponent = R(v.Duty.Exponent),
            MeanBank = R(v.Duty.MeanBank, 5),
            Tyres = v.Positions.Select(p => Tyre(h, p, now, slip[p.Index])).ToList(),
            Surveys = h.Surveys.Walks.Select(w => new { w.SurveyId, Date = s.Date(w.Day), OdometerKm = R(w.OdometerKm, 1), w.Axles, LeftRightErrors = R(w.LeftRightErrors, 2) }).ToList(),
            UnrecordedEvents = h.Tyres.Unrecorded,
            Steps = h.Steps.Select(x => new { Date = s.Date(x.Day), SteeringPullNm = R(x.PullNm), OffCentreDeg = R(x.OffCentreDeg), x.Because }).ToList(),
            ExtraTyresPerWeek = R(money.TyresPerWeek),
            ExtraFuelPerWeek = R(money.FuelPerWeek),
            CostOfWaitingPerWeek = R(money.PerWeek),
            JobPrice = money.JobPrice,
            NetBenefit = R(money.NetBenefit, 2),
            v.Depot.Currency,
        };
    }

    private static object Quantity(Angle a, Fault? fault, Scenario s) => new
    {
        a.Quantity,
        a.Axle,
        a.Side,
        Value = R(a.Value),
        a.Tolerance.Target,
        Tolerance = a.Tolerance.PlusMinus,
        Ratio = R(a.Ratio),
        Since = fault is null ? null : s.Date(fault.StartDay),
        Mode = fault?.Mode.ToString().ToLowerInvariant(),
    };

    private static TyreTruth Tyre(VehicleHistory h, Position p, Geometry now, double slipDeg)
    {
        var v = h.Vehicle;
        var winter = h.Tyres.Winter[p.Index];
        // Austria: winter tyres of vehicles up to 3.5 t count as such down to 4 mm.
        var limit = winter && v.Depot.Jurisdiction == "AT" ? 4.0 : v.Depot.LimitMm(v.Type);
        return new TyreTruth
        {
            Position = p.Name,
            RateMmPer1000Km = R(h.Tyres.MeanRate(p, now, slipDeg), 5),
            RemainingKm = Math.Round(h.Tyres.RemainingKm(p, now, slipDeg, limit)),
            LimitMm = limit,
            Depths = [.. Enumerable.Range(0, v.Type.Grooves).Select(k => R(h.Tyres.Tyres[p.Index].SmoothDepth(k, v.Type.Grooves), 3))],
            SlipTowardsToeInDeg = R(-p.Sign * slipDeg),
            SinceKm = Math.Round(h.Tyres.SinceKm[p.Index]),
            OdometerKm = Math.Round(h.OdometerKm),
        };
    }

    /// <summary>One tyre at the end of the window. Depths are those of its grooves without deviations, outermost first, mm.</summary>
    private sealed record TyreTruth
    {
        public required string Position { get; init; }
        [JsonPropertyName("rate_mm_per_1000_km")]
        public required double RateMmPer1000Km { get; init; }
        public required double RemainingKm { get; init; }
        public required double LimitMm { get; init; }
        public required double[] Depths { get; init; }
        public required double SlipTowardsToeInDeg { get; init; }
        public required double SinceKm { get; init; }
        public required double OdometerKm { get; init; }
    }
}
