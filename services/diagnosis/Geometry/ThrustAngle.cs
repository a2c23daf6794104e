namespace WearWatch.Diagnosis.Geometry;

/// <summary>What a rear axle that points aside does to a vehicle running straight.</summary>
public static class ThrustAngle
{
    /// <summary>Steering-wheel angle when travelling straight, deg, + left: ratio × (thrust − front axle direction).</summary>
    /// <param name="steeringRatio">Steering-wheel angle per road-wheel angle on centre, 10 to 30.</param>
    /// <param name="thrustDeg">Direction of the rear axle, deg, + left, within ±3.</param>
    /// <param name="frontDirectionDeg">Direction of the front axle with the wheel centred, deg, + left.</param>
    /// <remarks>Kinematics of a two-axle vehicle without side force: both axles run parallel.</remarks>
    public static double SteeringWheelDeg(double steeringRatio, double thrustDeg, double frontDirectionDeg = 0) =>
        steeringRatio * (thrustDeg - frontDirectionDeg);

    /// <summary>Sideways offset of the rear axle's track from the front's, mm: wheelbase·tan(thrust).</summary>
    /// <param name="wheelbaseM">m, 2 to 14.</param>
    /// <param name="thrustDeg">deg.</param>
    public static double CrabMm(double wheelbaseM, double thrustDeg) => 1000 * wheelbaseM * Math.Tan(Toe.Radians(thrustDeg));
}
