using WearWatch.Diagnosis.Geometry;

namespace WearWatch.Diagnosis.Tests.Geometry;

/// <summary>Check values worked out by hand from the stated equation ("derived"), or from the source named beside the number.</summary>
public sealed class GeometryReferenceTests
{
    [Fact]
    public void One_mm_per_m_of_toe_is_0_0573_degrees() =>
        Assert.Equal(0.0572958, Toe.DegreesFromMmPerM(1), 1e-6); // derived: 180/(1000π)

    [Fact]
    public void One_degree_is_17_46_mm_per_m() => Assert.Equal(17.4551, Toe.MmPerM(1), 1e-3); // derived: 1000·tan 1°

    [Fact]
    public void Toe_in_mm_needs_its_reference_diameter()
    {
        Assert.Equal(1.4186, Toe.Mm(0.2, 406.4), 1e-3); // derived
        Assert.Equal(0.0895, Toe.DegreesFromMm(1.5875, 1016), 1e-4); // derived: 1/16 in across a 40 in tyre
        Assert.Equal(0.37, Toe.DegreesFromMm(Toe.Mm(0.37, 571.5), 571.5), 1e-12); // there and back
    }

    [Fact]
    public void Axle_points_to_the_side_of_the_wheel_that_toes_in_less()
    {
        Assert.Equal(0.15, AxleDirection.Of(0.10, 0.40), 1e-9); // derived
        Assert.Equal(0.50, AxleDirection.TotalToe(0.10, 0.40), 1e-9);
    }

    [Fact]
    public void Caster_from_a_swing_of_twenty_degrees() => Assert.Equal(3.8009, CasterSwing.CasterDeg(2.6), 1e-3); // derived

    [Fact]
    public void Mechanical_trail_of_a_car_wheel() => Assert.Equal(21.677, Trail.MechanicalMm(0.31, 4), 0.01); // derived

    [Fact]
    public void Scrub_radius_changes_sign_with_inclination()
    {
        Assert.Equal(-9.9, Trail.ScrubRadiusMm(56, 310, 12), 0.05); // derived
        Assert.Equal(68.5, Trail.ScrubRadiusMm(120, 490, 6), 0.05); // derived
    }

    [Fact]
    public void Set_back_of_ten_mm() => Assert.Equal(0.358, Trail.SetBackDeg(10, 1600), 1e-3); // derived

    [Fact]
    public void Tandem_skew_from_an_eighth_of_an_inch() => Assert.Equal(0.09947, TandemScrub.AngleDeg(3.175, 1828.8), 1e-4); // derived

    [Theory]
    [InlineData(3.6, 1.5, 20, 17.5387)] // derived: cot δo − cot δi = w/L
    [InlineData(6, 1.8, 30, 26.2024)]
    public void Outer_wheel_turns_less(double wheelbase, double track, double inner, double outer) =>
        Assert.Equal(outer, Ackermann.OuterDeg(wheelbase, track, inner), 1e-3);

    [Fact]
    public void Thrust_turns_the_wheel_by_the_ratio_and_crabs_the_vehicle()
    {
        Assert.Equal(2.40, ThrustAngle.SteeringWheelDeg(16, 0.15), 1e-6); // derived
        Assert.Equal(8.378, ThrustAngle.CrabMm(3.2, 0.15), 0.01); // derived
    }

    [Fact]
    public void Bank_from_lateral_acceleration_beyond_cornering() =>
        Assert.Equal(1.1682, RoadBank.AngleDeg(0.25, 25, 0.002), 1e-3); // Tseng, VSD 36 (2001), steady form

    [Fact]
    public void Side_force_on_two_percent() => Assert.Equal(686.56, RoadBank.SideForceN(3500, 0.02), 0.1); // derived

    [Fact]
    public void Column_torque_on_two_percent() =>
        Assert.Equal(1.2272, ColumnTorque.FromSideForceNm(RoadBank.SideForceN(3500, 0.02), 0.55, 0.052, 16), 1e-3); // derived

