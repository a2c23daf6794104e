using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Rules;

/// <summary>What a check is for; with the axle's suspension it picks the words.</summary>
public enum CheckFor
{
    Toe, SideForce, WheelCamber, TurnAngles, AxleDirection, TrailerDirection, SteeringPull, OffCentreWheel, Pressure, WearRoundTyre,
    DiagonalWear, FastWear, DepthMatch, UnsafeTyre, Inspection,
    ChangeWithoutRecord, ChangeAtTyres, ChangeAtWorkshop, SteeringDrift, WearChange,
}

/// <summary>One row of the table; the suspension is null where it makes no difference.</summary>
public sealed record CheckWords(CheckFor For, Suspension? Suspension, string Words, string Source);

/// <summary>
/// What to look at first: the cheap before the dear, what invalidates a measurement before the measurement, and the
/// rear axle before the front (tandems and rears before the steer axle: a tyre dealer's recommendations).
/// </summary>
public static class FirstCheck
{
    private const string Practice = "common practice, no source";
    private const string Before = "Cold pressures and matching tyres first";

    public static IReadOnlyList<CheckWords> Table { get; } =
    [
        new(CheckFor.Toe, null, $"{Before}; then wheel bearings and joints by hand, bushes and ride height; then total toe, the rear axle before the front.", Practice),
        new(CheckFor.Toe, Suspension.BeamLeaf, $"{Before}; then wheel bearings, kingpins and track-rod ends by hand; U-bolts and spring eyes; then total toe as loaded in service, rear axles before the front.", Practice),
        new(CheckFor.Toe, Suspension.BeamAir, $"{Before}; then wheel bearings, kingpins and track-rod ends by hand; arm bushes; set the ride height; then total toe, rear axles before the front.", Practice),
        new(CheckFor.Toe, Suspension.Strut, $"{Before}; then wheel bearings, ball joints and track-rod ends by hand; lower-arm bushes and strut top mounts; ride height; then total toe, rear before front.", Practice),
        new(CheckFor.Toe, Suspension.DoubleWishbone, $"{Before}; then wheel bearings, both ball joints and track-rod ends by hand; wishbone bushes; ride height; then total toe, rear before front.", Practice),
        new(CheckFor.Toe, Suspension.TrailingArm, $"{Before}; then wheel bearings by hand; arm bushes and their brackets; then this axle's total toe, which shims or a straight axle must give where it cannot be set.", Practice),
        new(CheckFor.Toe, Suspension.SemiTrailingArm, $"{Before}; then wheel bearings by hand; arm bushes; ride height and load, for toe moves with both; then this axle's total toe.", Practice),

        new(CheckFor.SideForce, null, $"{Before}; then the direction of the rear axles to the frame and to each other; only then front toe and turning angles at 20 deg.", Practice),

        new(CheckFor.WheelCamber, null, $"{Before}; then play in this wheel's bearing and joints; then camber of both wheels of the axle.", Practice),
        new(CheckFor.WheelCamber, Suspension.BeamLeaf, $"{Before}; then this wheel's bearing and kingpin; overload; then camber of both wheels: a beam out of camber is bent, do not bend it back without the maker's leave.", Practice),
        new(CheckFor.WheelCamber, Suspension.BeamAir, $"{Before}; then this wheel's bearing and kingpin; ride height left and right; then camber of both wheels: a beam out of camber is bent.", Practice),
        new(CheckFor.WheelCamber, Suspension.Strut, $"{Before}; then this wheel's bearing and ball joint; lower-arm bush, strut for a bend, top mount; spring and ride height; then camber of both wheels.", Practice),
        new(CheckFor.WheelCamber, Suspension.DoubleWishbone, $"{Before}; then this wheel's bearing and both ball joints; wishbone bushes; spring and ride height; then camber of both wheels.", Practice),
        new(CheckFor.WheelCamber, Suspension.TrailingArm, $"{Before}; then this wheel's bearing; arm and stub axle for a bend; bushes; then camber of both wheels.", Practice),
        new(CheckFor.WheelCamber, Suspension.SemiTrailingArm, $"{Before}; then this wheel's bearing; arm bushes; ride height and load, for camber moves with both; then camber of both wheels.", Practice),

        new(CheckFor.TurnAngles, null, $"{Before}; then the direction of the rear axles; then turning angles of both wheels at 20 deg, steering arms for a bend, then front toe.", Practice),

        new(CheckFor.AxleDirection, null, $"{Before}; then wheel bearings; what locates this axle; then its direction to the frame, before anything on the front axle is touched.", Practice),
        new(CheckFor.AxleDirection, Suspension.BeamLeaf, $"{Before}; then wheel bearings; U-bolts, spring centre bolts and shackles; torque-rod bushes; then the axle's direction to the frame and the spacing left and right to its neighbour.", Practice),
        new(CheckFor.AxleDirection, Suspension.BeamAir, $"{Before}; then wheel bearings; arm and torque-rod bushes; ride height left and right; then the axle's direction to the frame and the spacing left and right to its neighbour.", Practice),
        new(CheckFor.AxleDirection, Suspension.TrailingArm, $"{Before}; then wheel bearings; arm bushes and brackets left and right; then the axle's direction to the vehicle's centreline.", Practice),
        new(CheckFor.AxleDirection, Suspension.SemiTrailingArm, $"{Before}; then wheel bearings; arm and subframe bushes; ride height; then toe of each wheel of the axle.", Practice),

        new(CheckFor.TrailerDirection, null, $"{Before}; then wheel bearings; axle bushes, U-bolts and brackets; then the distance from each end of every axle to the kingpin, empty and on level ground.", Practice),

        new(CheckFor.SteeringPull, null, "Set cold pressures and drive again; swap the steer tyres left and right and see whether the pull changes side; feel the hubs for a dragging brake; then joints and bushes; then rear axle direction, camber and caster.", Practice),
        new(CheckFor.SteeringPull, Suspension.BeamLeaf, "Set cold pressures and drive again; swap the steer tyres left and right and see whether the pull changes side; feel the hubs for a dragging brake; kingpins, spring eyes and wedges; then rear axle direction, camber and caster.", Practice),
        new(CheckFor.SteeringPull, Suspension.BeamAir, "Set cold pressures and drive again; swap the steer tyres left and right and see whether the pull changes side; feel the hubs for a dragging brake; kingpins and ride height left and right; then rear axle direction, camber and caster.", Practice),

        new(CheckFor.OffCentreWheel, null, "Measure the rear axle's direction first; then front toe of each wheel with the steering wheel centred; then the zero of the angle sensor by the maker's procedure.", Practice),
        new(CheckFor.Pressure, null, "Set the cold pressure for the load carried and look for a leak; read it again after a day.", Practice),
        new(CheckFor.WearRoundTyre, null, "Damper, balance and run-out of the wheel; then wheel bearing play; toe only when these are in order.", Practice),
        new(CheckFor.DiagonalWear, null, $"{Before}; then bearing end play and slack in what locates the axle; then the axle's total toe.", Practice),
        new(CheckFor.DiagonalWear, Suspension.TrailingArm, $"{Before}; then bearing end play and arm bushes; then each wheel's toe and camber.", Practice),
        new(CheckFor.FastWear, null, $"{Before}; load and duty; then read the tread at three grooves across before asking for an alignment.", Practice),
        new(CheckFor.DepthMatch, null, "Measure both tyres again at three places; match the pair before any alignment is judged.", Practice),
        new(CheckFor.UnsafeTyre, null, "Look at this tyre now and do not drive on until it is changed or passed by a competent person.", Practice),
        new(CheckFor.Inspection, null, "Inspect the vehicle, starting with the figures named; measure them again before anything is adjusted.", Practice),

        new(CheckFor.ChangeWithoutRecord, null, "Look at wheels, rims, tyres and steering arms for the mark of a kerb or a hole in the road, and ask the driver of that day; joints and track-rod ends by hand; then front toe of each wheel and the rear axle's direction.", Practice),
        new(CheckFor.ChangeAtTyres, null, "Set cold pressures and see that the tyres of the axle match; swap the steer tyres left and right: what changes side is the tyres' and not the geometry's.", Practice),
        new(CheckFor.ChangeAtWorkshop, null, "Hold the workshop's figures before and after against this change; drive again on a road the vehicle knows before anything is adjusted anew.", Practice),
        new(CheckFor.SteeringDrift, null, "Set cold pressures; then wear of bushes, ball joints and track-rod ends by hand, ride height; then toe, rear before front.", Practice),
        new(CheckFor.WearChange, null, $"{Before}; what the vehicle carried and where it ran since then; then read the tread at three grooves across before asking for an alignment.", Practice),
    ];

    /// <summary>Words for a check on an axle of this suspension; the general words where the suspension makes no difference.</summary>
    public static string For(CheckFor check, Suspension? suspension = null) =>
        (Table.FirstOrDefault(row => row.For == check && row.Suspension is not null && row.Suspension == suspension)
         ?? Table.First(row => row.For == check && row.Suspension is null)).Words;
}
