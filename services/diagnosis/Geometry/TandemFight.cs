namespace WearWatch.Diagnosis.Geometry;

/// <summary>Two axles of a tandem that point apart slip against each other and turn the vehicle.</summary>
public static class TandemFight
{
    /// <summary>Side force of each axle, N: C·ψ/2, opposite on the two.</summary>
    /// <param name="axleStiffnessNPerRad">Cornering stiffness of one axle, N/rad.</param>
    /// <param name="skewDeg">Front axle's direction less the rear's, deg, + left.</param>
    public static double AxleForceN(double axleStiffnessNPerRad, double skewDeg) => axleStiffnessNPerRad * Toe.Radians(skewDeg) / 2;

    /// <summary>Couple on the vehicle, N·m, positive to the left.</summary>
    /// <param name="axleStiffnessNPerRad">N/rad.</param>
    /// <param name="skewDeg">deg.</param>
    /// <param name="spacingM">Spacing of the two axles, m.</param>
    public static double CoupleNm(double axleStiffnessNPerRad, double skewDeg, double spacingM) => AxleForceN(axleStiffnessNPerRad, skewDeg) * spacingM;

    /// <summary>Side force the steer axle must give to keep straight, N, positive to the left (so opposite to the couple).</summary>
    /// <param name="axleStiffnessNPerRad">N/rad.</param>
    /// <param name="skewDeg">deg.</param>
    /// <param name="spacingM">m.</param>
    /// <param name="wheelbaseM">Steer axle to the middle of the tandem, m.</param>
    public static double SteerAxleForceN(double axleStiffnessNPerRad, double skewDeg, double spacingM, double wheelbaseM) =>
        -CoupleNm(axleStiffnessNPerRad, skewDeg, spacingM) / wheelbaseM;
}
