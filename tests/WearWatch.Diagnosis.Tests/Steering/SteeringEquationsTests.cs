using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Steering;

/// <summary>Each value follows from the equation named, worked out apart from this code.</summary>
public class SteeringEquationsTests
{
    private static double Deg(double rad) => rad * 180 / Math.PI;

    // Gillespie 1992: steering wheel for a thrust angle = ratio × thrust.
    [Fact]
    public void Thrust_of_0_15_deg_at_ratio_16_turns_the_wheel_2_4_deg() => Assert.Equal(2.40, SteeringEquations.ThrustWheelAngleDeg(0.15, 16), 1e-6);

    // Plane geometry: L tan τ.
    [Fact]
    public void Thrust_of_0_15_deg_offsets_a_3_2_m_wheelbase_by_8_378_mm() => Assert.Equal(8.378, 1000 * SteeringEquations.CrabOffset(3.2, 0.15), 0.01);

    // Tseng, Vehicle System Dynamics 36 (2001), steady form.
    [Fact]
    public void Bank_of_1_168_deg_from_quarter_metre_lateral_at_25_m_s() => Assert.Equal(1.1682, Deg(Math.Asin(SteeringEquations.SineOfBank(0.25, 25, 0.002))), 1e-3);

    // Statics of the inclined plane.
    [Fact]
    public void Two_percent_pulls_3500_kg_with_687_N() => Assert.Equal(686.56, SteeringEquations.BankSideForce(3500, 0.02), 0.1);

    // Gillespie 1992, steering moment = side force × trail; 55 % in front, trail 52 mm, ratio 16.
    [Fact]
    public void The_same_bank_takes_1_227_N_m_at_the_column() =>
        Assert.Equal(1.2272, SteeringEquations.ColumnTorque(0.55 * SteeringEquations.BankSideForce(3500, 0.02), 0.052, 16), 1e-3);

    // Gillespie 1992, K = Wf/Cf − Wr/Cr.
    [Fact]
    public void Understeer_gradient_of_a_van_is_1_257_deg_per_g() => Assert.Equal(1.2573, Deg(SteeringEquations.UndersteerGradient(18_000, 160_000, 16_300, 180_000)), 1e-3);

    // Gillespie 1992, r/δ = v/(L + K v²/g).
    [Fact]
    public void Yaw_gain_of_the_same_van_at_25_m_s_is_5_per_s() =>
        Assert.Equal(5.0019, SteeringEquations.YawGain(3.6, 25, SteeringEquations.UndersteerGradient(18_000, 160_000, 16_300, 180_000)), 1e-3);

    // Winkler, Vehicle System Dynamics 29 (1998) 141.
    [Fact]
    public void A_tandem_turns_like_a_longer_wheelbase() => Assert.Equal(5.8900, SteeringEquations.TandemWheelbase(5.5, 1.31, 4), 1e-3);

    // SAE J1939-71, SPN 1807: 1/1024 rad per bit, offset −31.374 rad.
    [Fact]
    public void Raw_32127_of_the_stability_message_is_straight_ahead() => Assert.Equal(2.34e-5, J1939Signals.SteeringWheelAngleRad(32127)!.Value, 1e-6);

    [Fact]
    public void Error_codes_of_the_stability_message_are_no_angles()
    {
        Assert.NotNull(J1939Signals.SteeringWheelAngleRad(0xFAFF));
        Assert.Null(J1939Signals.SteeringWheelAngleRad(0xFB00));
        Assert.Null(J1939Signals.YawRateRadS(0xFFFF));
        Assert.Null(J1939Signals.LateralAcceleration(0xFE00));
        Assert.Null(J1939Signals.LongitudinalAcceleration(0xFF));
    }
}
