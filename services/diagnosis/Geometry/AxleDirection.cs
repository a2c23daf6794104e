namespace WearWatch.Diagnosis.Geometry;

/// <summary>Where an axle points. At the rear this is the thrust angle; at the front it only turns the steering wheel.</summary>
public static class AxleDirection
{
    /// <summary>Sum of both wheels' toe, deg.</summary>
    public static double TotalToe(double leftToeDeg, double rightToeDeg) => leftToeDeg + rightToeDeg;

    /// <summary>Direction of the axle, deg, positive to the left: half of right toe less left toe.</summary>
    /// <remarks>A left wheel toed in is steered right, a right wheel toed in is steered left; the mean is the axle's direction.</remarks>
    public static double Of(double leftToeDeg, double rightToeDeg) => (rightToeDeg - leftToeDeg) / 2;
}
