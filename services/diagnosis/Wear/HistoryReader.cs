using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// Reads a vehicle's surveys against each other: which of them were written wrong, which tyres were changed without a
/// record. Each step takes the single change of reading that raises the joint likelihood most, until none does.
/// </summary>
internal sealed class HistoryReader
{
    /// <summary>Prior share of an unrecorded change per tyre and survey; from memory.</summary>
    private const double ChangePrior = 0.01;

    /// <summary>Prior share of one tyre misread in one survey; from memory.</summary>
    private const double MisreadPrior = 0.01;

    /// <summary>Deviation of one tyre's figures from its line beyond reading noise, mm: wear lines wander (groove deviations in runs).</summary>
    private const double WanderSdMm = 0.05;

    /// <summary>Spread of any depth a tyre can have, mm, about the middle of its life.</summary>
    private const double AnyDepthSdMm = 5;

    private readonly VehicleTread _tread;
    private readonly IReadOnlyList<StoredSurvey> _surveys;
    private readonly FittingCuts _cuts;
    private readonly HistoryContext _context;
    private readonly Position[] _positions;
    private readonly NormalWear[] _normal;
    private readonly Estimate[] _km;
    private readonly Dictionary<Position, int> _index = [];
    private readonly TreadShape?[,] _written;
    private readonly Dictionary<Position, TyreReadings>[] _readings;
    private readonly Explanation[] _explanation;
    private readonly double[] _weight;
    private readonly IReadOnlyList<WeighedExplanation>[] _weighed;
    private readonly Dictionary<(int Survey, Position Position), double> _misread = [];
    private readonly List<WeighedExplanation>[] _odd;
    private readonly List<(Position Position, int Survey, double Probability)> _inferredCuts = [];

    public List<InferredFitting> Inferred { get; } = [];

    public HistoryReader(VehicleTread tread, IReadOnlyList<StoredSurvey> surveys, DistanceAxis axis, FittingCuts cuts, HistoryContext context)
    {
        (_tread, _surveys, _cuts, _context) = (tread, surveys, cuts, context);
        _positions = [.. tread.Vehicle.Positions()];
        for (var i = 0; i < _positions.Length; i++) _index[_positions[i]] = i;
        _normal = [.. _positions.Select(p => context.Normal(tread.Vehicle, p))];
        _km = [.. surveys.Select(s => axis.At(s.Survey.At))];
        _written = new TreadShape?[surveys.Count, _positions.Length];
        _readings = [.. surveys.Select(s => s.Survey.Tyres.Where(t => _index.ContainsKey(t.Position)).GroupBy(t => t.Position).ToDictionary(g => g.Key, g => g.First()))];
        _explanation = [.. surveys.Select(_ => Explanation.AsWritten)];
        _weight = [.. surveys.Select(_ => 1.0)];
        _weighed = [.. surveys.Select(_ => (IReadOnlyList<WeighedExplanation>)[new WeighedExplanation(Explanation.AsWritten, 1)])];
        _odd = [.. surveys.Select(_ => new List<WeighedExplanation>())];
        Shapes();
    }

    private void Shapes()
    {
        for (var p = 0; p < _positions.Length; p++)
        {
            for (var c = 0; c < _cuts.At(_positions[p]).Count; c++)
            {
                var within = Enumerable.Range(0, _surveys.Count).Where(s => _cuts.Of(_positions[p], s) == c && _readings[s].ContainsKey(_positions[p])).ToList();
                var grooves = within.SelectMany(s => _readings[s][_positions[p]].Depths).Select(d => d.Groove).DefaultIfEmpty(0).Max();
                var mistyped = GrooveOutliers.Find([.. within.Select(s => (s, _readings[s][_positions[p]], _surveys[s].Survey.ResolutionMm))], _context.RepeatSdMm);
                foreach (var s in within)
                {
                    int? without = null;
                    if (mistyped.TryGetValue(s, out var odd))
                    {
                        without = odd.Groove;
                        _odd[s].Add(new(new(ExplanationKind.GrooveMistyped, Position: _positions[p], Groove: odd.Groove), odd.Probability));
                    }
                    var shape = TreadShape.Of(_readings[s][_positions[p]], _surveys[s].Survey.ResolutionMm, _context.RepeatSdMm, null, grooves, without);
                    _written[s, p] = shape is null ? null : shape with { MeanDepthMm = shape.MeanDepthMm with { Value = shape.MeanDepthMm.Value - _context.BiasMm(_surveys[s].Survey) } };
                }
            }
        }
    }

