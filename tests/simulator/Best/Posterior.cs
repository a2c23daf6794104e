using System.Numerics;

namespace WearWatch.Simulator.Best;

/// <summary>One quantity as the best possible sees it.</summary>
/// <param name="Probability">That it is beyond tolerance and the largest of the vehicle's quantities in tolerances.</param>
/// <param name="Outside">That it is beyond tolerance.</param>
/// <param name="Low">Lower end of the middle 90 %, deg, given that it is beyond tolerance.</param>
public sealed record BestCause(string Quantity, int? Axle, string? Side, double Probability, double Outside, double Value, double Low, double High);

/// <summary>What the best possible says of one vehicle.</summary>
public sealed record BestVerdict(string VehicleId, double Probability, IReadOnlyList<BestCause> Causes);

/// <summary>
/// The posterior of one vehicle over every kind of fault: each kind's most probable point by Gauss and Newton, its weight
/// by importance sampling from Student's t about that point (Geweke 1989), so that neither curvature nor the ends of the
/// laws are approximated away.
/// </summary>
public sealed class Posterior
{
    private const double Degrees = 6; // of Student's t
    /// <summary>Draws for the sound vehicle, for each kind of fault, and again for those kinds that carry weight.</summary>
    private const int DrawsOfSound = 256, DrawsOfFault = 32, DrawsOfLikely = 256;
    /// <summary>Kinds this far (in log) behind the best after a rough fit, a nearer one and a full one are left out.</summary>
    private const double RoughBehind = 25, NearBehind = 14, Behind = 7.5;
    /// <summary>Kinds this near the heaviest are sampled at length.</summary>
    private const double Likely = 3.5;
    private const double Step = 0.01;
    /// <summary>Where the search is turned back, tolerances, and within how much.</summary>
    private const double LimitFrom = 0.88, LimitWidth = 0.04;

    private readonly VehicleModel _model;
    private readonly FaultLaw _law;
    private readonly RandomStream _random;
    private readonly int _angles;
    private readonly double[] _errors, _trial;
    private readonly double[][] _jacobian, _soundSlopes;
    private readonly double[] _soundProducts;

    private Posterior(VehicleModel model, FaultLaw law, RandomStream random)
    {
        (_model, _law, _random, _angles) = (model, law, random, model.Angles.Count);
        var n = model.Residuals + model.Angles.Quantities.Length;
        (_errors, _trial) = (new double[n], new double[n]);
        (_soundSlopes, _soundProducts) = (new double[_angles][], new double[_angles * _angles]);
        _jacobian = [.. Enumerable.Range(0, _angles + 3).Select(_ => new double[n])];
    }

    /// <summary>A kind of fault with its most probable point.</summary>
    private sealed class Fit(Supposition kind, double[] point)
    {
        public Supposition Kind => kind;
        public double[] Point { get; set; } = point;
        /// <summary>Lower factor of the curvature at the point.</summary>
        public double[] Factor { get; set; } = [];
        public double Cost { get; set; }
        /// <summary>Laplace's log weight.</summary>
        public double LogWeight => kind.LogPrior - Cost - (Factor.Length == 0 ? 0 : Cholesky.LogDeterminant(Factor, Point.Length) / 2);
    }

    public static BestVerdict Of(VehicleModel model, FaultLaw law, RandomStream random) => new Posterior(model, law, random).Verdict();

