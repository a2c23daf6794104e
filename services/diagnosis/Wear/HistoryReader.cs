using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// Reads a vehicle's surveys against each other: which of them were written wrong, which tyres were changed without a
/// record. Each step takes the single change of reading that raises the joint likelihood most, until none does.
/// </summary>
internal sealed partial class HistoryReader
{
    /// <summary>Prior share of an unrecorded change per tyre and survey; from memory.</summary>
    private const double ChangePrior = 0.01;

    /// <summary>Prior share of one tyre misread in one survey; from memory.</summary>
    private const double MisreadPrior = 0.01;

    /// <summary>Deviation of one tyre's figures from its line beyond reading noise, mm: wear lines wander (groove deviations in runs).</summary>
    private const double WanderSdMm = 0.05;

    /// <summary>Spread of any depth a tyre can have, mm, about the middle of its life.</summary>
    private const double AnyDepthSdMm = 5;

    /// <summary>Spread of the depth of a new tyre about the one recorded last for its axle, and about the usual one of its kind, mm; from memory.</summary>
    private const double KnownNewSdMm = 0.5, UsualNewSdMm = 2;

    private readonly VehicleTread _tread;
    private readonly IReadOnlyList<StoredSurvey> _surveys;
    private readonly FittingCuts _cuts;
    private readonly HistoryContext _context;
    private readonly Position[] _positions;
    private readonly NormalWear[] _normal;
    private readonly Estimate[] _km;
    private readonly PositionIndex _index;
    // By survey and position, see Slot.
    private readonly TreadShape?[] _written;
    private readonly TyreReadings?[] _readings;
    private readonly Explanation[] _explanation;
    private readonly double[] _weight;
    private readonly Estimate[] _newDepth;
    private readonly IReadOnlyList<WeighedExplanation>[] _weighed;
    private readonly Dictionary<(int Survey, int Position), double> _misread = [];
    private readonly List<WeighedExplanation>[] _odd;
    /// <summary>Recorded beginnings whose tyre the readings do not bear out.</summary>
    private readonly HashSet<(int Position, int Survey)> _notThatTyre = [];
    private readonly List<(Position Position, int Survey, double Probability)> _inferredCuts = [];
    private readonly Dictionary<int, ExplanationSet> _sets = [];
    // Restated whenever an explanation, a weight or a beginning changes: evidence of each fitting, and place of each survey in it.
    private readonly FittingEvidence[][] _evidence;
    private readonly int[] _place;
    private readonly TreadShape?[] _seen;
    private readonly TyreExpectation[] _expected;
    private int _version;
    private readonly int[] _weighedAt;

    private static readonly WeighedExplanation[] s_asWritten = [new(Explanation.AsWritten, 1)];
    private static readonly List<WeighedExplanation> s_nothingOdd = [];

    public List<InferredFitting> Inferred { get; } = [];

    public HistoryReader(VehicleTread tread, IReadOnlyList<StoredSurvey> surveys, DistanceAxis axis, FittingCuts cuts, HistoryContext context)
    {
        (_tread, _surveys, _cuts, _context) = (tread, surveys, cuts, context);
        _positions = [.. tread.Vehicle.Positions()];
        _index = new PositionIndex(_positions);
        var (n, places) = (surveys.Count, _positions.Length);
        _normal = new NormalWear[places];
        for (var p = 0; p < places; p++) _normal[p] = context.Normal(tread.Vehicle, _positions[p]);
        (_km, _explanation, _weight, _weighed, _odd, _weighedAt) = (new Estimate[n], new Explanation[n], new double[n], new IReadOnlyList<WeighedExplanation>[n], new List<WeighedExplanation>[n], new int[n]);
        (_written, _readings, _place) = (new TreadShape?[n * places], new TyreReadings?[n * places], new int[n * places]);
        (_evidence, _seen, _expected) = (new FittingEvidence[places][], new TreadShape?[places], new TyreExpectation[places]);
        for (var s = 0; s < n; s++)
        {
            (_km[s], _explanation[s], _weight[s], _weighed[s], _odd[s], _weighedAt[s]) = (axis.At(surveys[s].Survey.At), Explanation.AsWritten, 1, s_asWritten, s_nothingOdd, -1);
            var tyres = surveys[s].Survey.Tyres;
            for (var i = 0; i < tyres.Count; i++)
                if (_index[tyres[i].Position] is >= 0 and var p) _readings[Slot(s, p)] ??= tyres[i];
        }
        _newDepth = new Estimate[places];
        Array.Fill(_newDepth, new(double.NaN, 0));
        Shapes();
        Restate();
    }

