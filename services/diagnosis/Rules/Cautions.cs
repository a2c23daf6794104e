using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Rules;

/// <summary>Where the work can hurt someone.</summary>
internal static class Cautions
{
    private const string Stands = "Rated stands and chocks before anyone works beneath";

    /// <summary>Before anyone works on this axle.</summary>
    public static string Under(Axle axle) => axle.Suspension switch
    {
        Suspension.BeamAir => $"{Stands}; let the air springs down first.",
        Suspension.BeamLeaf => $"{Stands}; U-bolts and wheel nuts are torqued again after 50 to 100 miles.",
        Suspension.Strut => $"{Stands}; a strut's spring is under load: hold it in a compressor before the top mount is loosened.",
        Suspension.DoubleWishbone or Suspension.BeamCoil or Suspension.SemiTrailingArm => $"{Stands}; a coil spring is under load: support the arm before a joint is parted.",
        Suspension.TrailingArm => $"{Stands}.",
        _ => UnderVehicle,
    };

    public const string UnderVehicle = "Rated stands and chocks before anyone works beneath; let air suspensions down first.";
    public const string Demount = "Deflate before the tyre is demounted; inflate split rims in a cage.";
    public const string RunFlat = "A tyre run this soft may have a damaged casing: deflate and inspect inside before inflating, then inflate in a cage.";
    public const string DoNotDrive = "Do not drive on this tyre. Deflate before it is demounted; inflate split rims in a cage.";
    public const string LiveSteering = "Never unplug or adjust electric steering while it is live; zero it by the maker's procedure. Cameras and radar may need calibration after an alignment.";
    public const string HotHub = "A hub with a dragging brake can burn: bring the hand near before touching.";
}