    private BestVerdict Verdict()
    {
        var kinds = _law.Of(_model).ToList();
        var sound = new Fit(kinds[0], new double[_angles]);
        Improve(sound, 12);
        KeepSoundSlopes(sound);
        var fits = kinds.Skip(1).Select(kind => new Fit(kind, [.. sound.Point.Select(x => 0.7 * x), .. ((double[])[-0.5, 0, 0])[..kind.Unknowns]])).ToList();
        foreach (var fit in fits) Improve(fit, 4, rough: true);
        fits = Best(fits, sound, RoughBehind);
        foreach (var fit in fits) Improve(fit, 2);
        fits = Best(fits, sound, NearBehind);
        foreach (var fit in fits) Improve(fit, 8);
        var close = Best(fits, sound, Behind);
        foreach (var fit in close.Append(sound)) Refresh(fit);
        var soundWeight = Sample(sound, DrawsOfSound).LogWeight;
        var faulty = close.Select(f => (Fit: f, Sample: Sample(f, DrawsOfFault))).ToList();
        var most = Math.Max(soundWeight, faulty.Count == 0 ? double.NegativeInfinity : faulty.Max(f => f.Sample.LogWeight));
        // Where every draw fell beyond the sound angles' limits, the points themselves must do (Laplace).
        if (double.IsNegativeInfinity(most)) return Tell(sound.LogWeight, [.. close.Select(AtPoint)]);
        return Tell(soundWeight, [.. faulty.Select(f => f.Sample.LogWeight > most - Likely ? SampleTwice(f.Fit) : f.Sample)]);
    }

    private static List<Fit> Best(List<Fit> fits, Fit sound, double behind)
    {
        var best = fits.Select(f => f.LogWeight).Append(sound.LogWeight).Max();
        return [.. fits.Where(f => f.LogWeight > best - behind)];
    }

    private BestVerdict Tell(double soundWeight, Sampled[] faulty)
    {
        var most = faulty.Select(f => f.LogWeight).Append(soundWeight).Max();
        var misaligned = faulty.Sum(f => Math.Exp(f.LogWeight - most));
        var all = Math.Exp(soundWeight - most) + misaligned;
        var causes = faulty.SelectMany(f => f.Outside).GroupBy(o => o.Quantity).Select(g =>
        {
            var q = _model.Angles.Quantities[g.Key];
            var sorted = g.Select(x => (x.Value, Weight: Math.Exp(x.LogWeight - most) / all, x.Largest)).OrderBy(x => x.Value).ToList();
            var outside = sorted.Sum(x => x.Weight);
            double Quantile(double share)
            {
                double sum = 0;
                foreach (var (value, weight, _) in sorted)
                    if ((sum += weight) >= share * outside) return value;
                return sorted[^1].Value;
            }
            return new BestCause(q.Quantity, q.Axle, q.Side?.ToString(), sorted.Where(x => x.Largest).Sum(x => x.Weight), outside, Quantile(0.5), Quantile(0.05), Quantile(0.95));
        });
        return new(_model.Vehicle.Id, misaligned / all, [.. causes.Where(c => c.Outside > 1e-4).OrderByDescending(c => c.Probability)]);
    }

    private static double Sigmoid(double x) => 1 / (1 + Math.Exp(-x));

    private static double Size(double[] point, int angles) => FaultLaw.LeastSmall + (FaultLaw.Most - FaultLaw.LeastSmall) * Sigmoid(point[angles]);

    private void Suppose(Supposition kind, double[] point)
    {
        var days = _model.Days;
        var course = kind.Mode switch
        {
            null => new FaultCourse(null, 0, 0),
            FaultMode.Before => new(kind.Mode, -7 * (4.5 + 56 * Sigmoid(point[_angles + 1])), 0),
            FaultMode.Sudden => new(kind.Mode, kind.StruckOn, 0),
            _ => new(kind.Mode, days * (-0.4 + 0.65 * Sigmoid(point[_angles + 1])), days * (0.6 + 0.35 * Sigmoid(point[_angles + 2]))),
        };
        _model.Suppose(point.AsSpan(0, _angles), kind.PerDeg, kind.Quantity, kind.PerDeg is null ? 0 : kind.Sign * Size(point, _angles), course);
    }

    /// <summary>Centre and standard deviation that stand in for the law of an unknown while a point is sought.</summary>
    private (double Centre, double Sd) Near(int unknown) => unknown < _angles ? (0, 1) : unknown == _angles ? (-0.9, 1.5) : (0, 1.8);

