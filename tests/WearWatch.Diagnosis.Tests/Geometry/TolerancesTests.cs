using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Geometry;

namespace WearWatch.Diagnosis.Tests.Geometry;

public sealed class TolerancesTests
{
    private static readonly DateOnly Day = new(2026, 12, 1);

    private static Vehicle Of(VehicleClass kind, params Axle[] axles) =>
        new() { VehicleId = "V", Depot = "D", Class = kind, Axles = axles.Length > 0 ? axles : [new Axle { Number = 1, Steered = true }, new Axle { Number = 2 }] };

    [Theory]
    [InlineData(VehicleClass.Car, Quantity.FrontTotalToe, 1, 0.10, 0.20)] // car maker's manual
    [InlineData(VehicleClass.Van, Quantity.Thrust, null, 0, 0.20)] // from memory
    [InlineData(VehicleClass.Truck, Quantity.FrontTotalToe, 1, 0.09, 0.045)] // 1/16 in ± 1/32 in
    [InlineData(VehicleClass.Bus, Quantity.Camber, 1, 0.2, 0.375)]
    [InlineData(VehicleClass.Bus, Quantity.Camber, 2, 0, 0.375)]
    [InlineData(VehicleClass.Trailer, Quantity.TrailerSkew, null, 0, 0.10)]
    [InlineData(VehicleClass.Trailer, Quantity.Camber, 1, 0, 0.5)]
    public void Class_table(VehicleClass kind, Quantity quantity, int? axle, double target, double plusMinus)
    {
        var found = Tolerances.For(Of(kind), quantity, axle, [], Day);
        Assert.Equal((target, plusMinus), (found!.Value.Target, found.Value.PlusMinus));
        Assert.NotEmpty(found.Value.Source);
    }

    [Fact]
    public void A_trailer_has_no_thrust_and_a_look_alike_no_tolerance()
    {
        Assert.Null(Tolerances.For(Of(VehicleClass.Trailer), Quantity.Thrust, null, [], Day));
        Assert.Null(Tolerances.For(Of(VehicleClass.Car), Quantity.Conicity, null, [], Day));
    }

    [Fact]
    public void Latest_operator_tolerance_not_in_the_future_applies()
    {
        ToleranceFact[] facts =
        [
            new() { Class = VehicleClass.Van, Quantity = Quantity.Thrust, PlusMinus = 0.3, From = new(2025, 1, 1) },
            new() { Class = VehicleClass.Van, Quantity = Quantity.Thrust, PlusMinus = 0.25, From = new(2026, 1, 1) },
            new() { Class = VehicleClass.Van, Quantity = Quantity.Thrust, PlusMinus = 0.1, From = new(2027, 1, 1) },
        ];
        Assert.Equal(0.25, Tolerances.For(Of(VehicleClass.Van), Quantity.Thrust, null, facts, Day)!.Value.PlusMinus);
    }

    [Fact]
    public void Makers_figures_stand_above_operator_and_class()
    {
        var vehicle = Of(VehicleClass.Van, new Axle { Number = 1, TargetTotalToeDeg = 0.2, ToleranceTotalToeDeg = 0.08 }, new Axle { Number = 2 });
        ToleranceFact[] facts = [new() { Class = VehicleClass.Van, Quantity = Quantity.FrontTotalToe, PlusMinus = 0.3, From = new(2025, 1, 1) }];
        var found = Tolerances.For(vehicle, Quantity.FrontTotalToe, 1, facts, Day)!.Value;
        Assert.Equal((0.2, 0.08), (found.Target, found.PlusMinus));
    }
}