    /// <summary>Shape at a position under the survey's present explanation.</summary>
    private TreadShape? Shape(int survey, int position)
    {
        var e = _explanation[survey];
        if (e.Kind == ExplanationKind.OtherVehicle) return null;
        if (e.Kind == ExplanationKind.AsWritten) return _written[survey, position];
        var written = _index.TryGetValue(e.Belongs(_positions[position]), out var w) ? _written[survey, w] : null;
        return written is null ? null : written.As(_positions[position], e.Factor);
    }

    private TyreReadings? Readings(int survey, Position position)
    {
        var e = _explanation[survey];
        if (e.Kind == ExplanationKind.OtherVehicle || !_readings[survey].TryGetValue(e.Belongs(position), out var r)) return null;
        return e.Kind == ExplanationKind.AsWritten ? r : r with { Position = position, Depths = [.. r.Depths.Select(d => d with { DepthMm = d.DepthMm * e.Factor })] };
    }

    /// <summary>
    /// Surveys as a whole come first, for one exchange of sides looks like several changed tyres; a tyre that does not fit
    /// leaves the rest of its survey as it is, since every tyre may be odd for a reason of its own.
    /// </summary>
    public void Explain()
    {
        for (var round = 0; round < 3; round++)
        {
            var surveys = Climb(_surveys.Count, Survey);
            MovedForGood();
            if (!Climb(_positions.Length, Tyre) && !surveys) break;
        }
        Settle();
        new InferredEvents(_tread, _surveys, _positions, (s, p) => Shape(s, _index[p]), (a, b, p) => _normal[_index[p]].RateMmPer1000Km / 1000 * (_km[b].Value - _km[a].Value)).Name(_inferredCuts, Inferred);
    }

    private delegate void Proposal(int index, ref (double Gain, Action? Apply) best);

    private static bool Climb(int count, Proposal propose)
    {
        for (var step = 0; step <= 2 * count; step++)
        {
            var best = (Gain: 0.5, Apply: (Action?)null);
            for (var i = 0; i < count; i++) propose(i, ref best);
            if (best.Apply is null) return step > 0;
            best.Apply();
        }
        return true;
    }

    /// <summary>The same exchange in two walks or more up to the latest is no slip of the pen: the tyres were moved.</summary>
    private void MovedForGood()
    {
        var last = _surveys.Count - 1;
        var first = last;
        while (first > 0 && _explanation[first - 1] == _explanation[last]) first--;
        if (first == 0 || first == last || _explanation[last].Kind is not (ExplanationKind.SidesSwapped or ExplanationKind.AxleSidesSwapped or ExplanationKind.AxlesSwapped)) return;
        var moved = _explanation[last];
        for (var s = first; s <= last; s++) _explanation[s] = Explanation.AsWritten;
        foreach (var p in _positions.Where(p => moved.Belongs(p) != p))
        {
            _cuts.Add(p, new FittingCuts.Cut(first, null, null));
            _inferredCuts.Add((p, first, _weighed[first].FirstOrDefault(w => w.Explanation == moved)?.Weight ?? 0.5));
        }
    }

    private void Survey(int s, ref (double Gain, Action? Apply) best)
    {
        _weighed[s] = Weigh(s);
        var now = _weighed[s].FirstOrDefault(w => w.Explanation == _explanation[s])?.Weight ?? 0;
        var top = _weighed[s].Where(w => w.Explanation.Kind != ExplanationKind.ComparedSurveyWrong).MaxBy(w => w.Weight)!;
        if (top.Explanation == _explanation[s]) return;
        var gain = Math.Log(top.Weight / Math.Max(now, 1e-300));
        // Of two surveys that accuse each other the later is asked first.
        if (gain > best.Gain || (gain > best.Gain - 1e-6 && best.Apply is not null)) best = (gain, () => _explanation[s] = top.Explanation);
    }

