using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Causes;

/// <summary>Vehicles and figures in the field's words.</summary>
internal static class CauseCases
{
    public static readonly DateOnly Day = new(2026, 12, 1);

    public static VehicleFigures Van(SteeringAssist assist = SteeringAssist.Electric) => Figures(VehicleClass.Van, assist,
        new Axle { Number = 1, Steered = true, Suspension = Suspension.Strut }, new Axle { Number = 2, Driven = true, Suspension = Suspension.BeamLeaf });

    public static VehicleFigures Bus() => Figures(VehicleClass.Bus, SteeringAssist.Hydraulic,
        new Axle { Number = 1, Steered = true }, new Axle { Number = 2, Driven = true, Duals = true });

    public static VehicleFigures Truck() => Figures(VehicleClass.Truck, SteeringAssist.Hydraulic,
        new Axle { Number = 1, Steered = true }, new Axle { Number = 2, Driven = true, Duals = true }, new Axle { Number = 3, Driven = true, Duals = true });

    public static VehicleFigures Trailer(int axles = 3) =>
        Figures(VehicleClass.Trailer, SteeringAssist.Unknown, [.. Enumerable.Range(1, axles).Select(n => new Axle { Number = n, Suspension = Suspension.BeamAir })]);

    public static VehicleFigures Figures(VehicleClass kind, SteeringAssist assist, params Axle[] axles) => new()
    {
        Vehicle = new Vehicle { VehicleId = "V1", Depot = "D1", Class = kind, Axles = axles, Assist = assist, KmPerWeek = 1000 },
        Depot = new Depot { DepotId = "D1", TrafficSide = TrafficSide.Right, Jurisdiction = "DE", TimeZone = "Europe/Berlin", Currency = "EUR" },
        AsOf = Day,
    };

    /// <summary>A tyre with normal wear: 0.10 mm per 1000 km, all figures known, nothing beyond normal.</summary>
    public static TyreFigures Tyre(Position position, double edge = 0, double logRate = 0, double edgeError = 0.01) => new()
    {
        Position = position,
        NewDepthMm = 10,
        RateMmPer1000Km = new Estimate(0.10 * Math.Exp(logRate), 0.01),
        LogRateRatio = new Estimate(logRate, 0.10),
        EdgeSlopeMmPer1000Km = new Estimate(edge, edgeError),
        ShoulderMmPer1000Km = new Estimate(0, 0.01),
    };

    public static VehicleFigures WithTyres(this VehicleFigures figures, Func<Position, TyreFigures> tyre) =>
        figures with { Tyres = [.. figures.Vehicle.Positions().Select(tyre)] };

    public static VehicleFigures WithTyre(this VehicleFigures figures, string position, Func<TyreFigures, TyreFigures> change) =>
        figures with { Tyres = [.. figures.Tyres.Select(t => t.Position == Position.Parse(position) ? change(t) : t)] };

    public static VehicleFigures WithSteering(this VehicleFigures figures, double? pull = 0, double? offCentre = 0, double pullError = 0.05, double angleError = 0.3) => figures with
    {
        Steering = new SteeringFigures
        {
            VehicleId = figures.Vehicle.VehicleId,
            SteeringPullNm = pull is { } p ? new Estimate(p, pullError) : null,
            OffCentreDeg = offCentre is { } a ? new Estimate(a, angleError) : null,
            Runs = 60,
            Seconds = 3600,
            TorqueIncludesAssist = figures.Vehicle.Assist == SteeringAssist.Electric,
            RoadShare = RoadShare.SharedCells,
        },
    };

    /// <summary>The same vehicle seen in a mirror, in a mirrored country.</summary>
    public static VehicleFigures Mirrored(this VehicleFigures f) => f with
    {
        Depot = f.Depot with { TrafficSide = f.Depot.TrafficSide == TrafficSide.Left ? TrafficSide.Right : TrafficSide.Left },
        Tyres = [.. f.Tyres.Select(t => t with { Position = t.Position.Mirrored })],
        Steering = f.Steering is null ? null : f.Steering with { SteeringPullNm = -f.Steering.SteeringPullNm, OffCentreDeg = -f.Steering.OffCentreDeg, BrakePullNm = -f.Steering.BrakePullNm },
        Route = f.Route is null ? null : f.Route with { LeftTurnShare = 1 - f.Route.LeftTurnShare },
        DriverReports = [.. f.DriverReports.Select(r => r with { Symptom = r.Symptom switch { Symptom.PullsLeft => Symptom.PullsRight, Symptom.PullsRight => Symptom.PullsLeft, _ => r.Symptom } })],
        WorkshopRecords = [.. f.WorkshopRecords.Select(r => r with { Angles = [.. r.Angles.Select(Mirror)] })],
    };

    private static MeasuredAngle Mirror(MeasuredAngle a) => ChangesSign(a.Quantity)
        ? a with { BeforeDeg = -a.BeforeDeg, AfterDeg = -a.AfterDeg }
        : a with { Side = Other(a.Side) };

    public static bool ChangesSign(Quantity q) => q is Quantity.CamberSplit or Quantity.CasterSplit or Quantity.Thrust or Quantity.TandemSkew
        or Quantity.TrailerSkew or Quantity.Conicity or Quantity.Crown or Quantity.Drag or Quantity.Duty or Quantity.SensorZeroOrFrontToeSplit;

    public static Side? Other(Side? side) => side switch { Side.Left => Side.Right, Side.Right => Side.Left, _ => null };

    public static Verdict Judge(this VehicleFigures figures) => CauseEstimate.Judge(figures, FaultPriors.Default);

    public static Cause First(this Verdict verdict) => verdict.Causes.First(c => c.Quantity.IsAngle());

    public static double Of(this Verdict verdict, Quantity quantity) => verdict.Causes.Where(c => c.Quantity == quantity).Sum(c => c.Probability);
}
