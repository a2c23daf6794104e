using WearWatch.Diagnosis.Geometry;

namespace WearWatch.Diagnosis.Tests.Geometry;

/// <summary>
/// Simple static cases worked out by hand beside the test, from the loads to what the driver holds: units and signs must come through the
/// whole chain. The balances are those of Gillespie, Fundamentals of Vehicle Dynamics (SAE 1992); g = 9.81 m/s².
/// </summary>
public sealed class StaticCaseTests
{
    [Fact]
    public void Half_a_degree_of_camber_split_pulls_like_three_parts_in_a_thousand_of_crossfall()
    {
        // 6000 N/rad × 0.5° × π/180 = 52.36 N; a 1750 kg car weighs 17 167.5 N: 0.305 %; a 3500 kg van half of that.
        var force = CamberThrust.ForceN(6_000, 0.5);
        Assert.Equal(0.00305, force / (1750 * 9.81), 1e-5);
        Assert.Equal(0.001525, force / (3500 * 9.81), 1e-5);
        // Trails 52 mm together, ratio 16, all of it on the steer axle: 52.36 × 0.052 ÷ 16 = 0.1702 N·m.
        Assert.Equal(0.1702, ColumnTorque.FromSideForceNm(force, 1, 0.052, 16), 1e-4);
    }

    [Fact]
    public void The_pull_of_a_caster_split_grows_with_the_load_it_carries()
    {
        // Fz·q·Δν: 9000 × 0.056 × 1° = 8.796 N·m at the axis, ÷ 16 = 0.5498 at the column; laden to 11 250 N a quarter more.
        var empty = ColumnTorque.FromCasterSplitNm(9_000, 0.056, 1, 16);
        Assert.Equal(8.796, 16 * empty, 1e-3);
        Assert.Equal(1.25 * empty, ColumnTorque.FromCasterSplitNm(11_250, 0.056, 1, 16), 1e-9);
        // More caster on the left: the vehicle pulls right, to the side with less; the holding torque is to the left, positive.
        Assert.True(empty > 0);
    }

    [Fact]
    public void A_thrust_angle_turns_the_wheel_to_the_side_the_axle_points_and_a_front_axle_alike_takes_it_back()
    {
        // 0.10° × 20 = 2.0° at the wheel of a truck; 5.5 m × tan 0.10° = 9.60 mm of crab.
        Assert.Equal(2.0, ThrustAngle.SteeringWheelDeg(20, 0.10), 1e-9);
        Assert.Equal(9.599, ThrustAngle.CrabMm(5.5, 0.10), 1e-3);
        Assert.Equal(0, ThrustAngle.SteeringWheelDeg(20, 0.10, 0.10), 1e-12);
        Assert.Equal(-2.0, ThrustAngle.SteeringWheelDeg(20, -0.10), 1e-9);
        // Axle direction from the wheels' toe: left 0.05 in, right 0.25 in: (0.25 − 0.05) ÷ 2 = 0.10 to the left.
        Assert.Equal(0.10, AxleDirection.Of(0.05, 0.25), 1e-12);
    }

    [Fact]
    public void A_skewed_tandem_asks_the_steer_tyres_for_the_force_that_holds_it()
    {
        // ψ 0.2°, 600 kN/rad an axle, 1.31 m apart, 5.5 m behind: 1047.2 N an axle, 1371.8 N·m, 249.4 N at the steer axle to the right.
        var steer = TandemFight.SteerAxleForceN(600_000, 0.2, 1.31, 5.5);
        Assert.Equal(-249.4, steer, 0.1);
        // Couple ÷ wheelbase, action against reaction: force × 5.5 m + force of each axle × spacing = 0.
        Assert.Equal(0, steer * 5.5 + TandemFight.AxleForceN(600_000, 0.2) * 1.31, 1e-6);
        // Two steer tyres of 170 kN/rad slip 249.4 ÷ 340 000 rad = 0.0420°; trails 80 mm, ratio 20: 0.998 N·m at the column.
        Assert.Equal(0.0420, Math.Abs(steer) / (2 * 170_000) * 180 / Math.PI, 1e-4);
        Assert.Equal(0.998, ColumnTorque.FromSideForceNm(Math.Abs(steer), 1, 0.080, 20), 1e-3);
    }

    [Fact]
    public void A_van_on_two_percent_of_crossfall_is_held_by_its_side_force_at_the_trail()
    {
        // 3500 × 9.81 × sin(atan 0.02) ≈ 686.6 N; 55 % in front at 52 mm: 19.64 N·m; ÷ 16 = 1.227 N·m.
        var column = ColumnTorque.FromSideForceNm(RoadBank.SideForceN(3500, 0.02), 0.55, 0.052, 16);
        Assert.Equal(1.227, column, 1e-3);
        // 1.227 ÷ 0.1702: the usual crown outweighs half a degree of camber split seven times.
        Assert.Equal(7.2, column / ColumnTorque.FromSideForceNm(CamberThrust.ForceN(6_000, 0.5), 1, 0.052, 16), 0.05);
    }
}
