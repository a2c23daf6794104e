namespace WearWatch.Simulator;

/// <summary>An invented depot. Coordinates are those of open country in the right jurisdiction.</summary>
/// <param name="RoadSide">+1 where traffic keeps right (the road falls right, so its left side is higher), −1 where it keeps left.</param>
/// <param name="PriceFactor">Local prices over those in EUR.</param>
public sealed record Depot(
    int Index, string Id, string Name, int RoadSide, string Jurisdiction, string TimeZone, string Currency, double PriceFactor,
    double FuelPrice, double EnergyPrice, double Latitude, double Longitude)
{
    public static readonly Depot[] All =
    [
        new(0, "LINDACH", "Lindach yard", +1, "DE", "Europe/Berlin", "EUR", 1.0, 1.42, 0.24, 49.1460, 9.6120),
        new(1, "INNAU", "Innau service station", +1, "AT", "Europe/Vienna", "EUR", 1.0, 1.38, 0.22, 48.2210, 13.4810),
        new(2, "THORNWICK", "Thornwick depot", -1, "GB", "Europe/London", "GBP", 0.86, 1.24, 0.23, 52.3710, -0.9620),
    ];

    /// <summary>
    /// Least legal depth, mm: Germany StVZO §36(2) 1.6; Austria KDV §4(4) 1.6 up to 3.5 t, 2.0 above; Great
    /// Britain C&amp;U Reg 27 1.6 up to 3.5 t, 1.0 above.
    /// </summary>
    public double LimitMm(VehicleType type) => (Jurisdiction, Heavy: type.GrossMassKg > 3500) switch
    {
        ("AT", true) => 2.0,
        ("GB", true) => 1.0,
        _ => 1.6,
    };

    /// <summary>Home depot of the i-th of n vehicles: two fifths, a quarter, the rest.</summary>
    public static Depot Of(int index, int count) => index < 0.4 * count ? All[0] : index < 0.65 * count ? All[1] : All[2];
}