    [Fact]
    public void Caster_split_at_the_column()
    {
        Assert.Equal(2.7488, ColumnTorque.FromCasterSplitNm(35_000, 0.090, 1, 20), 1e-3); // derived, truck
        Assert.Equal(0.55, ColumnTorque.FromCasterSplitNm(9_000, 0.056, 1, 16), 1e-3); // derived, van
    }

    [Fact]
    public void Camber_thrust_of_half_a_degree() => Assert.Equal(52.36, CamberThrust.ForceN(6_000, 0.5), 0.01); // derived

    [Fact]
    public void Understeer_gradient_and_yaw_gain()
    {
        var gradient = Understeer.GradientRadPerG(18_000, 160_000, 16_300, 180_000);
        Assert.Equal(1.2573, gradient * 180 / Math.PI, 1e-3); // Gillespie's formula, derived
        Assert.Equal(5.0019, Understeer.YawGain(3.6, gradient, 25), 1e-3); // derived
        Assert.Equal(40.1, Understeer.CharacteristicSpeed(3.6, gradient), 0.05); // derived
        Assert.True(double.IsNaN(Understeer.CharacteristicSpeed(3.6, -gradient)));
    }

    [Fact]
    public void Tandem_lengthens_the_wheelbase() => Assert.Equal(5.8900, TandemScrub.EffectiveWheelbaseM(5.5, 1.31, 4), 1e-3); // Winkler 1998, derived

    [Fact]
    public void Side_slip_of_three_quarters_of_a_degree() => Assert.Equal(13.091, SideSlip.MPerKm(0.75), 0.01); // derived

    [Fact]
    public void Brush_trail_is_a_third_of_the_half_contact_length() => Assert.Equal(25, AligningMoment.BrushTrail(75), 1e-12); // Pacejka 2012

    [Fact]
    public void Tandem_axles_fight_and_the_steer_axle_holds_against_them()
    {
        Assert.Equal(1047.2, TandemFight.AxleForceN(600_000, 0.2), 0.1); // derived
        Assert.Equal(1372, TandemFight.CoupleNm(600_000, 0.2, 1.31), 0.5); // derived
        Assert.Equal(-249.4, TandemFight.SteerAxleForceN(600_000, 0.2, 1.31, 5.5), 0.1); // derived; right, for a couple to the left
    }

    [Fact]
    public void Drag_of_a_trailer_tandem_grows_with_the_square_of_slip()
    {
        Assert.Equal(182.77, 4 * ToeDrag.TyreN(150_000, 1), 0.01); // derived
        Assert.Equal(45.69, 4 * ToeDrag.TyreN(150_000, 0.5), 0.01); // derived
        Assert.Equal(2 * ToeDrag.TyreN(150_000, 0.25), ToeDrag.AxleN(150_000, 0.5), 1e-9);
    }

    [Fact]
    public void Drag_as_fuel_and_as_share_of_road_load()
    {
        Assert.Equal(1.3435, 182.77 * ToeDrag.LitresPer100KmPerN, 1e-3); // derived: η 0.38, 35.8 MJ/L
        Assert.Equal(4.64, 100 * 182.77 / ToeDrag.RoadLoadN(40_000, 0.0055, 6, 80 / 3.6), 0.01); // derived
    }

    [Theory]
    [InlineData(0.2, 0.25, 1.64)] // derived
    [InlineData(0.1, 0.15, 1.4444)] // derived
    [InlineData(0.5, 0.35, 3.0408)] // derived
    public void Wear_multiplier(double slip, double service, double expected) => Assert.Equal(expected, WearMultiplier.Of(slip, service), 1e-4);

    [Fact]
    public void Signed_wear_is_linear_near_zero_and_square_far_out()
    {
        Assert.Equal(4 / Math.Sqrt(2 * Math.PI), WearMultiplier.Signed(1e-4) / 1e-4, 1e-3); // 1.5958
        Assert.Equal(26, WearMultiplier.Signed(5), 1e-3); // z² + 1 once n no longer changes the sign
        var slope = (WearMultiplier.Signed(0.7001) - WearMultiplier.Signed(0.6999)) / 2e-4;
        Assert.Equal(slope, WearMultiplier.SignedSlope(0.7), 1e-6);
    }
}