    private IReadOnlyList<WeighedExplanation> Weigh(int s)
    {
        var written = new List<TreadShape>();
        var expected = new Dictionary<Position, TyreExpectation>();
        for (var p = 0; p < _positions.Length; p++)
        {
            if (_written[s, p] is { } shape && !_misread.ContainsKey((s, _positions[p]))) written.Add(shape);
            expected[_positions[p]] = Expected(s, p);
        }
        return written.Count == 0 || expected.Values.All(e => e.Surveys == 0)
            ? [new WeighedExplanation(Explanation.AsWritten, 1)]
            : SurveyExplanation.Weigh(_tread.Vehicle, written, expected, _context.TechnicianSdMm);
    }

    /// <summary>What the other surveys of the same fitting expect at a survey.</summary>
    private TyreExpectation Expected(int s, int p)
    {
        var fitting = _cuts.Of(_positions[p], s);
        var (mean, edge, shoulder) = Beliefs(p, fitting);
        var at = _km[s].Value;
        var surveys = 0;
        if (Start(p, fitting) is { } start)
        {
            Take(ref mean, ref edge, ref shoulder, start, at, 0);
            surveys = 2; // A recorded start is not itself in doubt.
        }
        for (var other = 0; other < _surveys.Count; other++)
        {
            if (other == s || _cuts.Of(_positions[p], other) != fitting || Point(other, p) is not { } point) continue;
            Take(ref mean, ref edge, ref shoulder, point, at, 0);
            surveys++;
        }
        return new(mean.Intercept, Wander(edge.Intercept), Wander(shoulder.Intercept), surveys);

        static Estimate Wander(Estimate e) => new(e.Value, Math.Sqrt(e.StandardError * e.StandardError + WanderSdMm * WanderSdMm));
    }

    private (LineBelief Mean, LineBelief Edge, LineBelief Shoulder) Beliefs(int p, int fitting)
    {
        var rate = _normal[p].RateMmPer1000Km / 1000;
        var middle = _cuts.NewDepth(_positions[p], fitting) ?? WearPrior.For(_tread.Vehicle.Class, _normal[p].Role).NewDepthMm;
        return (new(new(middle * 0.6, AnyDepthSdMm), new(-rate, rate)),
            new(new(0, 0.7), new(rate * _normal[p].EdgePerMm.Value, rate * 0.5)),
            new(new(0, 0.9), new(rate * _normal[p].ShoulderPerMm.Value, rate * 0.4)));
    }

    private double Take(ref LineBelief mean, ref LineBelief edge, ref LineBelief shoulder, FittingPoint point, double origin, double extraMeanVariance)
    {
        var x = point.Km - origin;
        var wander = WanderSdMm * WanderSdMm + extraMeanVariance;
        var log = mean.Take(x, point.Mean.Value, (Square(point.Mean.StandardError) + wander) / point.Weight);
        if (point.Edge is { } e) log += edge.Take(x, e.Value, (Square(e.StandardError) + WanderSdMm * WanderSdMm) / point.Weight);
        if (point.Shoulder is { } h) log += shoulder.Take(x, h.Value, (Square(h.StandardError) + WanderSdMm * WanderSdMm) / point.Weight);
        return log;
    }

    private FittingPoint? Point(int s, int p)
    {
        if (_weight[s] <= 0 || _misread.ContainsKey((s, _positions[p])) || Shape(s, p) is not { } shape) return null;
        var kmError = _normal[p].RateMmPer1000Km / 1000 * _km[s].StandardError;
        return new FittingPoint
        {
            Survey = s,
            Km = _km[s].Value,
            KmSd = _km[s].StandardError,
            Mean = new(shape.MeanDepthMm.Value, Math.Sqrt(Square(shape.MeanDepthMm.StandardError) + kmError * kmError)),
            Edge = shape.EdgeMm,
            Shoulder = shape.ShoulderMm,
            Weight = _weight[s],
            Shape = shape,
        };
    }