    /// <summary>Errors of what was read, and how far the sound vehicle's angles lie beyond their limit, so steeply that the search stays within.</summary>
    private void Errors(double[] errors)
    {
        _model.Errors(errors.AsSpan(0, _model.Residuals));
        for (var q = 0; q < _model.Angles.Quantities.Length; q++)
            errors[_model.Residuals + q] = Math.Max(0, _model.Angles.Ratio(_model.SoundAngles, q) - LimitFrom) / LimitWidth;
    }

    private double CostAt(Supposition kind, double[] point, double[] errors)
    {
        Suppose(kind, point);
        Errors(errors);
        double cost = 0;
        foreach (var e in errors) cost += e * e / 2;
        for (var i = 0; i < point.Length; i++)
        {
            var (centre, sd) = Near(i);
            cost += Math.Pow((point[i] - centre) / sd, 2) / 2;
        }
        return cost;
    }

    /// <param name="rough">Take the errors' slopes against the sound angles to be those of the sound vehicle.</param>
    private void Improve(Fit fit, int times, bool rough = false)
    {
        var n = fit.Point.Length;
        fit.Cost = CostAt(fit.Kind, fit.Point, _errors);
        for (var time = 0; time < times; time++)
        {
            var slope = Curvature(fit, n, rough ? _angles : 0);
            var better = false;
            for (var share = 1.0; share > 0.1 && !better; share /= 2)
            {
                var point = new double[n];
                for (var i = 0; i < n; i++) point[i] = Math.Clamp(fit.Point[i] - share * slope[i], i < _angles ? -4 : -6, i < _angles ? 4 : 6);
                var cost = CostAt(fit.Kind, point, _trial);
                if (cost >= fit.Cost) continue;
                better = true;
                var gain = fit.Cost - cost;
                (fit.Point, fit.Cost) = (point, cost);
                _trial.CopyTo(_errors, 0);
                if (gain < 0.05) return;
            }
            if (!better) return;
        }
    }

    /// <summary>Slopes at the sound point, and the products of them, for rough fits of faults.</summary>
    private void KeepSoundSlopes(Fit sound)
    {
        Suppose(sound.Kind, sound.Point);
        Errors(_errors);
        Curvature(sound, _angles, 0);
        for (var i = 0; i < _angles; i++)
        {
            _soundSlopes[i] = (double[])_jacobian[i].Clone();
            for (var j = 0; j <= i; j++) _soundProducts[i * _angles + j] = Dot(_jacobian[i], _jacobian[j]);
        }
    }

    /// <summary>Factors the curvature at a point (errors there are at hand); the step to the minimum is point − answer.</summary>
    /// <param name="known">Unknowns whose slopes are taken from the sound vehicle.</param>
    private double[] Curvature(Fit fit, int n, int known)
    {
        var moved = (double[])fit.Point.Clone();
        for (var i = known; i < n; i++)
        {
            moved[i] += Step;
            Suppose(fit.Kind, moved);
            Errors(_jacobian[i]);
            moved[i] = fit.Point[i];
            for (var r = 0; r < _errors.Length; r++) _jacobian[i][r] = (_jacobian[i][r] - _errors[r]) / Step;
        }
        double[] Slopes(int i) => i < known ? _soundSlopes[i] : _jacobian[i];
        var (curvature, slope) = (new double[n * n], new double[n]);
        for (var i = 0; i < n; i++)
        {
            var (centre, sd) = Near(i);
            slope[i] = Dot(Slopes(i), _errors) + (fit.Point[i] - centre) / (sd * sd);
            for (var j = 0; j <= i; j++)
                curvature[i * n + j] = curvature[j * n + i] = i < known ? _soundProducts[i * _angles + j] : Dot(Slopes(i), Slopes(j));
            curvature[i * n + i] += 1 / (sd * sd);
        }
        Cholesky.Factor(curvature, n);
        Cholesky.Solve(curvature, n, slope);
        fit.Factor = curvature;
        return slope;
    }

