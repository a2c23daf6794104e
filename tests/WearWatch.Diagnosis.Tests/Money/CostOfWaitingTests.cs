using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Geometry;
using WearWatch.Diagnosis.Money;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tests.Causes;

namespace WearWatch.Diagnosis.Tests.Money;

public sealed class CostOfWaitingTests
{
    private static readonly MoneyInputs Prices = new() { Currency = "EUR", JobPrice = 250, EnergyPrice = 1.5, TyrePrice = 300, ChangeAtDepthMm = 4, KmPerWeek = 1000 };

    private static readonly VehicleFigures Trailer = CauseCases.Trailer(2).WithTyres(p => CauseCases.Tyre(p));

    private static Verdict Told(double probability, double extraWear, double dragN) => new()
    {
        MisalignedProbability = probability,
        Causes = [],
        Effects = [new StoryEffect(probability, Trailer.Vehicle.Positions().ToDictionary(p => p, _ => extraWear), 0, dragN)],
    };

    [Fact]
    public void Tyres_cost_the_extra_wear_times_their_price()
    {
        // Derived from the wear multiplier 1.64 at 0.2° on 0.25° of service slip: four tyres, 0.10 mm per 1000 km,
        // 6 mm to give, 300 EUR, 1000 km a week: 4·0.64·0.10/6·300 = 12.80 EUR. The mean of the rate's own spread
        // (log-normal, 0.20) lifts it by exp(0.02).
        var cost = CostOfWaiting.Of(Trailer, Told(1, WearMultiplier.Of(0.2, 0.25) - 1, 0), Prices);
        Assert.Equal(12.80 * Math.Exp(0.02), cost.TyresPerWeek, 1e-3);
        Assert.True(cost.PerWeek.Low < 12.8 && cost.PerWeek.High > 12.8);
    }

    [Theory]
    [InlineData(1, 182.77)] // derived: four tyres of 150 kN/rad, 1°
    [InlineData(0.5, 45.69)]
    public void Drag_is_paid_as_fuel(double degrees, double newtons)
    {
        var drag = 4 * ToeDrag.TyreN(150_000, degrees);
        Assert.Equal(newtons, drag, 0.01);
        // 182.77 N is 1.3435 L per 100 km (η 0.38, 35.8 MJ/L): 10 × 1.3435 × 1.50 EUR a week.
        Assert.Equal(10 * 1.3435 * 1.5 * newtons / 182.77, CostOfWaiting.DragCostPerWeek(drag, false, Prices), 2e-3);
        Assert.True(CostOfWaiting.DragCostPerWeek(drag, true, Prices with { EnergyPrice = 0.3 }) > 0);
    }

    [Fact]
    public void Probability_is_inside_the_cost()
    {
        var (half, whole) = (CostOfWaiting.Of(Trailer, Told(0.5, 0.64, 40), Prices), CostOfWaiting.Of(Trailer, Told(1, 0.64, 40), Prices));
        Assert.Equal(whole.PerWeek.Value / 2, half.PerWeek.Value, 1e-9);
        Assert.Equal(0, half.PerWeek.Low);
        Assert.True(half.PerWeek.High > half.PerWeek.Value);
    }

    [Fact]
    public void A_vehicle_in_order_costs_nothing()
    {
        var cost = CostOfWaiting.Of(Trailer, new Verdict { MisalignedProbability = 0, Causes = [] }, Prices);
        Assert.Equal(new Interval(0, 0, 0), cost.PerWeek);
    }

    [Fact]
    public void Cost_grows_with_distance_and_net_benefit_is_cost_over_the_horizon_less_the_job()
    {
        var verdict = Told(0.8, 0.64, 40);
        var (near, far) = (CostOfWaiting.Of(Trailer, verdict, Prices), CostOfWaiting.Of(Trailer, verdict, Prices with { KmPerWeek = 2000 }));
        Assert.Equal(2 * near.PerWeek.Value, far.PerWeek.Value, 1e-9);
        var net = NetBenefit.Of(Trailer.Vehicle, CauseCases.Day, near, Prices);
        Assert.Equal(52, net.Weeks);
        Assert.Equal(52 * near.PerWeek.Value - 250, net.Value.Value, 1e-9);
        Assert.Equal(-250, net.Value.Low, 1e-9);
    }

    [Fact]
    public void Horizon_ends_with_the_vehicles_return_or_its_next_alignment()
    {
        var vehicle = Trailer.Vehicle with { LeavesOn = CauseCases.Day.AddDays(70), NextAlignmentOn = CauseCases.Day.AddDays(35) };
        Assert.Equal(5, NetBenefit.WeeksToGo(vehicle, CauseCases.Day, 52));
        Assert.Equal(10, NetBenefit.WeeksToGo(vehicle with { NextAlignmentOn = null }, CauseCases.Day, 52));
        Assert.Equal(0, NetBenefit.WeeksToGo(vehicle, CauseCases.Day.AddDays(100), 52));
    }

    [Fact]
    public void Operators_own_prices_apply_and_what_is_missing_is_said()
    {
        Price[] prices =
        [
            new() { Kind = PriceKind.AlignmentJob, Class = VehicleClass.Trailer, Amount = 199, Currency = "EUR", From = new(2026, 1, 1) },
            new() { Kind = PriceKind.AlignmentJob, Amount = 150, Currency = "EUR", From = new(2026, 6, 1) },
            new() { Kind = PriceKind.Fuel, Amount = 9, Currency = "USD", From = new(2026, 1, 1) },
        ];
        OperatorSetting[] settings = [new() { Name = SettingName.ChangeAtDepth, Value = 3.5, From = new(2026, 1, 1) }];
        var inputs = MoneyInputs.For(Trailer.Vehicle, Trailer.Depot, prices, settings, CauseCases.Day);
        Assert.Equal((199, 3.5), (inputs.JobPrice, inputs.ChangeAtDepthMm));
        Assert.Contains(inputs.Assumed, a => a.StartsWith("fuel", StringComparison.Ordinal));
        Assert.DoesNotContain(inputs.Assumed, a => a.StartsWith("alignment", StringComparison.Ordinal));
    }

    [Fact]
    public void A_judged_vehicle_with_worn_edges_costs_more_than_a_sound_one()
    {
        CostOfWaiting Cost(double edge) => Of(CauseCases.Van().WithTyres(p => CauseCases.Tyre(p, p.Axle == 1 ? edge : 0, p.Axle == 1 ? (p.Side == Side.Right ? 9 : 0.5) * edge : 0)).WithSteering());
        static CostOfWaiting Of(VehicleFigures f) => CostOfWaiting.Of(f, f.Judge(), MoneyInputs.For(f.Vehicle, f.Depot, [], [], f.AsOf));
        var (sound, worn) = (Cost(0), Cost(0.1));
        Assert.True(worn.PerWeek.Value > 5 * sound.PerWeek.Value);
        Assert.True(worn.PerWeek.Low > 0);
    }
}
