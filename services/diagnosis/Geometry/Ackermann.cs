namespace WearWatch.Diagnosis.Geometry;

/// <summary>Turning angles at which both front wheels roll about one centre.</summary>
public static class Ackermann
{
    /// <summary>Steer of the outer wheel, deg: cot δo − cot δi = w/L.</summary>
    /// <param name="wheelbaseM">m.</param>
    /// <param name="kingpinDistanceM">Distance between the steering axes on the ground, m.</param>
    /// <param name="innerDeg">Steer of the inner wheel, deg, above 0 and below 60.</param>
    public static double OuterDeg(double wheelbaseM, double kingpinDistanceM, double innerDeg) =>
        Math.Atan(1 / (1 / Math.Tan(Toe.Radians(innerDeg)) + kingpinDistanceM / wheelbaseM)) * 180 / Math.PI;
}
