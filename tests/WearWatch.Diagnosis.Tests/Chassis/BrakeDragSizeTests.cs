using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Tests.Rules;

namespace WearWatch.Diagnosis.Tests.Chassis;

public class BrakeDragSizeTests
{
    [Fact]
    public void A_pull_of_one_newton_metre_on_a_truck_takes_some_three_hundred_newtons_of_drag()
    {
        var truck = Vehicles.Truck().Pull(1);
        truck = truck with { Vehicle = truck.Vehicle with { SteeringRatio = 20 }, Steering = truck.Signals() with { BrakePullNm = new(-1, 0.1) } };
        // By hand: 1 N·m × 20 ÷ 0.0685 m = 292 N.
        Assert.Contains(GeometryRules.Find(truck).Only(FindingKind.BrakeDrag).EvidenceFor, e => e.Statement.StartsWith("A drag of 292 N", StringComparison.Ordinal));
        // A contact centre inboard of the axis does not turn drag into that torque: no size is told.
        var inboard = truck with { Vehicle = truck.Vehicle with { Axles = [.. truck.Vehicle.Axles.Select(a => a.Number == 1 ? a with { ScrubRadiusMm = -8 } : a)] } };
        Assert.DoesNotContain(GeometryRules.Find(inboard).Only(FindingKind.BrakeDrag).EvidenceFor, e => e.Statement.StartsWith("A drag of", StringComparison.Ordinal));
    }
}