    private int Slot(int survey, int position) => survey * _positions.Length + position;

    private void Shapes()
    {
        var biases = new double[_surveys.Count];
        for (var s = 0; s < biases.Length; s++) biases[s] = _context.BiasMm(_surveys[s].Survey);
        List<int> within = [];
        List<TyreReadings> readings = [];
        List<double> resolutions = [];
        for (var p = 0; p < _positions.Length; p++)
        {
            for (var c = 0; c < _cuts.At(p).Count; c++)
            {
                within.Clear();
                readings.Clear();
                resolutions.Clear();
                var grooves = 0;
                for (var s = 0; s < _surveys.Count; s++)
                {
                    if (_readings[Slot(s, p)] is not { } tyre || _cuts.Of(p, s) != c) continue;
                    within.Add(s);
                    readings.Add(tyre);
                    resolutions.Add(_surveys[s].Survey.ResolutionMm);
                    for (var j = 0; j < tyre.Depths.Count; j++) grooves = Math.Max(grooves, tyre.Depths[j].Groove);
                }
                var mistyped = GrooveOutliers.Find(readings, resolutions, _context.RepeatSdMm);
                var uneven = UnevenTread.SdMm(readings, resolutions, _context.RepeatSdMm);
                for (var i = 0; i < within.Count; i++)
                {
                    var s = within[i];
                    int? without = null;
                    if (mistyped is not null && mistyped.TryGetValue(i, out var odd))
                    {
                        without = odd.Groove;
                        Odd(s).Add(new(new(odd.Kind, Position: _positions[p], Groove: odd.Groove), odd.Probability));
                    }
                    var shape = TreadShape.Of(readings[i], resolutions[i], _context.RepeatSdMm, null, grooves, without)?.Uneven(uneven);
                    _written[Slot(s, p)] = shape is null || biases[s] == 0 ? shape : shape with { MeanDepthMm = shape.MeanDepthMm with { Value = shape.MeanDepthMm.Value - biases[s] } };
                }
            }
        }
    }

    private List<WeighedExplanation> Odd(int survey) => ReferenceEquals(_odd[survey], s_nothingOdd) ? _odd[survey] = [] : _odd[survey];

    /// <summary>Shape at a position under the survey's present explanation.</summary>
    private TreadShape? Shape(int survey, int position)
    {
        var e = _explanation[survey];
        if (e.Kind == ExplanationKind.OtherVehicle) return null;
        if (e.Kind == ExplanationKind.AsWritten) return _written[Slot(survey, position)];
        return _index[e.Belongs(_positions[position])] is >= 0 and var w ? _written[Slot(survey, w)]?.As(_positions[position], e.Factor, e.Reverses(_positions[position])) : null;
    }

    private TyreReadings? Readings(int survey, int position)
    {
        var e = _explanation[survey];
        if (e.Kind == ExplanationKind.AsWritten) return _readings[Slot(survey, position)];
        if (e.Kind == ExplanationKind.OtherVehicle || _index[e.Belongs(_positions[position])] is not (>= 0 and var w) || _readings[Slot(survey, w)] is not { } r) return null;
        if (!e.Reverses(_positions[position])) return r with { Position = _positions[position], Depths = [.. r.Depths.Select(d => d with { DepthMm = d.DepthMm * e.Factor })] };
        var grooves = _written[Slot(survey, w)]?.Grooves ?? 0;
        return r with { Depths = [.. r.Depths.Select(d => d.Groove is < 1 || d.Groove > grooves ? d : d with { Groove = grooves + 1 - d.Groove, OutboardEdgeMm = -d.OutboardEdgeMm })] };
    }

