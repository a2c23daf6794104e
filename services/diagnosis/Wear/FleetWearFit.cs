using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// Fits <see cref="FleetWear"/>: lines of all fittings, their robust middle per kind of position (pooled towards the class
/// and the built-in table where vehicles are few), readers' biases against those lines, and once more with these removed.
/// </summary>
internal sealed class FleetWearFit
{
    /// <summary>Shortest stretch that can show a rate, km.</summary>
    private const double LeastKm = 500;

    /// <summary>How far kinds of position of one class may differ from their class's common factor, ln; from memory.</summary>
    private const double KindLogSd = 0.2;

    /// <summary>Spread of a tyre's own rate about its kind's, share, faulty ones included; from memory.</summary>
    private const double OwnRateShare = 0.4;

    private const int Rounds = 3;

    /// <summary>Most blocks the fleet is cut into, and bytes that their sums of readers' effects may take together.</summary>
    private const int MostBlocks = 128;
    private const long MostBlockBytes = 64 << 20;

    private readonly string[] _technicians;
    private readonly string[] _gauges;
    private readonly FleetTyre[][] _blocks;
    private readonly FleetTyre[] _tyres;

    private FleetWear _fleet;

    /// <summary>
    /// Vehicles in order of their id are cut into blocks by number alone, and what the blocks find is added up in their order:
    /// the same result to the last digit whatever the order of the facts and the number of threads.
    /// </summary>
    private FleetWearFit(IReadOnlyList<VehicleTread> fleet, DateOnly asOf)
    {
        _fleet = new FleetWear { AsOf = asOf, Vehicles = fleet.Count };
        var vehicles = fleet.OrderBy(v => v.Vehicle.VehicleId, StringComparer.Ordinal).ToArray();
        var end = VehicleHistory.End(asOf);
        _technicians = Names(vehicles, end, s => s.Technician);
        _gauges = Names(vehicles, end, s => s.Gauge);
        var readers = Math.Max(1, _technicians.Length + _gauges.Length);
        var blocks = (int)Math.Clamp(MostBlockBytes / (8L * readers * readers), 1, Math.Min(MostBlocks, Math.Max(1, vehicles.Length / 4)));
        _blocks = new FleetTyre[blocks][];
        var counts = new ErrorCounts[blocks];
        var context = new HistoryContext((v, p) => s_builtIn[(v.Class, WearPrior.RoleOf(v, p.Axle), p.Dual)], _ => 0, GaugeNoise.RepeatSdMm, GaugeNoise.TechnicianSdMm);
        Parallel.For(0, blocks, k =>
        {
            var (tyres, store, errors) = (new List<FleetTyre>(), new PointStore(), new ErrorCounts());
            for (var v = (int)((long)vehicles.Length * k / blocks); v < (int)((long)vehicles.Length * (k + 1) / blocks); v++)
            {
                var history = VehicleHistory.Of(vehicles[v], asOf, context);
                errors.Add(history);
                Read(history, v, tyres, store);
            }
            (_blocks[k], counts[k]) = ([.. tyres], errors);
        });
        _tyres = [.. _blocks.SelectMany(b => b)];
        var found = new ErrorCounts();
        foreach (var count in counts) found.Add(count);
        _fleet = _fleet with { Errors = found.Rates() };
    }

    /// <summary>What is believed of each kind of position before the fleet has shown anything.</summary>
    private static readonly Dictionary<(VehicleClass, AxleRole, Dual), NormalWear> s_builtIn =
        (from c in Enum.GetValues<VehicleClass>() from r in Enum.GetValues<AxleRole>() from d in Enum.GetValues<Dual>() select (c, r, d)).ToDictionary(k => k, k => NormalWear.BuiltIn(k.c, k.r, k.d));

    public static FleetWear Of(IReadOnlyList<VehicleTread> fleet, DateOnly asOf)
    {
        var fit = new FleetWearFit(fleet, asOf);
        for (var round = 0; round < Rounds && fit._tyres.Length > 0; round++) fit.Round();
        return fit._fleet with { Readers = ReaderStudy.Of(fit._blocks, fit._fleet.Technicians, fit._fleet.Gauges, fit._fleet.Readers) };
    }

    private static string[] Names(VehicleTread[] vehicles, DateTimeOffset end, Func<TreadSurvey, string?> of)
    {
        var names = new HashSet<string>(StringComparer.Ordinal);
        foreach (var vehicle in vehicles)
            foreach (var survey in vehicle.Surveys)
                if (survey.Survey.At < end && of(survey.Survey) is { } name) names.Add(name);
        return [.. names.Order(StringComparer.Ordinal)];
    }

    private static int IndexOf(string[] names, string? name) => name is null ? -1 : Math.Max(-1, Array.BinarySearch(names, name, StringComparer.Ordinal));

