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

    private const int Rounds = 3;

    private readonly VehicleHistory[] _histories;
    private readonly string[] _technicians;
    private readonly string[] _gauges;
    private readonly List<(Fitting Fitting, int Vehicle)> _fittings = [];
    private readonly int[][] _technicianOf;
    private readonly int[][] _gaugeOf;

    private FleetWear _fleet;

    private FleetWearFit(IReadOnlyList<VehicleTread> fleet, DateOnly asOf)
    {
        _fleet = new FleetWear { AsOf = asOf, Vehicles = fleet.Count };
        var context = new HistoryContext((v, p) => NormalWear.BuiltIn(v.Class, WearPrior.RoleOf(v, p.Axle), p.Dual), _ => 0, GaugeNoise.RepeatSdMm, GaugeNoise.TechnicianSdMm);
        _histories = [.. fleet.OrderBy(v => v.Vehicle.VehicleId, StringComparer.Ordinal).Select(v => VehicleHistory.Of(v, asOf, context))];
        _technicians = Names(s => s.Technician);
        _gauges = Names(s => s.Gauge);
        _technicianOf = [.. _histories.Select(h => h.Surveys.Select(s => IndexOf(_technicians, s.Survey.Technician)).ToArray())];
        _gaugeOf = [.. _histories.Select(h => h.Surveys.Select(s => IndexOf(_gauges, s.Survey.Gauge)).ToArray())];
        for (var v = 0; v < _histories.Length; v++)
            foreach (var fitting in _histories[v].Fittings.Where(f => f.LinePoints.Count > 1 && f.LinePoints[^1].Km - f.LinePoints[0].Km >= LeastKm)) _fittings.Add((fitting, v));
    }

    public static FleetWear Of(IReadOnlyList<VehicleTread> fleet, DateOnly asOf)
    {
        var fit = new FleetWearFit(fleet, asOf);
        for (var round = 0; round < Rounds && fit._fittings.Count > 0; round++) fit.Round();
        return fit._fleet;
    }

    private string[] Names(Func<TreadSurvey, string?> of) =>
        [.. _histories.SelectMany(h => h.Surveys).Select(s => of(s.Survey)).OfType<string>().Distinct().Order(StringComparer.Ordinal)];

    private static int IndexOf(string[] names, string? name) => name is null ? -1 : Array.BinarySearch(names, name, StringComparer.Ordinal);

    private void Round()
    {
        var lines = _fittings.Select(f => (f.Fitting, f.Vehicle, Lines: FittingLines.Fit(f.Fitting.LinePoints, _fleet.Noise, s => Bias(f.Vehicle, s), Rate(f.Fitting)))).ToList();
        _fleet = _fleet with { Noise = FleetNoise.Of([.. lines.Select(l => l.Lines)], _fleet.Noise), FittingsWithRate = lines.Count(l => l.Lines.Mean is not null) };
        _fleet = _fleet with { Normals = Normals(lines) };
        var readings = _fittings.Select(f => ((IReadOnlyList<ReaderBiases.Reading>)Readings(f.Fitting, f.Vehicle), new Estimate(Rate(f.Fitting) / 1000, Rate(f.Fitting) / 1000 * 0.4))).ToList();
        var (technicians, gauges) = ReaderBiases.Fit(readings, _technicians, _gauges);
        _fleet = _fleet with { Technicians = technicians, Gauges = gauges };
    }

    private double Rate(Fitting f) => _fleet.For(f.Class, f.Role, f.Position.Dual).RateMmPer1000Km;

    private (Estimate Bias, int Reader) Bias(int vehicle, int survey)
    {
        var (t, g) = (_technicianOf[vehicle][survey], _gaugeOf[vehicle][survey]);
        if (_fleet.Technicians.Count == 0 && _fleet.Gauges.Count == 0) return (new(0, GaugeNoise.TechnicianSdMm), t < 0 ? -1 : t);
        var technician = t >= 0 ? _fleet.Technicians[t].BiasMm with { StandardError = _fleet.Technicians[t].AgainstOthersSdMm } : new(0, GaugeNoise.TechnicianSdMm);
        return (technician + (g >= 0 ? _fleet.Gauges[g].BiasMm with { StandardError = _fleet.Gauges[g].AgainstOthersSdMm } : new(0, 0)), t < 0 ? -1 : t);
    }

    private List<ReaderBiases.Reading> Readings(Fitting fitting, int vehicle) =>
    [
        .. fitting.LinePoints.Select(p => new ReaderBiases.Reading(p.Km, p.Mean.Value,
            (Math.Pow(_fleet.Noise.MeanScale, 2) * (Math.Pow(p.Mean.StandardError, 2) + Math.Pow(FittingLines.WanderSdMm, 2))) / p.Weight,
            p.Survey < 0 ? -1 : _technicianOf[vehicle][p.Survey], p.Survey < 0 ? -1 : _gaugeOf[vehicle][p.Survey])),
    ];

    private List<NormalWear> Normals(List<(Fitting Fitting, int Vehicle, FittingLines Lines)> lines)
    {
        var normals = new List<NormalWear>();
        foreach (var byClass in lines.GroupBy(l => l.Fitting.Class).OrderBy(g => g.Key))
        {
            // The class as a whole against the built-in table, so that a kind with few tyres borrows from its nearest kin.
            var ratios = byClass.Select(l => (l.Vehicle, Rate: l.Lines.Rate(_fleet.Noise), Table: WearPrior.For(l.Fitting.Class, l.Fitting.Role)))
                .Where(l => l.Rate is not null).Select(l => (l.Vehicle, Ratio: l.Rate!.Value * (1 / l.Table.RateMmPer1000Km))).ToList();
            if (ratios.Count == 0) continue;
            var classFactor = Log(Clustered([.. ratios], 0.1));
            var tableSd = WearPrior.For(byClass.Key, AxleRole.Steer).LogSd;
            var common = Pool(new(0, tableSd), classFactor.Centre);
            foreach (var kind in byClass.GroupBy(l => (l.Fitting.Role, l.Fitting.Position.Dual)).OrderBy(g => g.Key))
            {
                var table = NormalWear.BuiltIn(byClass.Key, kind.Key.Role, kind.Key.Dual);
                normals.Add(Kind([.. kind], table, new(table.LogRate.Value + common.Value, Math.Sqrt(KindLogSd * KindLogSd + common.StandardError * common.StandardError))));
            }
        }
        return normals;
    }

    private NormalWear Kind(List<(Fitting Fitting, int Vehicle, FittingLines Lines)> members, NormalWear table, Estimate prior)
    {
        var rates = members.Where(m => m.Lines.Mean is not null).Select(m => (m.Vehicle, Rate: m.Lines.Rate(_fleet.Noise)!.Value)).ToList();
        var vehicles = rates.Select(r => r.Vehicle).Distinct().Count();
        if (vehicles == 0) return table with { LogRate = prior };
        var expected = Math.Exp(prior.Value);
        var seen = Clustered([.. rates.Select(r => (r.Vehicle, r.Rate))], 0.08 * expected);
        var log = Log(seen);
        var logRate = Pool(prior, log.Centre);
        // A spread among few is hardly known: it counts with the vehicles behind it against ten of the prior's.
        var between = Math.Sqrt((10 * table.LogRateBetweenSd * table.LogRateBetweenSd + vehicles * log.BetweenSd * log.BetweenSd) / (10 + vehicles));
        var rate = Math.Exp(logRate.Value);
        var lean = PerMm(members, m => m.Lines.EdgeRate(_fleet.Noise) * Fall(m), rate, table.LeanPerMm, table.EdgeBetweenSd).PerMm;
        var edge = PerMm(members, m => m.Lines.EdgeRate(_fleet.Noise) - new Estimate(lean.Value * rate * Fall(m), 0), rate, table.EdgePerMm, table.EdgeBetweenSd);
        var feathers = members.Select(m => (m.Vehicle, Feather: m.Fitting.Points.LastOrDefault(p => p.Shape?.FeatherMm is not null)?.Shape!.FeatherMm * Fall(m)))
            .Where(m => m.Feather is not null).Select(m => (m.Vehicle, m.Feather!.Value)).ToList();
        var shoulder = PerMm(members, m => m.Lines.ShoulderRate(_fleet.Noise), rate, table.ShoulderPerMm, table.ShoulderBetweenSd);
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

    private int Fall((Fitting Fitting, int Vehicle, FittingLines Lines) m) => NormalWear.FallSign(m.Fitting.Position, _histories[m.Vehicle].Tread.Depot.TrafficSide);

    private (Estimate PerMm, double Between) PerMm(List<(Fitting Fitting, int Vehicle, FittingLines Lines)> members, Func<(Fitting, int, FittingLines Lines), Estimate?> slope, double normalRate, Estimate prior, double priorBetween)
    {
        var ratios = new List<(int, Estimate)>();
        foreach (var m in members)
        {
            if (slope(m) is not { } s || m.Lines.Rate(_fleet.Noise) is not { } own) continue;
            var rate = own.Value > 3 * own.StandardError ? own.Value : normalRate;
            ratios.Add((m.Vehicle, s * (1 / rate)));
        }
        if (ratios.Count == 0) return (prior, priorBetween);
        var seen = Clustered([.. ratios], 0.03);
        var n = ratios.Select(r => r.Item1).Distinct().Count();
        return (Pool(prior, seen.Centre), Math.Sqrt((10 * priorBetween * priorBetween + n * seen.BetweenSd * seen.BetweenSd) / (10 + n)));
    }

    /// <summary>Robust middle of tyres that come in vehicles: the vehicles, not the tyres, are what was sampled.</summary>
    private static PooledLocation Clustered(List<(int Vehicle, Estimate Value)> members, double floor)
    {
        var pooled = PooledLocation.Fit([.. members.Select(m => m.Value)], floor);
        var vehicles = members.Select(m => m.Vehicle).Distinct().Count();
        return pooled with { Centre = pooled.Centre with { StandardError = pooled.Centre.StandardError * Math.Sqrt((double)members.Count / vehicles) } };
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
