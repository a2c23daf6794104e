using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Chassis;

/// <summary>Whether an angle can be set on an axle.</summary>
/// <param name="CanBeSet">As the axle usually leaves the factory; the vehicle's own axle facts stand above it.</param>
/// <param name="Where">Where it is set.</param>
/// <param name="Otherwise">What is bent, worn or to be replaced when it is out and cannot be set.</param>
public sealed record Setting(bool CanBeSet, string Where, string Otherwise);

/// <summary>One kind of suspension, in the words of a workshop.</summary>
/// <param name="Suspension">Kind.</param>
/// <param name="Called">As in 'a beam axle on leaf springs'.</param>
/// <param name="Beam">Both wheels on one beam: what one wheel does the other does.</param>
/// <param name="Joints">What is tried by hand on a steered axle of this kind.</param>
/// <param name="Located">What holds the axle or the wheel in its place, and wears.</param>
/// <param name="Height">What ride height and load do, and what to look at.</param>
/// <param name="CamberDegPerCm">Camber of one wheel for 10 mm of compression, deg; negative: the top leans in.</param>
/// <param name="ToeDegPerCm">Toe of one wheel for 10 mm of compression, deg; of either sign by design, so the size only.</param>
/// <param name="LadenCamberDeg">Camber laden less camber empty, deg.</param>
/// <param name="SteeredToe">Toe of a steered axle.</param>
/// <param name="FixedToe">Toe of an axle that does not steer.</param>
/// <param name="Camber">Camber.</param>
/// <param name="Caster">Caster of a steered axle.</param>
/// <param name="Direction">Direction of the whole axle to the frame.</param>
/// <param name="Source">Where the row comes from.</param>
public sealed record SuspensionRow(
    Suspension Suspension, string Called, bool Beam, string Joints, string Located, string Height,
    double CamberDegPerCm, double ToeDegPerCm, double LadenCamberDeg,
    Setting SteeredToe, Setting FixedToe, Setting Camber, Setting Caster, Setting Direction, string Source);

/// <summary>What is known of each kind of suspension, one row a kind. Words are common practice, no source; figures from memory.</summary>
public static class SuspensionTable
{
    private const string Memory = "words: common practice, no source; figures: from memory";

    private static readonly Setting TrackRod = new(true, "at the track rod", "a bent track rod or steering arm");
    private static readonly Setting BentBeam = new(false, "", "a bent beam or stub axle or an overloaded axle; a beam is replaced and not bent back without the maker's leave");

    public static IReadOnlyList<SuspensionRow> Rows { get; } =
    [
        new(Suspension.Unknown, "an axle whose suspension is not recorded", false,
            "joints and track-rod ends by hand", "bushes and what locates the axle", "ride height",
            0, 0, 0,
            TrackRod,
            new(true, "where the maker provides for it", "bent or worn parts"),
            new(true, "where the maker provides for it", "bent or worn parts"),
            new(true, "where the maker provides for it", "bent or worn parts"),
            new(true, "where the maker provides for it", "bent or worn parts"),
            "common practice, no source"),

        new(Suspension.BeamLeaf, "a beam axle on leaf springs", true,
            "kingpins and track-rod ends by hand", "U-bolts, spring centre bolts, shackles and spring eyes",
            "sagged or cracked leaves; the beam bends with its load, so measure loaded as in service",
            0, 0.02, -0.15,
            TrackRod, BentBeam, BentBeam,
            new(true, "by wedges between spring and beam", "sagged springs or a twisted beam"),
            new(true, "by the spring seat and U-bolts or an adjustable torque rod", "a sheared centre bolt, a worn spring eye or a shifted hanger"),
            Memory),

        new(Suspension.BeamAir, "a beam axle on air springs", true,
            "kingpins and track-rod ends by hand", "arm pivot bushes, torque rods and U-bolts",
            "ride height left and right by the levelling valve, for the arms turn the axle with it; the beam bends with its load",
            0, 0.01, -0.15,
            TrackRod, BentBeam, BentBeam,
            new(true, "by wedges or eccentric arm pivots", "worn arm pivots or a twisted beam"),
            new(true, "at the eccentric pivot bolts or adjustable torque rods", "worn pivot bushes or a bent arm or bracket"),
            Memory),

        new(Suspension.BeamCoil, "a beam axle on coil springs with links and a lateral rod", true,
            "kingpins or ball joints and track-rod ends by hand", "link bushes and both ends of the lateral rod",
            "ride height: the lateral rod shifts the axle sideways with it and does not turn it",
            0, 0.01, -0.05,
            TrackRod, BentBeam, BentBeam,
            new(false, "", "worn link bushes or bent links"),
            new(false, "", "worn link bushes, a bent link or a shifted bracket; adjustable links where the maker offers them"),
            Memory),

        new(Suspension.Strut, "an axle on struts", false,
            "ball joints and track-rod ends by hand", "lower-arm bushes and strut top mounts",
            "springs and ride height",
            -0.10, 0.03, -0.3,
            TrackRod,
            new(true, "at the toe link or its eccentric", "a bent link or a worn bush"),
            new(false, "", "a bent strut, knuckle or arm, a worn lower-arm bush or top mount, or a shifted subframe"),
            new(false, "", "a worn lower-arm bush, a bent arm or a shifted subframe"),
            new(true, "by the toe of each wheel", "a shifted subframe"),
            Memory),

        new(Suspension.DoubleWishbone, "an axle on double wishbones", false,
            "both ball joints and track-rod ends by hand", "wishbone bushes",
            "springs and ride height",
            -0.15, 0.02, -0.4,
            TrackRod,
            new(true, "at the toe link or its eccentric", "a bent link or a worn bush"),
            new(true, "by shims or eccentrics of the wishbones", "a bent wishbone or knuckle or a worn bush"),
            new(true, "by shims or eccentrics of the wishbones", "a bent wishbone or a worn bush"),
            new(true, "by the toe of each wheel", "a shifted subframe"),
            Memory),

        new(Suspension.TrailingArm, "an axle on trailing arms", false,
            "joints by hand", "arm bushes and their brackets",
            "ride height left and right",
            0, 0, -0.1,
            TrackRod,
            new(false, "", "a bent arm or stub axle or worn arm bushes; shims behind the stub axle where the maker offers them"),
            new(false, "", "a bent arm or stub axle or worn arm bushes"),
            new(false, "", "a bent arm"),
            new(false, "", "worn arm bushes or a shifted bracket"),
            Memory),

        new(Suspension.SemiTrailingArm, "an axle on semi-trailing arms", false,
            "joints by hand", "arm and subframe bushes",
            "springs, ride height and load, for toe and camber move with all three",
            -0.20, 0.05, -0.6,
            TrackRod,
            new(true, "at the eccentric bolt of the arm", "a bent arm or worn bushes"),
            new(false, "", "sagged springs, worn bushes or a bent arm: camber moves with ride height and cannot be set by itself"),
            new(false, "", "a bent arm"),
            new(true, "by the toe of each wheel", "a shifted subframe or worn subframe bushes"),
            Memory),
    ];

    public static SuspensionRow Of(Suspension suspension) => Rows.FirstOrDefault(r => r.Suspension == suspension) ?? Rows[0];
}