    /// <summary>Keeps of a vehicle's history what its lines need; the rest may go.</summary>
    private void Read(VehicleHistory history, int vehicle, List<FleetTyre> tyres, PointStore store)
    {
        var technicians = history.Surveys.Select(s => IndexOf(_technicians, s.Survey.Technician)).ToArray();
        var gauges = history.Surveys.Select(s => IndexOf(_gauges, s.Survey.Gauge)).ToArray();
        foreach (var fitting in history.Fittings)
        {
            var points = fitting.LinePoints;
            if (points.Count < 2 || points[^1].Km - points[0].Km < LeastKm) continue;
            var kept = store.Take(points.Count);
            var shaped = false;
            for (var i = 0; i < points.Count; i++)
            {
                var p = points[i];
                shaped |= p.Survey >= 0 && p.Edge is not null;
                kept.Span[i] = p.Survey < 0 ? LinePoint.Of(p, -1, -1) : LinePoint.Of(p, technicians[p.Survey], gauges[p.Survey], history.Surveys[p.Survey].Survey.ResolutionMm);
            }
            tyres.Add(new FleetTyre
            {
                Vehicle = vehicle,
                Class = fitting.Class,
                Role = fitting.Role,
                Dual = fitting.Position.Dual,
                Fall = NormalWear.FallSign(fitting.Position, history.Tread.Depot.TrafficSide),
                Feather = fitting.Points.LastOrDefault(p => p.Shape?.FeatherMm is not null)?.Shape!.FeatherMm,
                FittedNew = points[0].New,
                Shaped = shaped,
                Kept = kept,
                Scatter = shaped ? TyreScatter.OfGrooves(points, kept.Span) : null,
            });
        }
    }

    private void Round()
    {
        var readers = new ReaderTable(_fleet.Technicians, _fleet.Gauges);
        var normals = _fleet.Normals.ToDictionary(n => (n.Class, n.Role, n.Dual), n => n.RateMmPer1000Km);
        double Rate(FleetTyre t) => normals.TryGetValue((t.Class, t.Role, t.Dual), out var rate) ? rate : s_builtIn[(t.Class, t.Role, t.Dual)].RateMmPer1000Km;
        var neighbours = new NeighbourSums[_blocks.Length];
        Parallel.For(0, _blocks.Length, k =>
        {
            var sums = new NeighbourSums();
            foreach (var tyre in _blocks[k]) tyre.FitLines(_fleet.Noise, readers, Rate(tyre), ref sums);
            neighbours[k] = sums;
        });
        _fleet = _fleet with
        {
            Noise = FleetNoise.Of(_tyres, neighbours.Aggregate((a, b) => a + b), _fleet.Noise),
            FittingsWithRate = _tyres.Count(t => t.Mean.Fit is not null),
        };
        _fleet = _fleet with { Noise = _fleet.Noise with { RunIn = RunIn.Of(_tyres, _fleet.Noise, readers, Rate) } };
        _fleet = _fleet with { Normals = Normals() };
        normals = _fleet.Normals.ToDictionary(n => (n.Class, n.Role, n.Dual), n => n.RateMmPer1000Km);
        var spread = new ReaderSpread(_fleet.Readers.TechnicianSpreadMm?.Value ?? GaugeNoise.TechnicianSdMm, _fleet.Readers.GaugeSpreadMm?.Value ?? GaugeNoise.GaugeSdMm);
        var (technicians, gauges) = ReaderBiases.Fit(_blocks, t => new(Rate(t), Rate(t) * OwnRateShare), _fleet.Noise.MeanScale, _technicians, _gauges, spread);
        _fleet = _fleet with { Technicians = technicians, Gauges = gauges, Readers = ReaderSpread.Seen(technicians, gauges) };
    }

    private NormalWear[] Normals()
    {
        var kinds = new List<(NormalWear Table, Estimate Prior, FleetTyre[] Members)>();
        foreach (var byClass in _tyres.GroupBy(t => t.Class).OrderBy(g => g.Key))
        {
            // The class as a whole against the built-in table, so that a kind with few tyres borrows from its nearest kin.
            var ratios = new List<(int, Estimate)>();
            foreach (var tyre in byClass)
                if (tyre.Rate(_fleet.Noise) is { } rate) ratios.Add((tyre.Vehicle, rate * (1 / WearPrior.For(tyre.Class, tyre.Role).RateMmPer1000Km)));
            if (ratios.Count == 0) continue;
            var common = Pool(new(0, WearPrior.For(byClass.Key, AxleRole.Steer).LogSd), Log(Clustered(ratios, 0.1)).Centre);
            foreach (var kind in byClass.GroupBy(t => (t.Role, t.Dual)).OrderBy(g => g.Key))
            {
                var table = NormalWear.BuiltIn(byClass.Key, kind.Key.Role, kind.Key.Dual);
                kinds.Add((table, new(table.LogRate.Value + common.Value, Math.Sqrt(KindLogSd * KindLogSd + common.StandardError * common.StandardError)), [.. kind]));
            }
        }
        var normals = new NormalWear[kinds.Count];
        Parallel.For(0, kinds.Count, k => normals[k] = Kind(kinds[k].Members, kinds[k].Table, kinds[k].Prior));
        return normals;
    }