    /// <summary>Takes the curvature at the point that was reached.</summary>
    private void Refresh(Fit fit)
    {
        fit.Cost = CostAt(fit.Kind, fit.Point, _errors);
        Curvature(fit, fit.Point.Length, 0);
    }

    private static double Dot(double[] a, double[] b)
    {
        var sum = Vector<double>.Zero;
        var i = 0;
        for (; i + Vector<double>.Count <= a.Length; i += Vector<double>.Count) sum += new Vector<double>(a, i) * new Vector<double>(b, i);
        var dot = Vector.Sum(sum);
        for (; i < a.Length; i++) dot += a[i] * b[i];
        return dot;
    }

    /// <summary>Log weight of a kind by sampling, and what each draw says of the quantities beyond tolerance, at its share of that weight.</summary>
    private sealed record Sampled(double LogWeight, List<(int Quantity, double Value, bool Largest, double LogWeight)> Outside, List<(double[] Point, double LogWeight)> Points);

    /// <summary>Samples at length, about what a first sample found rather than about its most probable point.</summary>
    private Sampled SampleTwice(Fit fit)
    {
        var first = Sample(fit, DrawsOfLikely);
        if (Gather(fit, first.Points) is { } gathered && Sample(gathered, DrawsOfLikely) is { Points.Count: > 0 } second && Effective(second.Points) > Effective(first.Points)) return second;
        return first;
    }

    /// <summary>Effective number of draws (Kong 1992).</summary>
    private static double Effective(List<(double[] Point, double LogWeight)> points)
    {
        if (points.Count == 0) return 0;
        var most = points.Max(p => p.LogWeight);
        return Math.Pow(points.Sum(p => Math.Exp(p.LogWeight - most)), 2) / points.Sum(p => Math.Exp(2 * (p.LogWeight - most)));
    }

    /// <summary>Mean and spread of a sample as the place to sample from; weights are flattened until a few draws per unknown carry them.</summary>
    private static Fit? Gather(Fit fit, List<(double[] Point, double LogWeight)> points)
    {
        var n = fit.Point.Length;
        if (points.Count < 5 * n) return null;
        var flat = points;
        for (var power = 0.8; Effective(flat) < 3 * n && power > 0.02; power *= 0.8) flat = [.. points.Select(p => (p.Point, power * p.LogWeight))];
        var most = flat.Max(p => p.LogWeight);
        var all = flat.Sum(p => Math.Exp(p.LogWeight - most));
        var mean = new double[n];
        foreach (var (point, log) in flat)
            for (var i = 0; i < n; i++) mean[i] += Math.Exp(log - most) / all * point[i];
        var spread = new double[n * n];
        foreach (var (point, log) in flat)
            for (var i = 0; i < n; i++)
                for (var j = 0; j < n; j++) spread[i * n + j] += Math.Exp(log - most) / all * (point[i] - mean[i]) * (point[j] - mean[j]);
        for (var i = 0; i < n; i++) spread[i * n + i] += 1e-12 + 1e-6 * spread[i * n + i];
        Cholesky.Factor(spread, n);
        var inverse = Cholesky.InverseOfFactor(spread, n);
        var precision = new double[n * n];
        for (var i = 0; i < n; i++)
            for (var j = 0; j < n; j++)
                for (var k = Math.Max(i, j); k < n; k++) precision[i * n + j] += inverse[k * n + i] * inverse[k * n + j];
        Cholesky.Factor(precision, n);
        return new(fit.Kind, mean) { Factor = precision };
    }