    /// <summary>Brings points and evidence in line with the present explanations, weights and beginnings.</summary>
    private void Restate()
    {
        _version++;
        var wander = Square(WanderSdMm);
        var technician = Square(_context.TechnicianSdMm);
        for (var p = 0; p < _positions.Length; p++)
        {
            var cuts = _cuts.At(p);
            _evidence[p] = new FittingEvidence[cuts.Count];
            for (var f = 0; f < cuts.Count; f++)
            {
                var end = f + 1 < cuts.Count ? cuts[f + 1].Survey : _surveys.Count;
                var points = new List<FittingPoint>(Math.Max(0, end - cuts[f].Survey) + 1);
                if (Start(p, f) is { } start) points.Add(start);
                for (var s = cuts[f].Survey; s < end; s++)
                {
                    var point = Point(s, p);
                    _place[Slot(s, p)] = point is null ? -1 : points.Count;
                    if (point is not null) points.Add(point);
                }
                _evidence[p][f] = new(points, Prior(p, f), wander, technician);
            }
        }
    }

    /// <summary>
    /// Surveys as a whole come first, for one exchange of sides looks like several changed tyres; a tyre that does not fit
    /// leaves the rest of its survey as it is, since every tyre may be odd for a reason of its own.
    /// </summary>
    public void Explain()
    {
        if (_context.Thorough) Search();
        else Ascend();
        MovedForGood();
        Settle();
        if (_inferredCuts.Count > 0) new InferredEvents(_tread, _surveys, _positions, (s, p) => Shape(s, _index[p]), (a, b, p) => _normal[_index[p]].RateMmPer1000Km / 1000 * (_km[b].Value - _km[a].Value)).Name(_inferredCuts, Inferred);
    }

    /// <summary>Surveys, then tyres, until neither asks for a change.</summary>
    private void Ascend()
    {
        for (var round = 0; round < 3; round++)
        {
            var surveys = Climb(_surveys.Count, Survey);
            if (!_context.Thorough) MovedForGood();
            ChangedForGood();
            if (!Climb(_positions.Length, Tyre) && !surveys) break;
        }
    }

    private delegate void Proposal(int index, ref (double Gain, Action? Apply) best);

    private bool Climb(int count, Proposal propose)
    {
        for (var step = 0; step <= 2 * count; step++)
        {
            var best = (Gain: 0.5, Apply: (Action?)null);
            for (var i = 0; i < count; i++) propose(i, ref best);
            if (best.Apply is null) return step > 0;
            best.Apply();
            Restate();
        }
        return true;
    }

    /// <summary>The same exchange in two walks or more up to the latest is no slip of the pen: the tyres were moved.</summary>
    private void MovedForGood()
    {
        var last = _surveys.Count - 1;
        if (last < 1) return;
        var first = last;
        while (first > 0 && _explanation[first - 1] == _explanation[last]) first--;
        if (_explanation[last].CanBeDoneToTyres && first > 0 && first < last) Moved(_explanation[last], first, last, first);
        // As well may the walks before have been the other way round, when most came after.
        var end = 0;
        while (end < last && _explanation[end + 1] == _explanation[0]) end++;
        if (_explanation[0].CanBeDoneToTyres && end > 0 && end < last) Moved(_explanation[0], 0, end, end + 1);
    }

    private void Moved(Explanation moved, int first, int last, int since)
    {
        var gain = _context.Thorough ? Joint() : 0;
        for (var s = first; s <= last; s++) _explanation[s] = Explanation.AsWritten;
        Restate();
        var probability = _context.Thorough ? Probability(gain - Joint()) : _weighed[first].FirstOrDefault(w => w.Explanation == moved)?.Weight ?? 0.5;
        foreach (var p in _positions.Where(p => moved.Belongs(p) != p))
        {
            _cuts.Add(p, new FittingCuts.Cut(since, null, null));
            _inferredCuts.Add((p, since, probability));
        }
        Restate();
    }

    /// <summary>Two walks or more in a row that look like another vehicle's are this one's with other tyres on; which were changed is left to the tyres.</summary>
    private void ChangedForGood()
    {
        for (var s = 1; s < _surveys.Count; s++)
        {
            if (_explanation[s].Kind != ExplanationKind.OtherVehicle || _explanation[s - 1].Kind != ExplanationKind.OtherVehicle) continue;
            for (var first = s - 1; s < _surveys.Count && _explanation[s].Kind == ExplanationKind.OtherVehicle; s++)
                for (; first <= s; first++) _explanation[first] = Explanation.AsWritten;
            Restate();
        }
    }