    private NormalWear Kind(FleetTyre[] members, NormalWear table, Estimate prior)
    {
        var rates = new List<(int Vehicle, Estimate Rate)>(members.Length);
        foreach (var m in members)
            if (m.Rate(_fleet.Noise) is { } own) rates.Add((m.Vehicle, own));
        var vehicles = Vehicles(rates);
        if (vehicles == 0) return table with { LogRate = prior };
        var expected = Math.Exp(prior.Value);
        var seen = Clustered(rates, 0.08 * expected);
        var log = Log(seen);
        var logRate = Pool(prior, log.Centre);
        // A spread among few is hardly known: it counts with the vehicles behind it against ten of the prior's.
        var between = Math.Sqrt((10 * table.LogRateBetweenSd * table.LogRateBetweenSd + vehicles * log.BetweenSd * log.BetweenSd) / (10 + vehicles));
        var rate = Math.Exp(logRate.Value);
        var lean = PerMm(members, m => m.Edge.Slope(_fleet.Noise) * m.Fall, rate, table.LeanPerMm, table.EdgeBetweenSd).PerMm;
        var edge = PerMm(members, m => m.Edge.Slope(_fleet.Noise) - new Estimate(lean.Value * rate * m.Fall, 0), rate, table.EdgePerMm, table.EdgeBetweenSd);
        var feathers = members.Where(m => m.Feather is not null).Select(m => (m.Vehicle, m.Feather!.Value * m.Fall)).ToList();
        var shoulder = PerMm(members, m => m.Shoulder.Slope(_fleet.Noise), rate, table.ShoulderPerMm, table.ShoulderBetweenSd);
        var ownShare = 1 - Math.Pow(logRate.StandardError / prior.StandardError, 2);
        return table with
        {
            LogRate = logRate,
            LogRateBetweenSd = between,
            LeanPerMm = lean,
            LeanFeatherMm = feathers.Count == 0 ? table.LeanFeatherMm : Pool(table.LeanFeatherMm, Clustered(feathers, 0.05).Centre),
            EdgePerMm = edge.PerMm,
            EdgeBetweenSd = edge.Between,
            ShoulderPerMm = shoulder.PerMm,
            ShoulderBetweenSd = shoulder.Between,
            Vehicles = vehicles,
            RestsOn = ownShare > 0.7 ? $"{vehicles} vehicles of this fleet" : ownShare > 0.3 ? $"{vehicles} vehicles of this fleet, their class and the built-in table" : "its class in this fleet and the built-in table",
        };
    }

    private (Estimate PerMm, double Between) PerMm(FleetTyre[] members, Func<FleetTyre, Estimate?> slope, double normalRate, Estimate prior, double priorBetween)
    {
        var ratios = new List<(int, Estimate)>();
        foreach (var m in members)
        {
            if (slope(m) is not { } s || m.Rate(_fleet.Noise) is not { } own) continue;
            var rate = own.Value > 3 * own.StandardError ? own.Value : normalRate;
            ratios.Add((m.Vehicle, s * (1 / rate)));
        }
        if (ratios.Count == 0) return (prior, priorBetween);
        var seen = Clustered(ratios, 0.03);
        var n = Vehicles(ratios);
        return (Pool(prior, seen.Centre), Math.Sqrt((10 * priorBetween * priorBetween + n * seen.BetweenSd * seen.BetweenSd) / (10 + n)));
    }

    /// <summary>Robust middle of tyres that come in vehicles: the vehicles, not the tyres, are what was sampled.</summary>
    private static PooledLocation Clustered(List<(int Vehicle, Estimate Value)> members, double floor)
    {
        var pooled = PooledLocation.Fit([.. members.Select(m => m.Value)], floor);
        var vehicles = Vehicles(members);
        return pooled with { Centre = pooled.Centre with { StandardError = pooled.Centre.StandardError * Math.Sqrt((double)members.Count / vehicles) } };
    }

    /// <summary>Vehicles among members that stand vehicle by vehicle.</summary>
    private static int Vehicles(List<(int Vehicle, Estimate)> members)
    {
        var count = 0;
        for (var i = 0; i < members.Count; i++)
            if (i == 0 || members[i].Vehicle != members[i - 1].Vehicle) count++;
        return count;
    }

    private static PooledLocation Log(PooledLocation linear)
    {
        var centre = Math.Max(linear.Centre.Value, 0.1 * Math.Max(linear.Centre.StandardError, 1e-3));
        return new(new(Math.Log(centre), Math.Min(2, linear.Centre.StandardError / centre)), Math.Clamp(linear.BetweenSd / centre, 0.05, 1), linear.Count);
    }

    private static Estimate Pool(Estimate prior, Estimate seen)
    {
        var (a, b) = (1 / (prior.StandardError * prior.StandardError), 1 / Math.Max(1e-12, seen.StandardError * seen.StandardError));
        return new((a * prior.Value + b * seen.Value) / (a + b), 1 / Math.Sqrt(a + b));
    }
}
