using WearWatch.Diagnosis.Chassis;
using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Rules;

/// <summary>What a check is for; with the axle's suspension it picks the words.</summary>
public enum CheckFor
{
    Toe, SideForce, WheelCamber, TurnAngles, AxleDirection, TrailerDirection, SteeringPull, OffCentreWheel, Pressure, WearRoundTyre,
    DiagonalWear, FastWear, DepthMatch, UnsafeTyre, Inspection,
    ChangeWithoutRecord, ChangeAtTyres, ChangeAtWorkshop, SteeringDrift, WearChange,
    HeelToe, FlatSpot, RibWear, BrakeDrag, UnevenReturn, SteeringBinds, WheelHop, OneWayDuty,
}

/// <summary>One row of the table of checks that are the same on every axle.</summary>
public sealed record CheckWords(CheckFor For, string Words, string Source);

/// <summary>
/// What to look at first: the cheap before the dear, what invalidates a measurement before the measurement, and the
/// rear axle before the front (tandems and rears before the steer axle: a tyre dealer's recommendations). Where the axle makes a
/// difference its suspension's row of <see cref="SuspensionTable"/> gives the words.
/// </summary>
public static class FirstCheck
{
    private const string Practice = "common practice, no source";
    private const string Before = "Cold pressures and matching tyres first";

    /// <summary>The order of a careful technician; every check of an axle goes through it.</summary>
    public static IReadOnlyList<string> Order { get; } =
        ["pressures and matching tyres", "wheel bearings and joints", "bushes and what locates the axle", "ride height and load", "rear axles before the front", "the angle", "how it is set, or what is bent or worn"];

    public static IReadOnlyList<CheckWords> Table { get; } =
    [
        new(CheckFor.SideForce, $"{Before}; then the direction of the rear axles to the frame and to each other; only then front toe and turning angles at 20 deg.", Practice),
        new(CheckFor.TurnAngles, $"{Before}; then the direction of the rear axles; then turning angles of both wheels at 20 deg, steering arms for a bend, then front toe.", Practice),
        new(CheckFor.TrailerDirection, $"{Before}; then wheel bearings; axle bushes, U-bolts and brackets; then the distance from each end of every axle to the kingpin, empty and on level ground.", Practice),
        new(CheckFor.OffCentreWheel, "Measure the rear axle's direction first; then front toe of each wheel with the steering wheel centred; then the zero of the angle sensor by the maker's procedure.", Practice),
        new(CheckFor.Pressure, "Set the cold pressure for the load carried and look for a leak; read it again after a day.", Practice),
        new(CheckFor.WearRoundTyre, "Damper, balance and run-out of the wheel; then wheel bearing play; toe only when these are in order.", Practice),
        new(CheckFor.FastWear, $"{Before}; load and duty; then read the tread at three grooves across before asking for an alignment.", Practice),
        new(CheckFor.DepthMatch, "Measure both tyres again at three places; match the pair before any alignment is judged.", Practice),
        new(CheckFor.UnsafeTyre, "Look at this tyre now and do not drive on until it is changed or passed by a competent person.", Practice),
        new(CheckFor.Inspection, "Inspect the vehicle, starting with the figures named; measure them again before anything is adjusted.", Practice),
        new(CheckFor.ChangeWithoutRecord, "Look at wheels, rims, tyres and steering arms for the mark of a kerb or a hole in the road, and ask the driver of that day; joints and track-rod ends by hand; then front toe of each wheel and the rear axle's direction.", Practice),
        new(CheckFor.ChangeAtTyres, "Set cold pressures and see that the tyres of the axle match; swap the steer tyres left and right: what changes side is the tyres' and not the geometry's.", Practice),
        new(CheckFor.ChangeAtWorkshop, "Hold the workshop's figures before and after against this change; drive again on a road the vehicle knows before anything is adjusted anew.", Practice),
        new(CheckFor.SteeringDrift, "Set cold pressures; then wear of bushes, ball joints and track-rod ends by hand, ride height; then toe, rear before front.", Practice),
        new(CheckFor.WearChange, $"{Before}; what the vehicle carried and where it ran since then; then read the tread at three grooves across before asking for an alignment.", Practice),
        new(CheckFor.HeelToe, "Cold pressures, and diameters within each dual pair; which way the steps point, and the load and route; total toe only when one side alone shows it.", Practice),
        new(CheckFor.FlatSpot, "Look at the cord in the flat spot; then brakes and anti-lock of this wheel, and whether it was parked long or dragged locked.", Practice),
        new(CheckFor.RibWear, "Set cold pressures for the load; match the tyres of the axle; play of the wheel bearing; otherwise watch it at the next survey.", Practice),
        new(CheckFor.BrakeDrag, "Feel the hubs for heat after a drive without hard braking; free running of the wheel raised; then slack adjuster, caliper or wheel cylinder, and parking brake.", Practice),
        new(CheckFor.WheelHop, "Balance and run-out of the wheels; dampers for leaks and loose mounts; then wheel bearing play.", Practice),
        new(CheckFor.OneWayDuty, "Compare vehicles on the same route; run it the other way round or change the tyres over side to side; only then measure an axle.", Practice),
    ];

