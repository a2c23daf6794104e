using Google.Protobuf.WellKnownTypes;
using WearWatch.Contracts.V1;

namespace WearWatch.Services.Tests;

/// <summary>Sound facts of an invented depot, to be spoilt one field at a time.</summary>
internal static class Sample
{
    public static readonly DateTimeOffset Monday = new(2026, 3, 2, 7, 40, 0, TimeSpan.Zero);

    public static Fact Depot(string depot) => Fact(depot, $"{depot}-depot", f => f.Depot = new Depot
    {
        DepotId = depot,
        Name = "North yard",
        TrafficSide = TrafficSide.Right,
        Jurisdiction = "DE",
        TimeZone = "Europe/Berlin",
        Currency = "EUR",
    });

    public static Fact Van(string depot, string vehicle, string from = "") => Fact(depot, $"{vehicle}-fact{from}", f => f.Vehicle = new Vehicle
    {
        VehicleId = vehicle,
        VehicleClass = VehicleClass.Van,
        From = from,
        KmPerWeek = 600,
        GrossMassKg = 3200,
        WheelbaseM = 3.6,
        Axles = { new Axle { Number = 1, Steered = true, Suspension = Suspension.Strut }, new Axle { Number = 2, Driven = true, Suspension = Suspension.BeamLeaf } },
    });

    public static Fact Survey(string depot, string vehicle, string id, DateTimeOffset at, double km, params double[] depths) => Fact(depot, id, f => f.Survey = new TreadSurvey
    {
        VehicleId = vehicle,
        At = at.ToTimestamp(),
        DepthUnit = DepthUnit.Mm,
        Distance = km,
        DistanceUnit = DistanceUnit.Km,
        Finished = true,
        Tyres = { ((string[])["1L", "1R", "2L", "2R"]).Select(position => Tyre(position, depths)) },
    });

    public static TyreReadings Tyre(string position, params double[] depths)
    {
        var tyre = new TyreReadings { Position = position };
        tyre.Grooves.AddRange(depths.Select((depth, i) => new GrooveDepth { Groove = i + 1, Depth = depth }));
        return tyre;
    }

    public static Fact Fitting(string depot, string vehicle, string id, DateTimeOffset at, string position, double newDepth) => Fact(depot, id, f => f.Fitting = new FittingRecord
    {
        VehicleId = vehicle,
        At = at.ToTimestamp(),
        Event = FittingEvent.Fitted,
        Position = position,
        NewDepth = newDepth,
        DepthUnit = DepthUnit.Mm,
    });

    public static Fact Fact(string depot, string id, Action<Fact> fill)
    {
        var fact = new Fact { Id = id, DepotId = depot, RecordedBy = "tests" };
        fill(fact);
        return fact;
    }

    public static Fact With(this Fact fact, Action<Fact> change)
    {
        var changed = fact.Clone();
        change(changed);
        return changed;
    }
}
