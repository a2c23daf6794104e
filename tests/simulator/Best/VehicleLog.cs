namespace WearWatch.Simulator.Best;

/// <summary>A tyre at one position, one way round, from one day to another.</summary>
/// <param name="From">First day; for tyres of before the window minus the length of their earlier life.</param>
public sealed record Stint(Tyre Tyre, Position Position, bool Turned, double From)
{
    public double To { get; set; } = double.PositiveInfinity;
}

/// <summary>Depth of one groove as it stands on the gauge, blunders of writing undone, mm; <paramref name="KnownMm"/> is what hand, gauge and cupping add to it.</summary>
public sealed record DepthRead(Tyre Tyre, int Day, int Groove, double Mm, double StepMm, double KnownMm, double RepeatMm);

/// <summary>Step felt between the edges of two ribs, mm.</summary>
public sealed record EdgeRead(Tyre Tyre, int Day, double Mm, double StepMm);

/// <summary>What the hand felt: +1 catches moving outward, −1 inward, 0 neither.</summary>
public sealed record RubRead(Tyre Tyre, int Day, int Catches);

/// <summary>
/// Means over one trip of what is left of steering-wheel angle (deg) and column torque (N·m) when bank, curves, brakes,
/// friction and zeros are taken off: the vehicle's own straight running and noise.
/// </summary>
/// <param name="AfterShare">Share of the rows after the third of the trip at which a kerb would be struck.</param>
public sealed record TripMeans(int Day, double AngleDeg, double AngleSdDeg, double TorqueNm, double TorqueSdNm, double AfterShare);

/// <summary>One angle as a bench stated it.</summary>
public sealed record BenchRead(double Day, int Index, double Deg);

/// <summary>What a workshop said without figures.</summary>
public sealed record BenchWord(double Day, bool InOrder);

/// <summary>A week in which a driver could have spoken up, and what he said.</summary>
public sealed record DriverWeek(int Day, string? Symptom);

/// <summary>Life of one axle's tyres before the window: how far they ran in how many weeks, and what acted on the wheels half way.</summary>
public sealed record EarlierLife(int Weeks, double Km, WheelState[] Wheels);

/// <summary>One vehicle's readings and everything that bore on them besides its wheel angles, noted down while its history is made.</summary>
public sealed class VehicleLog
{
    private readonly List<Stint> _open = [];

    public List<Stint> Stints { get; } = [];
    public Dictionary<int, EarlierLife> Earlier { get; } = [];
    /// <summary>Days in whose evening tyres were changed, moved or turned.</summary>
    public List<int> TyreEvenings { get; } = [];
    /// <summary>Distance, month's factor and wheels of each day of the window.</summary>
    public List<(double Km, double Month, WheelState[] Wheels)> Days { get; } = [];
    public List<DepthRead> Depths { get; } = [];
    public List<EdgeRead> Edges { get; } = [];
    public List<RubRead> Rubs { get; } = [];
    public List<TripMeans> Trips { get; } = [];
    public List<BenchRead> Bench { get; } = [];
    public List<BenchWord> BenchWords { get; } = [];
    public List<DriverWeek> DriverWeeks { get; } = [];

    /// <summary>The tyres that stand on the vehicle when the window opens.</summary>
    public void Opens(Position[] positions, Tyre[] tyres)
    {
        foreach (var p in positions) _open.Add(new(tyres[p.Index], p, tyres[p.Index].Turned, -7.0 * Earlier[p.Axle].Weeks));
        Stints.AddRange(_open);
    }

    /// <summary>Notes which tyres stand where at the end of a day.</summary>
    public void Evening(int day, Position[] positions, Tyre[] tyres)
    {
        var changed = false;
        foreach (var p in positions)
        {
            var (before, now) = (_open[p.Index], tyres[p.Index]);
            if (before.Tyre == now && before.Turned == now.Turned) continue;
            changed = true;
            before.To = day + 1;
            Stints.Add(_open[p.Index] = new(now, p, now.Turned, day + 1));
        }
        if (changed) TyreEvenings.Add(day);
    }
}