    private void Survey(int s, ref (double Gain, Action? Apply) best)
    {
        Weigh(s);
        var weighed = _weighed[s];
        WeighedExplanation? top = null;
        for (var i = 0; i < weighed.Count; i++)
            if (weighed[i].Explanation.Kind != ExplanationKind.ComparedSurveyWrong && (top is null || weighed[i].Weight > top.Weight)) top = weighed[i];
        if (top!.Explanation == _explanation[s]) return;
        var now = weighed.FirstOrDefault(w => w.Explanation == _explanation[s])?.Weight ?? 0;
        var gain = Math.Log(top.Weight / Math.Max(now, 1e-300));
        // Of two surveys that accuse each other the later is asked first.
        if (gain > best.Gain || (gain > best.Gain - 1e-6 && best.Apply is not null)) best = (gain, () => _explanation[s] = top.Explanation);
    }

    /// <summary>Weighs the explanations of a survey, unless nothing has changed since it last was.</summary>
    private void Weigh(int s)
    {
        if (_weighedAt[s] == _version) return;
        (_weighedAt[s], _weighed[s]) = (_version, s_asWritten);
        int axles = 0, behind = 0;
        for (var p = 0; p < _positions.Length; p++)
        {
            _seen[p] = _misread.Count > 0 && _misread.ContainsKey((s, p)) ? null : _written[Slot(s, p)];
            if (_seen[p] is not null) axles |= 1 << _positions[p].Axle;
            _expected[p] = Expected(s, p);
            behind = Math.Max(behind, _expected[p].Surveys);
        }
        if (axles == 0 || behind == 0) return;
        var set = Set(axles);
        // The fleet's fit takes what is plain at its word; one vehicle's answer states the weights.
        if (!_context.Thorough && _explanation[s].Kind == ExplanationKind.AsWritten && PlainSurvey.Fits(set, _seen, _expected, _context.TechnicianSdMm, _surveys[s].Survey.ResolutionMm)) return;
        _weighed[s] = SurveyExplanation.Weigh(set, _seen, _expected, _context.TechnicianSdMm, _surveys[s].Survey.ResolutionMm);
    }

    private ExplanationSet Set(int axles)
    {
        if (!_sets.TryGetValue(axles, out var set))
            _sets[axles] = set = ExplanationSet.Of(_tread.Vehicle, _positions, [.. Enumerable.Range(1, Position.MaxAxle).Where(a => (axles & (1 << a)) != 0)]);
        return set;
    }

    /// <summary>What a new tyre would read at a survey, put on at any time since the one before: of the depth recorded last for its axle, else the usual one.</summary>
    private Estimate NewAt(int s, int p)
    {
        if (double.IsNaN(_newDepth[p].Value))
        {
            double? known = null;
            for (var q = 0; q < _positions.Length; q++)
                if (_positions[q].Axle == _positions[p].Axle)
                    for (var f = 0; f < _cuts.At(q).Count; f++) known = _cuts.NewDepth(q, f) ?? known;
            _newDepth[p] = known is { } k ? new(k, KnownNewSdMm) : new(WearPrior.For(_tread.Vehicle.Class, _normal[p].Role).NewDepthMm, UsualNewSdMm);
        }
        var half = s > 0 ? Math.Max(0, _km[s].Value - _km[s - 1].Value) * _normal[p].RateMmPer1000Km / 2000 : 0;
        return new(_newDepth[p].Value - half, Math.Sqrt(Square(_newDepth[p].StandardError) + half * half + Square(_context.TechnicianSdMm)));
    }

    /// <summary>What the other surveys of the same fitting expect at a survey.</summary>
    private TyreExpectation Expected(int s, int p)
    {
        var evidence = _evidence[p][_cuts.Of(p, s)];
        var own = _place[Slot(s, p)];
        var (mean, edge, shoulder) = evidence.Expected(_km[s].Value, own);
        // A recorded start is not itself in doubt: it counts for two.
        return new(mean, Wander(edge), Wander(shoulder), evidence.Points.Count + (evidence.Started ? 1 : 0) - (own < 0 ? 0 : 1)) { NewMm = NewAt(s, p) };

        static Estimate Wander(Estimate e) => new(e.Value, Math.Sqrt(e.StandardError * e.StandardError + WanderSdMm * WanderSdMm));
    }

    private FittingPrior Prior(int p, int fitting)
    {
        var rate = _normal[p].RateMmPer1000Km / 1000;
        var middle = _cuts.NewDepth(p, fitting) ?? WearPrior.For(_tread.Vehicle.Class, _normal[p].Role).NewDepthMm;
        return new(new(middle * 0.6, AnyDepthSdMm), new(-rate, rate),
            new(0, 0.7), new(rate * _normal[p].EdgePerMm.Value, rate * 0.5),
            new(0, 0.9), new(rate * _normal[p].ShoulderPerMm.Value, rate * 0.4));
    }

