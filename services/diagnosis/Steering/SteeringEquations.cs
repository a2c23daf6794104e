namespace WearWatch.Diagnosis.Steering;

/// <summary>Equations of straight running and of a banked road. ISO 8855 signs, + left; angles in radians unless the name says deg.</summary>
public static class SteeringEquations
{
    /// <summary>Standard gravity rounded as in the check values, m/s².</summary>
    public const double Gravity = 9.81;

    /// <summary>Body roll per bank: the accelerometer leans with the body; 0.05 to 0.10 for vans (from memory).</summary>
    public const double RollGain = 0.07;

    /// <summary>Sine of the road's bank, from what the sensors feel beyond cornering.</summary>
    /// <param name="lateralAcceleration">Specific force to the left, m/s², sensor bias removed.</param>
    /// <param name="speed">Forward speed, m/s.</param>
    /// <param name="yawRate">Yaw rate to the left, rad/s, bias removed.</param>
    /// <param name="rollGain">Body roll per bank.</param>
    /// <returns>Positive with the left side higher.</returns>
    /// <remarks>H. E. Tseng, Vehicle System Dynamics 36 (2001): bank from lateral dynamics, steady form.</remarks>
    public static double SineOfBank(double lateralAcceleration, double speed, double yawRate, double rollGain = 0) =>
        (lateralAcceleration - speed * yawRate) / (Gravity * (1 + rollGain));

    /// <summary>Side force of gravity on a cross-slope, N.</summary>
    /// <param name="massKg">Mass, kg.</param>
    /// <param name="crossSlope">Rise over run, 0.02 for 2 %.</param>
    public static double BankSideForce(double massKg, double crossSlope) => massKg * Gravity * Math.Sin(Math.Atan(crossSlope));

    /// <summary>Torque at the steering column (driver plus assist) that holds a side force at the front axle, N·m.</summary>
    /// <param name="frontSideForce">Side force carried by the front axle, N.</param>
    /// <param name="trail">Mechanical plus pneumatic trail, m.</param>
    /// <param name="ratio">Steering-wheel angle per road-wheel angle.</param>
    /// <remarks>Gillespie, Fundamentals of Vehicle Dynamics (1992), steering chapter: moment = side force × trail.</remarks>
    public static double ColumnTorque(double frontSideForce, double trail, double ratio) => frontSideForce * trail / ratio;

    /// <summary>Understeer gradient, rad per g, from axle loads, N, and cornering stiffnesses of the axles, N/rad.</summary>
    /// <remarks>Gillespie (1992), K = Wf/Cf − Wr/Cr; the manner of ISO 4138.</remarks>
    public static double UndersteerGradient(double frontLoad, double frontStiffness, double rearLoad, double rearStiffness) =>
        frontLoad / frontStiffness - rearLoad / rearStiffness;

    /// <summary>Yaw rate per road-wheel angle, 1/s.</summary>
    /// <remarks>Gillespie (1992), r/δ = v / (L + K v²/g).</remarks>
    public static double YawGain(double wheelbase, double speed, double understeerGradient) =>
        speed / (wheelbase + understeerGradient * speed * speed / Gravity);

    /// <summary>Steering-wheel angle that a yaw rate takes, in the yaw rate's angle unit; valid above 5 m/s.</summary>
    public static double CurvatureAngle(double ratio, double wheelbase, double speed, double yawRate, double understeerGradient = 0) =>
        ratio * yawRate / YawGain(wheelbase, speed, understeerGradient);

    /// <summary>Wheelbase of the two-axle vehicle that turns like one with a tandem, m.</summary>
    /// <param name="wheelbase">Steer axle to tandem centre, m.</param>
    /// <param name="spacing">Between the tandem's axles, m.</param>
    /// <param name="stiffnessRatio">Cornering stiffness of the tandem over that of the steer axle.</param>
    /// <remarks>Winkler, Vehicle System Dynamics 29 (1998) 141.</remarks>
    public static double TandemWheelbase(double wheelbase, double spacing, double stiffnessRatio) =>
        wheelbase + spacing * spacing / (4 * wheelbase) * (1 + stiffnessRatio);

    /// <summary>Sideways offset of the rear axle's track when the vehicle runs crabwise, m.</summary>
    public static double CrabOffset(double wheelbase, double thrustDeg) => wheelbase * Math.Tan(thrustDeg * Math.PI / 180);

    /// <summary>Steering-wheel angle that a thrust angle takes to run straight, deg.</summary>
    public static double ThrustWheelAngleDeg(double thrustDeg, double ratio) => ratio * thrustDeg;
}