    /// <summary>Words for a check on this axle of this vehicle.</summary>
    public static string For(CheckFor check, Vehicle vehicle, Axle axle) =>
        OnAxle(check, vehicle.Chassis(axle), RunningToe(vehicle.Chassis(axle))) ?? Table.First(row => row.For == check).Words;

    /// <summary>Words where only the suspension is known, or nothing.</summary>
    public static string For(CheckFor check, Suspension? suspension = null)
    {
        var steers = check is not (CheckFor.AxleDirection or CheckFor.DiagonalWear);
        var axle = new Axle { Number = 1, Steered = steers, Suspension = suspension ?? Suspension.Unknown };
        var alone = AxleChassis.Of(new Vehicle { VehicleId = "", Depot = "", Class = VehicleClass.Truck, Axles = [axle] }, axle, steers);
        return OnAxle(check, alone, "") ?? Table.First(row => row.For == check).Words;
    }

    private static string? OnAxle(CheckFor check, AxleChassis axle, string runningToe)
    {
        var row = axle.Row;
        var joints = axle.Steers ? $"wheel bearings, {row.Joints}" : "wheel bearings by hand";
        var until = $"{Before}; then {joints}; {row.Located}; {row.Height}";
        return check switch
        {
            CheckFor.Toe => $"{until}; then total toe{(axle.Steers ? ", rear axles before the front" : " of this axle")}{runningToe}: {Set(axle.Toe)}.",
            CheckFor.WheelCamber => $"{until}; then camber of both wheels: {Set(axle.Camber)}.",
            CheckFor.AxleDirection => $"{until}; then this axle's direction to the frame and its spacing left and right to its neighbour, before anything on the front axle is touched: {Set(axle.Direction)}.",
            CheckFor.DiagonalWear => $"{Before}; then bearing end play; {row.Located}; {row.Height}; then total toe of this axle: {Set(axle.Toe)}.",
            CheckFor.SteeringPull => "Set cold pressures and drive again; swap the steer tyres left and right and see whether the pull changes side; feel the hubs for a dragging brake; "
                + $"{row.Joints}; {row.Located}; {row.Height}; then rear axle direction; then camber ({Set(axle.Camber)}) and caster ({Set(axle.Caster)}).",
            CheckFor.UnevenReturn => $"{until}; swap the steer tyres left and right; then caster of both wheels by a swing of 20 deg either way: {Set(axle.Caster)}.",
            CheckFor.SteeringBinds => $"Set cold pressures; raise the steer axle and turn the wheel by hand: {row.Joints}; {row.Located}; column joints and steering gear; what runs tight is freed before any angle is judged.",
            _ => null,
        };
    }

    private static string RunningToe(AxleChassis axle) => Math.Abs(axle.RunningToe.ChangeDeg) < 0.01 ? ""
        : $" (measured standing; {axle.RunningToe.Why}, about {TradeWords.Number(Math.Abs(axle.RunningToe.ChangeDeg), 2)} deg further {(axle.RunningToe.ChangeDeg > 0 ? "in" : "out")} when running)";

    private static string Set(Setting setting) => setting.CanBeSet ? $"set {setting.Where}" : $"it cannot be set there; look for {setting.Otherwise}";
}