    /// <summary>Where a recorded fitting began: new depth and no wear yet, or for a tyre moved or turned what it last read.</summary>
    private FittingPoint? Start(int p, int fitting)
    {
        var cut = _cuts.At(_positions[p])[fitting];
        if (cut.Record is not { } r || cut.Km is not { } km) return null;
        return r.Event switch
        {
            FittingEvent.Fitted when _cuts.NewDepth(_positions[p], fitting) is { } n && r.RetreadCount >= 0 => NewTyre(p, fitting, n, km),
            FittingEvent.Regrooved when r.NewDepthMm is { } n => new FittingPoint { Survey = -1, Km = km, Mean = new(n, 2 * TreadShape.NewDepthSdMm) },
            FittingEvent.TurnedOnRim when fitting > 0 => Carried(p, fitting - 1, p, km, flip: true),
            FittingEvent.Moved when r.FromPosition is { } from && _index.TryGetValue(from, out var q) => Carried(q, LastBefore(q, cut.Survey), p, km, flip: false),
            _ => null,
        };
    }

    /// <summary>A fitting record gives the depth when new; the first survey shows whether the tyre was new.</summary>
    private FittingPoint? NewTyre(int p, int fitting, double newDepth, double km)
    {
        var start = new FittingPoint { Survey = -1, Km = km, Mean = new(newDepth, TreadShape.NewDepthSdMm), Edge = new(0, 0.15), Shoulder = new(0, 0.3) };
        for (var s = _cuts.At(_positions[p])[fitting].Survey; s < _surveys.Count && _cuts.Of(_positions[p], s) == fitting; s++)
        {
            if (Shape(s, p) is not { } first) continue;
            var rate = _normal[p].RateMmPer1000Km / 1000;
            var wear = Math.Max(0, (_km[s].Value - km) * rate);
            return newDepth - first.MeanDepthMm.Value > 4 * wear + 4 * rate * _km[s].StandardError + 1.2 ? null : start;
        }
        return start;
    }

    private int LastBefore(int q, int survey) => survey == 0 ? -1 : _cuts.Of(_positions[q], survey - 1);

    /// <summary>The tyre as last read where it came from; a change between outer and inner dual turns the wheel round, so only the mean is carried.</summary>
    private FittingPoint? Carried(int from, int fitting, int to, double km, bool flip)
    {
        if (fitting < 0) return null;
        for (var s = _surveys.Count - 1; s >= 0; s--)
        {
            if (_km[s].Value > km + 1 || _cuts.Of(_positions[from], s) != fitting || Point(s, from) is not { } last) continue;
            var rate = _normal[from].RateMmPer1000Km / 1000;
            var since = Math.Max(0, km - last.Km);
            var sd = Math.Sqrt(Square(last.Mean.StandardError) + Square(rate * since * 0.5));
            var sameKind = _positions[from].Dual == _positions[to].Dual;
            return new FittingPoint
            {
                Survey = -1,
                Km = km,
                Mean = new(last.Mean.Value - rate * since, sd),
                Edge = sameKind && last.Edge is { } e ? e with { Value = flip ? -e.Value : e.Value } : null,
                Shoulder = sameKind ? last.Shoulder : null,
            };
        }
        return null;
    }

    /// <summary>An unrecorded change of the tyre, or one misreading, where that explains its readings better.</summary>
    private void Tyre(int p, ref (double Gain, Action? Apply) best)
    {
        for (var f = 0; f < _cuts.At(_positions[p]).Count; f++)
        {
            var points = new List<FittingPoint>();
            var start = Start(p, f);
            if (start is not null) points.Add(start);
            for (var s = 0; s < _surveys.Count; s++)
                if (_cuts.Of(_positions[p], s) == f && Point(s, p) is { } point) points.Add(point);
            if (points.Count < 2) continue;
            var whole = Evidence(p, f, points, 0, points.Count);
            // All is well in nearly every fitting: the greatest gain possible is bounded by a perfect fit.
            for (var k = 1; k < points.Count; k++)
            {
                if (points[k].Survey <= 0) continue;
                var gain = Evidence(p, f, points, 0, k) + Evidence(p, f, points, k, points.Count) - whole + Math.Log(ChangePrior);
                if (gain <= best.Gain) continue;
                var (at, probability) = (points[k].Survey, 1 / (1 + Math.Exp(-gain)));
                best = (gain, () =>
                {
                    _cuts.Add(_positions[p], new FittingCuts.Cut(at, null, null));
                    _inferredCuts.Add((_positions[p], at, probability));
                }
                );
            }
            if (points.Count < 3) continue;
            for (var k = start is null ? 0 : 1; k < points.Count; k++)
            {
                var rest = points.Where((_, i) => i != k).ToList();
                var gain = Evidence(p, f, rest, 0, rest.Count) + Evidence(p, f, points, k, k + 1) - whole + Math.Log(MisreadPrior);
                if (gain <= best.Gain || k == points.Count - 1) continue;
                var (at, probability) = (points[k].Survey, 1 / (1 + Math.Exp(-gain)));
                best = (gain, () => _misread[(at, _positions[p])] = probability);
            }
        }
    }

