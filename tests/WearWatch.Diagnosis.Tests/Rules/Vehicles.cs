using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Rules;

/// <summary>Vehicles in the field's words, to be given figures by the tests.</summary>
internal static class Vehicles
{
    public static readonly DateOnly AsOf = new(2026, 11, 30);

    public static readonly Depot RightHandDepot = new() { DepotId = "north", TrafficSide = TrafficSide.Right, Jurisdiction = "DE", TimeZone = "Europe/Berlin", Currency = "EUR" };

    public static VehicleFigures Van(string id = "van-1") => Of(id, VehicleClass.Van,
        new Axle { Number = 1, Steered = true, Suspension = Suspension.Strut },
        new Axle { Number = 2, Driven = true, Suspension = Suspension.BeamLeaf });

    public static VehicleFigures Bus(string id = "bus-1") => Of(id, VehicleClass.Bus,
        new Axle { Number = 1, Steered = true, Suspension = Suspension.BeamAir },
        new Axle { Number = 2, Driven = true, Duals = true, Suspension = Suspension.BeamAir });

    public static VehicleFigures FrontDrivenVan(string id = "van-2") => Of(id, VehicleClass.Van,
        new Axle { Number = 1, Steered = true, Driven = true, Suspension = Suspension.Strut },
        new Axle { Number = 2, Suspension = Suspension.TrailingArm });

    public static VehicleFigures Truck(string id = "truck-1") => Of(id, VehicleClass.Truck,
        new Axle { Number = 1, Steered = true, Suspension = Suspension.BeamLeaf },
        new Axle { Number = 2, Driven = true, Duals = true, Suspension = Suspension.BeamAir },
        new Axle { Number = 3, Driven = true, Duals = true, Suspension = Suspension.BeamAir });

    public static VehicleFigures Trailer(string id = "trailer-1") => Of(id, VehicleClass.Trailer,
        new Axle { Number = 1, Suspension = Suspension.BeamAir }, new Axle { Number = 2, Suspension = Suspension.BeamAir }, new Axle { Number = 3, Suspension = Suspension.BeamAir });

    private static VehicleFigures Of(string id, VehicleClass vehicleClass, params Axle[] axles) => new()
    {
        Vehicle = new Vehicle { VehicleId = id, Depot = "north", Class = vehicleClass, Axles = axles },
        Depot = RightHandDepot,
        AsOf = AsOf,
    };

    /// <summary>Adds to, or sets, the figures of one tyre.</summary>
    public static VehicleFigures With(this VehicleFigures figures, string position, Func<TyreFigures, TyreFigures> change)
    {
        var at = Position.Parse(position);
        var tyre = figures.At(at) ?? new TyreFigures { Position = at, SurveyIds = [$"survey-{at}"] };
        return figures with { Tyres = [.. figures.Tyres.Where(t => t.Position != at), change(tyre)] };
    }

    public static VehicleFigures Edge(this VehicleFigures figures, string position, double mmPer1000Km, double error = 0.01) =>
        figures.With(position, t => t with { EdgeSlopeMmPer1000Km = new(mmPer1000Km, error) });

    public static VehicleFigures Feather(this VehicleFigures figures, string position, double mm, double error = 0.1) =>
        figures.With(position, t => t with { FeatherMm = new(mm, error) });

    public static VehicleFigures Pull(this VehicleFigures figures, double newtonMetres, double error = 0.1) =>
        figures with { Steering = Signals(figures) with { SteeringPullNm = new(newtonMetres, error) } };

    public static VehicleFigures OffCentre(this VehicleFigures figures, double degrees, double error = 0.3) =>
        figures with { Steering = Signals(figures) with { OffCentreDeg = new(degrees, error) } };

    public static SteeringFigures Signals(this VehicleFigures figures) => figures.Steering ?? new SteeringFigures
    {
        VehicleId = figures.Vehicle.VehicleId,
        Runs = 200,
        Seconds = 9000,
        TorqueIncludesAssist = true,
        RoadShare = RoadShare.SharedCells,
        EvidenceRuns = ["stream-a/3", "stream-a/9"],
    };

    public static VehicleSteeringStudy StudyOf(this VehicleFigures figures) => figures.Study ?? new VehicleSteeringStudy
    {
        VehicleId = figures.Vehicle.VehicleId,
        SecondsRecorded = 20_000,
        SecondsStraight = 9_000,
        SecondsLaneKeeping = 0,
        AngleHistogramS = new double[VehicleSteeringStudy.HistogramClasses],
        YawZero = default,
        AngleAgainstYaw = 1,
        PullCompensation = false,
        ChannelsPresent = [],
        FrozenS = new Dictionary<SteeringChannel, double>(),
        NotPossible = [],
    };

    /// <summary>Rest of the steering wheel after left and right turns, deg beside straight, + left.</summary>
    public static VehicleFigures Returning(this VehicleFigures figures, double afterLeft, double afterRight, double error = 0.3) => figures with
    {
        Study = figures.StudyOf() with { Return = new ReturnToCentre { AfterLeft = 40, AfterRight = 40, RestAfterLeftDeg = new(afterLeft, error), RestAfterRightDeg = new(afterRight, error) } },
    };

    public static VehicleFigures Turning(this VehicleFigures figures, double leftDeg, double rightDeg) =>
        figures with { Study = figures.StudyOf() with { TurnedLeftDeg = leftDeg, TurnedRightDeg = rightDeg } };

    public static VehicleFigures Hopping(this VehicleFigures figures, double rms, double share) =>
        figures with { Study = figures.StudyOf() with { WheelHop = new WheelHop(SteeringChannel.DriverTorque, rms, share, 600) } };

    private static VehicleSteeringStudy Mirrored(VehicleSteeringStudy study) => study with
    {
        TurnedLeftDeg = study.TurnedRightDeg,
        TurnedRightDeg = study.TurnedLeftDeg,
        Return = study.Return is not { } r ? null : r with { AfterLeft = r.AfterRight, AfterRight = r.AfterLeft, RestAfterLeftDeg = Negative(r.RestAfterRightDeg), RestAfterRightDeg = Negative(r.RestAfterLeftDeg) },
    };

    private static Estimate? Negative(Estimate? e) => e is { } known ? -known : null;

    /// <summary>The same vehicle seen in a mirror: sides swapped, steering signs and the traffic side turned over.</summary>
    public static VehicleFigures Mirrored(this VehicleFigures figures) => figures with
    {
        Depot = figures.Depot with { TrafficSide = figures.Depot.TrafficSide == TrafficSide.Right ? TrafficSide.Left : TrafficSide.Right },
        Tyres = [.. figures.Tyres.Select(t => t with { Position = t.Position.Mirrored })],
        Steering = figures.Steering is not { } s ? null : s with { SteeringPullNm = -s.SteeringPullNm, OffCentreDeg = -s.OffCentreDeg, BrakePullNm = -s.BrakePullNm, DrivePullNm = -s.DrivePullNm },
        Study = figures.Study is { } study ? Mirrored(study) : null,
        Route = figures.Route is not { } r ? null : r with { LeftTurnShare = 1 - r.LeftTurnShare },
        DriverReports = [.. figures.DriverReports.Select(d => d with { Symptom = d.Symptom switch { Symptom.PullsLeft => Symptom.PullsRight, Symptom.PullsRight => Symptom.PullsLeft, var other => other } })],
    };

    public static Finding Only(this IReadOnlyList<Finding> findings, FindingKind kind) => Assert.Single(findings, f => f.Kind == kind);
}
