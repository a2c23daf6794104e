using System.Globalization;

namespace WearWatch.Diagnosis.Steering;

/// <summary>Names the stretch of road under a run: a grid square of about 400 m and the direction of travel to 45°.</summary>
public static class RoadCell
{
    /// <summary>Side of a square, deg of latitude: 400 m.</summary>
    public const double SideDeg = 0.0036;

    /// <summary>Below this change of position no direction is taken, m.</summary>
    public const double LeastMoveM = 20;

    private const double MetresPerDeg = 111_195; // mean earth radius 6371 km

    /// <param name="latitude">Of the run's middle, deg.</param>
    /// <param name="longitude">Of the run's middle, deg.</param>
    /// <param name="northM">Change of position over the run to the north, m.</param>
    /// <param name="eastM">Change of position over the run to the east, m.</param>
    /// <returns>"row:column:octant" (0 north, 2 east), or null where position or direction is unknown.</returns>
    public static string? Of(double latitude, double longitude, double northM, double eastM)
    {
        if (!(Math.Abs(latitude) <= 89 && Math.Abs(longitude) <= 180)) return null;
        if (!(northM * northM + eastM * eastM >= LeastMoveM * LeastMoveM)) return null;
        var row = (int)Math.Floor(latitude / SideDeg);
        var shrink = Math.Cos((row + 0.5) * SideDeg * Math.PI / 180);
        var column = (int)Math.Floor(longitude * shrink / SideDeg);
        var octant = ((int)Math.Round(Math.Atan2(eastM, northM) / (Math.PI / 4)) + 8) % 8;
        return string.Create(CultureInfo.InvariantCulture, $"{row}:{column}:{octant}");
    }

    /// <summary>Cell of a run from the positions of its start, middle and end, deg.</summary>
    public static string? Of((double Latitude, double Longitude) start, (double Latitude, double Longitude) middle, (double Latitude, double Longitude) end) =>
        Of(middle.Latitude, middle.Longitude, (end.Latitude - start.Latitude) * MetresPerDeg,
            (end.Longitude - start.Longitude) * MetresPerDeg * Math.Cos(middle.Latitude * Math.PI / 180));
}
