namespace WearWatch.Simulator.Best;

/// <summary>A kind of fault: which quantity by which change of wheel angles, which way, and how it came; <see cref="Quantity"/> is negative for a sound vehicle.</summary>
/// <param name="LogPrior">Log of how often it is drawn.</param>
public sealed record Supposition(int Quantity, Geometry? PerDeg, int Sign, FaultMode? Mode, double StruckOn, double LogPrior)
{
    /// <summary>Unknowns beside the sound angles: size; start of an old fault; start and end of a drift.</summary>
    public int Unknowns => Mode switch { null => 0, FaultMode.Sudden => 1, FaultMode.Before => 2, _ => 3 };
}

/// <summary>How the simulator draws faults, as a law: shares, quantities, ways, sizes, dates.</summary>
public sealed class FaultLaw
{
    public const double LeastSmall = 1.05, LeastLarge = 1.5, Most = 4;

    private readonly Scenario _scenario;
    private readonly Dictionary<int, (double Small, double Large)> _shares = [];
    private readonly Dictionary<string, (double Small, double Large)> _accepted = [];

    public FaultLaw(Scenario scenario)
    {
        _scenario = scenario;
        // Chances of each vehicle to be drawn as misaligned: the fleet's own lottery held many times over.
        const int times = 4000;
        var random = new RandomStream(0, 201);
        var drawn = new (int Small, int Large)[scenario.Vehicles];
        for (var t = 0; t < times; t++)
        {
            var order = Enumerable.Range(0, scenario.Vehicles).OrderBy(i => -Math.Log(1 - random.Unit()) / FleetScenario.Exposure(FleetScenario.TypeOf(i).Class)).ToArray();
            var (large, all) = FleetScenario.DrawCounts(scenario.Vehicles, random);
            for (var rank = 0; rank < all; rank++)
                if (rank < large) drawn[order[rank]].Large++;
                else drawn[order[rank]].Small++;
        }
        foreach (var group in Enumerable.Range(0, scenario.Vehicles).GroupBy(i => FleetScenario.Exposure(FleetScenario.TypeOf(i).Class)))
        {
            var shares = (group.Average(i => drawn[i].Small) / times, group.Average(i => drawn[i].Large) / times);
            foreach (var i in group) _shares[i] = shares;
        }
        foreach (var type in Enumerable.Range(0, scenario.Vehicles).Select(FleetScenario.TypeOf).DistinctBy(t => t.Name)) _accepted[type.Name] = Accepted(type);
    }

    /// <summary>Share of drawn faults that are kept because the worst quantity is in range; the others are drawn again.</summary>
    private static (double Small, double Large) Accepted(VehicleType type)
    {
        var random = new RandomStream(0, 202);
        const int times = 1500;
        int small = 0, large = 0;
        for (var t = 0; t < times; t++)
        {
            var sound = Geometry.DrawSound(type, random);
            if (Fault.Try(type, sound, random, LeastSmall, LeastLarge) is not null) small++;
            if (Fault.Try(type, sound, random, LeastLarge, Most) is not null) large++;
        }
        return ((double)small / times, (double)large / times);
    }

    /// <summary>Probability that a vehicle has no fault at the end.</summary>
    public double Sound(int index) => 1 - _shares[index].Small - _shares[index].Large;

    /// <summary>Density of a fault's size, tolerances, together with being misaligned at all, when the worst quantity stands at <paramref name="worst"/>.</summary>
    public double Density(FleetVehicle v, double size, double worst)
    {
        var (shares, accepted) = (_shares[v.Index], _accepted[v.Type.Name]);
        double density = 0;
        if (size is >= LeastSmall and <= LeastLarge && worst is >= LeastSmall and < LeastLarge) density += shares.Small / accepted.Small / (LeastLarge - LeastSmall);
        if (size is >= LeastLarge and <= Most && worst is >= LeastLarge and < Most) density += shares.Large / accepted.Large / (Most - LeastLarge);
        return density;
    }

    /// <summary>Every kind of fault that a vehicle may have, and the sound vehicle first.</summary>
    public IEnumerable<Supposition> Of(VehicleModel model)
    {
        var type = model.Vehicle.Type;
        yield return new(-1, null, 0, null, 0, Math.Log(Sound(model.Vehicle.Index)));
        var weights = Fault.Weights(type);
        var all = weights.Sum(w => w.Weight);
        for (var q = 0; q < model.Angles.Quantities.Length; q++)
        {
            var angle = model.Angles.Quantities[q];
            var weight = weights.First(w => w.Quantity == angle.Quantity).Weight / all / model.Angles.Quantities.Count(a => a.Quantity == angle.Quantity);
            foreach (var (share, perDeg) in Fault.Ways(type, angle).Where(w => w.Share > 0))
                foreach (var (mode, on, chance) in Courses(model))
                    foreach (var sign in (int[])[-1, 1])
                        yield return new(q, perDeg, sign, mode, on, Math.Log(weight * share * chance / 2));
        }
    }

    private IEnumerable<(FaultMode Mode, double On, double Chance)> Courses(VehicleModel model)
    {
        if (double.IsNegativeInfinity(model.KnownUntil))
        {
            yield return (FaultMode.Before, 0, Fault.BeforeShare);
            yield return (FaultMode.Drifting, 0, 1 - Fault.BeforeShare - Fault.SuddenShare);
        }
        var first = Enumerable.Range((int)(0.2 * _scenario.Days), (int)(0.5 * _scenario.Days) + 1).Where(d => d >= 0.2 * _scenario.Days - 1 && d <= 0.7 * _scenario.Days).ToList();
        foreach (var week in first.GroupBy(d => d / 7))
        {
            var on = week.Key * 7 + VehicleHistory.TripDay(model.Vehicle.Index) + 0.5;
            if (on >= model.KnownUntil) yield return (FaultMode.Sudden, on, Fault.SuddenShare * week.Count() / first.Count);
        }
    }
}