    private Sampled Sample(Fit fit, int draws)
    {
        var (kind, n) = (fit.Kind, fit.Point.Length);
        var logs = new List<double>();
        var outside = new List<(int, double, bool, double)>();
        var points = new List<(double[] Point, double LogWeight)>();
        var logFactor = Cholesky.LogDeterminant(fit.Factor, n) / 2;
        var point = new double[n];
        for (var d = 0; d < draws; d++)
        {
            double square = 0, chi = 0;
            for (var i = 0; i < n; i++)
            {
                point[i] = _random.Normal();
                square += point[i] * point[i];
            }
            for (var i = 0; i < Degrees; i++) chi += Math.Pow(_random.Normal(), 2);
            var scale = Math.Sqrt(Degrees / chi);
            Cholesky.SolveTransposed(fit.Factor, n, point);
            for (var i = 0; i < n; i++) point[i] = fit.Point[i] + scale * point[i];
            // Density of the proposal; what is common to every kind's target and proposal is dropped.
            var proposal = logFactor - (Degrees + n) / 2 * Math.Log(1 + scale * scale * square / Degrees)
                + LogGamma((Degrees + n) / 2) - LogGamma(Degrees / 2) - n / 2.0 * Math.Log(Degrees * Math.PI);
            var prior = LogPrior(kind, point);
            if (double.IsNegativeInfinity(prior)) continue;
            var log = prior + _model.LogLikelihood(_errors.AsSpan(0, _model.Residuals)) - proposal;
            logs.Add(log);
            points.Add(((double[])point.Clone(), log));
            if (kind.PerDeg is not null) AddOutside(outside, log - Math.Log(draws));
        }
        if (logs.Count == 0) return new(double.NegativeInfinity, [], []);
        var most = logs.Max();
        return new(most + Math.Log(logs.Sum(l => Math.Exp(l - most)) / draws), outside, points);
    }

    private Sampled AtPoint(Fit fit)
    {
        var outside = new List<(int, double, bool, double)>();
        Suppose(fit.Kind, fit.Point);
        AddOutside(outside, fit.LogWeight);
        return new(fit.LogWeight, outside, []);
    }

    private void AddOutside(List<(int, double, bool, double)> list, double logWeight)
    {
        var end = _model.AtEnd();
        var worst = _model.Angles.Worst(end).Quantity;
        for (var q = 0; q < _model.Angles.Quantities.Length; q++)
        {
            var value = _model.Angles.Value(end, q);
            var t = _model.Angles.Quantities[q].Tolerance;
            if (Math.Abs(value - t.Target) > t.PlusMinus) list.Add((q, value, q == worst, logWeight));
        }
    }

    /// <summary>Log density of a point under the law of faults; the model is left supposing it.</summary>
    private double LogPrior(Supposition kind, double[] point)
    {
        Suppose(kind, point);
        if (_model.Angles.Worst(_model.SoundAngles).Ratio > Geometry.SoundLimit) return double.NegativeInfinity;
        var log = kind.LogPrior - _angles / 2.0 * Math.Log(2 * Math.PI);
        for (var i = 0; i < _angles; i++) log -= point[i] * point[i] / 2;
        if (kind.PerDeg is null) return log;
        log += Math.Log(_law.Density(_model.Vehicle, Size(point, _angles), _model.Angles.Worst(_model.AtEnd()).Ratio) * (FaultLaw.Most - FaultLaw.LeastSmall));
        for (var i = _angles; i < point.Length; i++)
        {
            var s = Sigmoid(point[i]);
            log += Math.Log(s * (1 - s));
        }
        return log;
    }

    /// <summary>Stirling's series; error below 1e-8 from 3 on, and upwards by recurrence below.</summary>
    private static double LogGamma(double x)
    {
        double shift = 0;
        for (; x < 8; x++) shift -= Math.Log(x);
        return shift + (x - 0.5) * Math.Log(x) - x + 0.5 * Math.Log(2 * Math.PI) + 1 / (12 * x) - 1 / (360 * x * x * x);
    }
}
