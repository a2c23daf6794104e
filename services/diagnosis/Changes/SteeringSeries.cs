using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Changes;

/// <summary>
/// Steering pull and off-centre angle of one vehicle run by run, the road's share taken off with the banks and gains of a fleet fit.
/// What is constant for the vehicle (an accelerometer's zero, roads it never leaves) stays in and does not matter to a change.
/// </summary>
public sealed class SteeringSeries
{
    /// <summary>Runs that show both a cell's bank and their own reading, before the reading's zero is taken from them.</summary>
    private const int LeastForZero = 5;

    private readonly Dictionary<string, CellBank> _cells;
    private readonly RoadFit _fit;

    public SteeringSeries(RoadFit fit)
    {
        _fit = fit;
        _cells = fit.Cells.ToDictionary(c => c.Cell, StringComparer.Ordinal);
    }

    /// <summary>Changes of one vehicle and where its series stand.</summary>
    public VehicleChanges Read(RoadVehicle vehicle, IReadOnlyList<StraightRun> runs, IReadOnlyList<ChangeEvent> events)
    {
        var read = Of(vehicle, runs, events).Select(ChangeDating.Read).ToArray();
        return new(vehicle.VehicleId, vehicle.Torque, ReadingZero(runs), [.. read.SelectMany(r => r.Changes).OrderBy(c => c.Likely).ThenBy(c => c.Quantity)], [.. read.Select(r => r.Now).OfType<RunningLevel>()]);
    }

    /// <summary>What runs that came after the fit raise, provisional.</summary>
    /// <param name="vehicle">The same record that the fit was given.</param>
    /// <param name="then">The vehicle at the fit.</param>
    /// <param name="since">Runs since, in any order.</param>
    /// <param name="events">What was recorded of it.</param>
    /// <param name="kmPerWeek">Its use, above zero.</param>
    public IReadOnlyList<DatedChange> Watch(RoadVehicle vehicle, VehicleChanges then, IReadOnlyList<StraightRun> since, IReadOnlyList<ChangeEvent> events, double kmPerWeek) =>
        [.. Of(vehicle, since, events, then.ReadingZero)
            .Select(s => then.Now.FirstOrDefault(n => n.Quantity == s.Quantity) is { } level ? RunningWatch.Watch(s, level, kmPerWeek) : null)
            .OfType<DatedChange>()];

    /// <summary>The series that the vehicle's signals allow; none, one or two.</summary>
    /// <param name="vehicle">The same record that the fit was given.</param>
    /// <param name="runs">All of its runs, in any order.</param>
    /// <param name="events">What was recorded of it.</param>
    /// <param name="zero">Zero of its bank reading, from <see cref="ReadingZero"/> of a longer time; else these runs'.</param>
    public IReadOnlyList<ChangeSeries> Of(RoadVehicle vehicle, IReadOnlyList<StraightRun> runs, IReadOnlyList<ChangeEvent> events, double? zero = null)
    {
        // Steady runs alone, as in the road fit; where hardly any are, driven ones carry the vehicle and count with their spread.
        var steady = runs.Where(r => r.Mode == RunMode.Coast).ToArray();
        var used = steady.Length >= RoadProblem.EnoughSteadyRuns ? steady : [.. runs.Where(r => r.Mode != RunMode.Brake)];
        var kind = vehicle.Torque == TorqueKind.TorsionBar ? TorqueKind.TorsionBar : TorqueKind.Total;
        if (_fit.Gains.FirstOrDefault(g => g.Class == vehicle.Class && g.Torque == kind) is not { } gain) return [];
        zero ??= ReadingZero(used);
        var series = new List<ChangeSeries>();
        if (vehicle.TorqueUsable && gain.TorqueNmPerSine is { } torqueGain)
        {
            var assist = used.Any(r => r.TorqueIncludesAssist);
            Add(ChangeQuantity.SteeringPull, Witness.Torque, torqueGain, r => r.TorqueIncludesAssist || !assist ? r.TorqueNm : null);
        }
        if (gain.AngleDegPerSine is { } angleGain) Add(ChangeQuantity.OffCentreAngle, Witness.Angle, angleGain, r => r.AngleDeg);
        return series;

        void Add(ChangeQuantity quantity, Witness witness, Estimate per, Func<StraightRun, Estimate?> read)
        {
            var spread = _fit.Spreads.First(s => s.Witness == witness);
            var readings = new List<ChangeReading>();
            foreach (var r in used)
            {
                if (read(r) is not { } e || !double.IsFinite(e.Value) || !double.IsFinite(e.StandardError)) continue;
                var bank = Bank(r, vehicle, zero);
                var variance = e.StandardError * e.StandardError + spread.RunSd * spread.RunSd + Square(per.Value * bank.StandardError);
                readings.Add(new(r.Start, r.StreamId, e.Value - per.Value * bank.Value, variance, $"{r.StreamId}/{r.Sequence}"));
            }
            if (readings.Count > 0) series.Add(new() { Quantity = quantity, Readings = readings, TripSd = spread.TripSd, Events = events });
        }
    }

    /// <summary>Zero of the vehicle's bank reading against the cells' banks; null where they seldom meet.</summary>
    /// <param name="runs">Of one vehicle.</param>
    public double? ReadingZero(IReadOnlyList<StraightRun> runs)
    {
        var differences = runs.Where(r => r.BankReading is not null && r.RoadCell is not null && _cells.ContainsKey(r.RoadCell))
            .Select(r => r.BankReading!.Value.Value - (1 + SteeringEquations.RollGain) * _cells[r.RoadCell!].Bank.Value).ToArray();
        return differences.Length >= LeastForZero ? Medians.Median(differences) : null;
    }

    /// <summary>
    /// Sine of the bank under a run: the run's own reading and the cell's bank, each by its precision; the usual crown where there is neither.
    /// </summary>
    private Estimate Bank(StraightRun run, RoadVehicle vehicle, double? zero)
    {
        var crown = _fit.Crowns.FirstOrDefault(c => c.TrafficSide == vehicle.TrafficSide);
        Estimate? cell = run.RoadCell is not null && _cells.TryGetValue(run.RoadCell, out var known) ? known.Bank : null;
        Estimate? own = null;
        if (run.BankReading is { } b && double.IsFinite(b.Value) && (zero is not null || cell is null))
        {
            var spread = _fit.Spreads.First(s => s.Witness == Witness.BankReading);
            // Without a zero of its own the reading stands on the usual crown: a constant that no change sees.
            own = new((b.Value - (zero ?? 0)) / (1 + SteeringEquations.RollGain), Math.Sqrt(Square(b.StandardError) + Square(spread.RunSd) + Square(spread.TripSd)));
        }
        return (cell, own) switch
        {
            ({ } c, { } o) => Mean(c, o),
            ({ } c, null) => c,
            (null, { } o) => o,
            _ => new(crown?.Bank.Value ?? RoadPriors.SignedCrown(vehicle.TrafficSide), crown?.Width ?? RoadPriors.CellWidth),
        };
    }

    private static Estimate Mean(Estimate a, Estimate b)
    {
        var (wa, wb) = (1 / Math.Max(1e-12, Square(a.StandardError)), 1 / Math.Max(1e-12, Square(b.StandardError)));
        return new((wa * a.Value + wb * b.Value) / (wa + wb), 1 / Math.Sqrt(wa + wb));
    }

    private static double Square(double x) => x * x;
}