    private FittingPoint? Point(int s, int p)
    {
        if (_weight[s] <= 0 || (_misread.Count > 0 && _misread.ContainsKey((s, p))) || Shape(s, p) is not { } shape) return null;
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
            Readings = Readings(s, p),
        };
    }

    /// <summary>Where a recorded fitting began: new depth and no wear yet, or for a tyre moved or turned what it last read.</summary>
    private FittingPoint? Start(int p, int fitting)
    {
        var cut = _cuts.At(p)[fitting];
        if (cut.Record is not { } r || cut.Km is not { } km || _notThatTyre.Contains((p, cut.Survey))) return null;
        return r.Event switch
        {
            FittingEvent.Fitted when StoodBefore(r) is { } before => Carried(before.Position, before.Fitting, p, km, flip: false, before.OffKm),
            FittingEvent.Fitted when _cuts.NewDepth(p, fitting) is { } n && r.RetreadCount >= 0 => NewTyre(p, fitting, n, km),
            FittingEvent.Regrooved when r.NewDepthMm is { } n => new FittingPoint { Survey = -1, Km = km, Mean = new(n, 2 * TreadShape.NewDepthSdMm) },
            FittingEvent.TurnedOnRim when fitting > 0 => Carried(p, fitting - 1, p, km, flip: true),
            FittingEvent.Moved when r.FromPosition is { } from && _index[from] is >= 0 and var q => Carried(q, LastBefore(q, cut.Survey), p, km, flip: false),
            _ => null,
        };
    }

    /// <summary>A fitting record gives the depth when new; the first survey shows whether the tyre was new.</summary>
    private FittingPoint? NewTyre(int p, int fitting, double newDepth, double km)
    {
        var start = new FittingPoint { Survey = -1, New = true, Km = km, Mean = new(newDepth, TreadShape.NewDepthSdMm), Edge = new(0, 0.15), Shoulder = new(0, 0.3) };
        for (var s = _cuts.At(p)[fitting].Survey; s < _surveys.Count && _cuts.Of(p, s) == fitting; s++)
        {
            if (Shape(s, p) is not { } first) continue;
            var rate = _normal[p].RateMmPer1000Km / 1000;
            var wear = Math.Max(0, (_km[s].Value - km) * rate);
            return newDepth - first.MeanDepthMm.Value > 4 * wear + 4 * rate * _km[s].StandardError + 1.2 ? null : start;
        }
        return start;
    }

    /// <summary>Where a tyre of this number stood last before it was put on again, as the sets of a season do, and the distance at which it came off.</summary>
    private (int Position, int Fitting, double OffKm)? StoodBefore(FittingRecord record)
    {
        if (record.TyreId is null) return null;
        (int, int, double)? found = null;
        var latest = DateTimeOffset.MinValue;
        for (var q = 0; q < _positions.Length; q++)
        {
            var cuts = _cuts.At(q);
            for (var f = 0; f < cuts.Count; f++)
            {
                if (cuts[f].Record is not { } r || r.At >= record.At || r.At <= latest || _cuts.Identity(q, f)?.TyreId != record.TyreId) continue;
                latest = r.At;
                found = f + 1 < cuts.Count && cuts[f + 1].Km is { } off ? (q, f, off) : null;
            }
        }
        return found;
    }

    private int LastBefore(int q, int survey) => survey == 0 ? -1 : _cuts.Of(q, survey - 1);

    /// <summary>The tyre as last read where it came from; a change between outer and inner dual turns the wheel round, so only the mean is carried.</summary>
    private FittingPoint? Carried(int from, int fitting, int to, double km, bool flip, double? offKm = null)
    {
        if (fitting < 0) return null;
        for (var s = _surveys.Count - 1; s >= 0; s--)
        {
            if (_km[s].Value > (offKm ?? km) + 1 || _cuts.Of(from, s) != fitting || Point(s, from) is not { } last) continue;
            var rate = _normal[from].RateMmPer1000Km / 1000;
            // In the rack a tyre does not wear.
            var since = Math.Max(0, (offKm ?? km) - last.Km);
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
        foreach (var evidence in _evidence[p])
        {
            var points = evidence.Points;
            var n = points.Count;
            if (n < 2) continue;
            var whole = evidence.Of(0, n);
            for (var k = 1; k < n; k++)
            {
                if (points[k].Survey <= 0) continue;
                var gain = evidence.Of(0, k) + evidence.OfChanged(k, n, NewAt(points[k].Survey, p)) - whole + s_logChange;
                if (gain > best.Gain) best = (gain, Changed(p, points[k].Survey, gain));
            }
            // The last survey cannot be told from a change: it waits for the next.
            for (var k = evidence.Started ? 1 : 0; n > 2 && k < n - 1; k++)
            {
                var gain = evidence.Without(k) + evidence.Of(k, k + 1) - whole + s_logMisread;
                if (gain > best.Gain) best = (gain, Misread(p, points[k].Survey, gain));
            }
        }
    }

    private static readonly double s_logChange = Math.Log(ChangePrior), s_logMisread = Math.Log(MisreadPrior);

    private static double Probability(double gain) => 1 / (1 + Math.Exp(-gain));

    private Action Changed(int p, int survey, double gain) => () =>
    {
        // Where a fitting was recorded it stands, but the tyre is not the one the record tells of: it starts at nothing known.
        if (_cuts.At(p)[_cuts.Of(p, survey)] is { Record: not null } cut && cut.Survey == survey) _notThatTyre.Add((p, survey));
        else _cuts.Add(_positions[p], new FittingCuts.Cut(survey, null, null));
        _inferredCuts.Add((_positions[p], survey, Probability(gain)));
    };

    private Action Misread(int p, int survey, double gain) => () => _misread[(survey, p)] = Probability(gain);

    /// <summary>Acts only on what is clear; a survey in doubt stays as written and counts for less.</summary>
    private void Settle()
    {
        for (var s = 0; s < _surveys.Count; s++) Weigh(s);
        var changed = false;
        for (var s = 0; s < _surveys.Count; s++)
        {
            // Whether one axle or all were exchanged cannot show where the sides of the other axle are alike, nor does it matter there.
            if (_weighed[s][0].Weight >= SurveyExplanation.Clear && _weighed[s][0].Explanation == _explanation[s]) continue;
            var used = _weighed[s].Where(w => w.Explanation == _explanation[s] || (SidesExchanged(w.Explanation) && SidesExchanged(_explanation[s]))).Sum(w => w.Weight);
            if (used >= SurveyExplanation.Clear) continue;
            changed = true;
            // Readings that more likely are another vehicle's would only spoil the lines of this one.
            if (_explanation[s].Kind == ExplanationKind.OtherVehicle && used >= 0.5) continue;
            _explanation[s] = Explanation.AsWritten;
            _weight[s] = Math.Max(0.05, _weighed[s].FirstOrDefault(w => w.Explanation.Kind == ExplanationKind.AsWritten)?.Weight ?? 0);
        }
        foreach (var ((s, p), probability) in _misread.OrderBy(m => m.Key.Survey).ThenBy(m => _positions[m.Key.Position]))
            Odd(s).Add(new(new(ExplanationKind.TyreMisread, Position: _positions[p]), probability));
        if (changed) Restate();
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
            var cuts = _cuts.At(p);
            for (var f = 0; f < cuts.Count; f++)
            {
                var evidence = _evidence[p][f];
                var identity = _cuts.Identity(p, f);
                if (identity?.Event == FittingEvent.Removed && evidence.Points.Count == (evidence.Started ? 1 : 0)) identity = null;
                list.Add(new Fitting
                {
                    VehicleId = _tread.Vehicle.VehicleId,
                    Position = _positions[p],
                    Role = _normal[p].Role,
                    Class = _tread.Vehicle.Class,
                    TyreId = identity?.TyreId,
                    Pattern = identity?.Pattern ?? _cuts.Tyre(identity?.TyreId)?.Pattern,
                    NewDepthMm = _cuts.NewDepth(p, f),
                    Winter = identity?.Winter ?? false,
                    Start = evidence.Started ? evidence.Points[0] : null,
                    Points = evidence.Started ? [.. evidence.Points.Skip(1)] : evidence.Points,
                    Current = f == cuts.Count - 1,
                });
            }
        }
        return list;
    }

    private static double Square(double x) => x * x;
}
