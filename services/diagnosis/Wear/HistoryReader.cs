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
    /// <summary>Deviation of one tyre's figures from its line beyond reading noise, mm: wear lines wander (groove deviations in runs).</summary>
    private const double WanderSdMm = 0.05;

    private readonly VehicleTread _tread;
    private readonly IReadOnlyList<StoredSurvey> _surveys;
    private readonly FittingCuts _cuts;
    private readonly HistoryContext _context;
    private readonly double _logChange, _logMisread;
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
        (_logChange, _logMisread) = (Math.Log(context.Errors.TyreChanged), Math.Log(context.Errors.TyreMisread));
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
                var mistyped = GrooveOutliers.Find(readings, resolutions, _context.RepeatSdMm, _context.Errors);
                var uneven = UnevenTread.SdMm(readings, resolutions, _context.RepeatSdMm);
                for (var i = 0; i < within.Count; i++)
                {
                    var s = within[i];
                    int? without = null;
                    if (mistyped is not null && mistyped.TryGetValue(i, out var odd) && !_surveys[s].Survey.Confirmed)
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