    private double Evidence(int p, int fitting, List<FittingPoint> points, int from, int to)
    {
        var (mean, edge, shoulder) = Beliefs(p, fitting);
        double log = 0;
        var technician = Square(_context.TechnicianSdMm);
        for (var i = from; i < to; i++) log += Take(ref mean, ref edge, ref shoulder, points[i], points[from].Km, technician);
        return log;
    }

    /// <summary>Acts only on what is clear; a survey in doubt stays as written and counts for less.</summary>
    private void Settle()
    {
        for (var s = 0; s < _surveys.Count; s++) _weighed[s] = Weigh(s);
        for (var s = 0; s < _surveys.Count; s++)
        {
            // Whether one axle or all were exchanged cannot show where the sides of the other axle are alike, nor does it matter there.
            var used = _weighed[s].Where(w => w.Explanation == _explanation[s] || (SidesExchanged(w.Explanation) && SidesExchanged(_explanation[s]))).Sum(w => w.Weight);
            if (used >= SurveyExplanation.Clear) continue;
            _explanation[s] = Explanation.AsWritten;
            _weight[s] = Math.Max(0.05, _weighed[s].FirstOrDefault(w => w.Explanation.Kind == ExplanationKind.AsWritten)?.Weight ?? 0);
        }
        foreach (var ((s, position), probability) in _misread.OrderBy(m => m.Key.Survey).ThenBy(m => m.Key.Position))
            _odd[s].Add(new(new(ExplanationKind.TyreMisread, Position: position), probability));
    }

    private static bool SidesExchanged(Explanation e) => e.Kind is ExplanationKind.SidesSwapped or ExplanationKind.AxleSidesSwapped;

    public IReadOnlyList<SurveyJudgement> Judgements() =>
    [
        .. _surveys.Select((s, i) => new SurveyJudgement
        {
            SurveyId = s.SurveyId,
            Explanations = _weighed[i],
            Odd = _odd[i],
            Used = _explanation[i],
            Weight = _explanation[i].Kind == ExplanationKind.OtherVehicle ? 0 : _weight[i],
        }),
    ];

    public IReadOnlyList<Fitting> Fittings()
    {
        var list = new List<Fitting>();
        for (var p = 0; p < _positions.Length; p++)
        {
            var cuts = _cuts.At(_positions[p]);
            for (var f = 0; f < cuts.Count; f++)
            {
                var points = new List<FittingPoint>();
                for (var s = cuts[f].Survey; s < (f + 1 < cuts.Count ? cuts[f + 1].Survey : _surveys.Count); s++)
                    if (Point(s, p) is { } point) points.Add(point with { Readings = Readings(s, _positions[p]) });
                var identity = _cuts.Identity(_positions[p], f);
                if (identity?.Event == FittingEvent.Removed && points.Count == 0) identity = null;
                list.Add(new Fitting
                {
                    VehicleId = _tread.Vehicle.VehicleId,
                    Position = _positions[p],
                    Role = _normal[p].Role,
                    Class = _tread.Vehicle.Class,
                    TyreId = identity?.TyreId,
                    Pattern = identity?.Pattern ?? _cuts.Tyre(identity?.TyreId)?.Pattern,
                    NewDepthMm = _cuts.NewDepth(_positions[p], f),
                    Winter = identity?.Winter ?? false,
                    Start = Start(p, f),
                    Points = points,
                    Current = f == cuts.Count - 1,
                });
            }
        }
        return list;
    }

    private static double Square(double x) => x * x;
}
