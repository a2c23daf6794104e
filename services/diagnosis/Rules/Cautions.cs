namespace WearWatch.Diagnosis.Rules;

/// <summary>Where the work can hurt someone.</summary>
internal static class Cautions
{
    public const string UnderVehicle = "Rated stands and chocks before anyone works beneath; let air suspensions down first.";
    public const string Demount = "Deflate before the tyre is demounted; inflate split rims in a cage.";
    public const string RunFlat = "A tyre run this soft may have a damaged casing: deflate and inspect inside before inflating, then inflate in a cage.";
    public const string DoNotDrive = "Do not drive on this tyre. Deflate before it is demounted; inflate split rims in a cage.";
    public const string LiveSteering = "Never unplug or adjust electric steering while it is live; zero it by the maker's procedure. Cameras and radar may need calibration after an alignment.";
    public const string HotHub = "A hub with a dragging brake can burn: bring the hand near before touching.";
}
