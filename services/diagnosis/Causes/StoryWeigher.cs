using MathNet.Numerics.Distributions;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Causes;

/// <summary>Weighs one story, alone or beside a look-alike, against all evidence of one vehicle. Not safe for concurrent use.</summary>
public sealed class StoryWeigher
{
    /// <summary>Log likelihood below the story's best at which an onset and a magnitude no longer matter, and how many are weighed in full.</summary>
    private const double FarBelow = 8;
    private const int MostInFull = 4;

    /// <summary>Log likelihood that the cells of an angle in order must add on a sound vehicle, to be gone through for every story.</summary>
    private const double WorthCells = 0.05;

    /// <summary>Log likelihood below the story's best at which the magnitudes between two are not looked at.</summary>
    private const double Negligible = 14;

    /// <summary>Difference of two log likelihoods below which what lies between is taken as between them.</summary>
    private const double Alike = 0.7;

    /// <summary>Log odds against a story, nearly weighed, below which weighing it in full would change nothing that is shown.</summary>
    private const double HardlyMatters = 9;

    private static readonly double LogPriorInside = Math.Log(1 - 2 * Normal.CDF(0, 1, -1 / Sensitivities.InOrderSd));

    private readonly VehicleModel _model;
    private readonly JointGaussian[] _joint; // by onset
    private readonly int[] _asOnset; // the first onset around which the readings say the same
    private readonly SingleReadings _single;
    private readonly BenchEvidence _bench;
    private readonly double[] _state, _priorSd, _ordinarySd;
    private readonly List<Branch>[] _inOrder; // by gain
    private int _within = -1; // the angle in order that is gone through cell by cell, and the cells worth it
    private int[] _withinCells = [];
    private readonly double _nearlyInOrder, _inOrderMoved; // a sound vehicle weighed nearly, and what weighing it in full adds

    /// <summary>One choice of which readings are wild: log likelihood of the joint law, and the state as single readings see it.</summary>
    private sealed record Branch(double Log, StateSeen Seen, (double Mean, double Sd) LogSlipScale);

    /// <summary>One onset and magnitude of a story, with the logarithm of its prior share and of its likelihood.</summary>
    private sealed record Point(int Onset, int Cell, double Prior)
    {
        public double Log { get; set; }
        public bool InFull { get; set; }
        public (double Mean, double Sd) LogSlipScale { get; set; }
    }

    public StoryWeigher(VehicleModel model)
    {
        _model = model;
        // Where nothing is dated a fault has always been there.
        var dated = model.Figures.Wear is not null || model.Figures.Steering?.EarliestDaysAgo is not null;
        IReadOnlyList<WearObservable>[] wear = [.. Enumerable.Range(0, dated ? Onsets.DaysAgo.Count : 1).Select(o => Observables.Wear(model, o))];
        _single = new SingleReadings(model);
        _asOnset = [.. wear.Select((_, o) => Enumerable.Range(0, o).Append(o).First(before => before == o || Same(wear, before, o)))];
        _joint = new JointGaussian[wear.Length];
        for (var o = 0; o < wear.Length; o++) _joint[o] = _asOnset[o] == o ? new JointGaussian(model, wear, o) : _joint[_asOnset[o]];
        _bench = new BenchEvidence(model);
        _ordinarySd = [.. model.Dimensions.Select(d => d.PriorSd)];
        (_state, _priorSd) = (new double[_ordinarySd.Length], [.. _ordinarySd]);
        _inOrder = [.. Enumerable.Range(0, JointGaussian.Gains.Count).Select(g => Branches(0, g))];
        ChooseWithin();
        Place(null, 0, null);
        var (nearly, full) = (Near(null, 0, 0), At(null, 0, 0).LogLikelihood);
        var beyond = BeyondGaussian(null, 0, 0, null, full);
        if (beyond < WorthCells) _within = -1;
        (_nearlyInOrder, _inOrderMoved) = (nearly, full + beyond - nearly);
    }

    /// <summary>Log likelihood of a vehicle with every angle in order and no look-alike worth naming.</summary>
    public double InOrder() => _nearlyInOrder + _inOrderMoved;

    /// <summary>
    /// The Gaussian is linear about the target, wear is quadratic in slip: an angle near its tolerance wears more than that
    /// says. The angle for which that matters most on a sound vehicle is gone through cell by cell, the others as they are.
    /// </summary>
    private void ChooseWithin()
    {
        var top = 0.0;
        for (var d = 0; d < _state.Length; d++)
        {
            if (_model.Dimensions[d].Tolerance is null) continue;
            var cells = new double[InOrderCells.Length];
            for (var i = 0; i < cells.Length; i++)
            {
                PlaceWithin(null, 0, null, d, i);
                cells[i] = Math.Log(InOrderCells[i].Share) + Near(null, 0, 0, d);
            }
            var all = StoryFit.LogSum(cells);
            if (_within >= 0 && all <= top) continue;
            (_within, top) = (d, all);
            _withinCells = [.. Enumerable.Range(0, cells.Length).Where(i => cells[i] >= cells.Max() - FarBelow / 2)];
        }
    }

    /// <summary>
    /// What the cells of that angle add to a story's log likelihood, at its best onset and magnitude. Every story gets it, not the
    /// vehicle in order alone: otherwise a wheel near its tolerance would speak against whatever else may be wrong.
    /// </summary>
    private double BeyondGaussian(Story? story, double magnitude, int onset, Story? beside, double gaussian)
    {
        if (_within < 0 || story?.Moves.Any(m => m.State == _within) == true) return 0;
        return Math.Max(0, StoryFit.LogSum([.. _withinCells.Select(i =>
        {
            PlaceWithin(story, magnitude, beside, _within, i);
            return Math.Log(InOrderCells[i].Share) + At(story, magnitude, onset, _within).LogLikelihood;
        })]) - gaussian);
    }

    private void PlaceWithin(Story? story, double magnitude, Story? beside, int d, int cell)
    {
        Place(story, magnitude, beside);
        var tolerance = _model.Dimensions[d].Tolerance!.Value;
        (_state[d], _priorSd[d]) = (InOrderCells[cell].Middle * tolerance, (InOrderCells[cell].High - InOrderCells[cell].Low) * tolerance / Math.Sqrt(12));
    }

    /// <summary>Cells of an angle in order, in tolerances, with their shares of the truncated normal law.</summary>
    private static readonly Cell[] InOrderCells = [.. new (double Low, double High)[] { (-1, -0.8), (-0.8, -0.6), (-0.6, -0.35), (-0.35, 0.35), (0.35, 0.6), (0.6, 0.8), (0.8, 1) }
        .Select(c => new Cell(c.Low, c.High, (Normal.CDF(0, Sensitivities.InOrderSd, c.High) - Normal.CDF(0, Sensitivities.InOrderSd, c.Low)) / Math.Exp(LogPriorInside)))];

    /// <summary>A story over all its magnitudes, and an angle over all its onsets (a look-alike has always been there).</summary>
    /// <param name="story">What.</param>
    /// <param name="beside">The look-alike there at the same time, or null; its magnitude is integrated as Gaussian.</param>
    /// <remarks>Everything is weighed nearly; what comes near the story's best is weighed in full, and moves the rest along.</remarks>
    public StoryFit Weigh(Story story, Story? beside = null)
    {
        var onsets = story.IsAngle ? _joint.Length : 1;
        var points = Nearly(story, beside, onsets);
        points.Sort((x, y) => (y.Log + y.Prior).CompareTo(x.Log + x.Prior));
        if (Math.Log(story.Share) + StoryFit.LogSum(points.Select(p => p.Log + p.Prior)) < _nearlyInOrder - HardlyMatters)
            foreach (var point in points) (point.Log, point.LogSlipScale) = (point.Log + _inOrderMoved, _inOrder[JointGaussian.MiddleGain][0].LogSlipScale);
        else InFull(story, beside, points);
        return Gather(story, points, onsets);
    }

    /// <summary>
    /// Every onset and magnitude nearly. Onsets around which nothing else was read share their values; every third magnitude at every
    /// other onset is looked at first, and what lies between two only where they differ and one of them comes near the best.
    /// </summary>
    private List<Point> Nearly(Story story, Story? beside, int onsets)
    {
        var cells = story.Cells.Count;
        Point[] points = [.. Enumerable.Range(0, onsets * cells).Select(at =>
            new Point(at / cells, at % cells, Math.Log(story.Cells[at % cells].Share) + (onsets > 1 ? Math.Log(Onsets.Shares[at / cells]) : 0)))];
        int[] own = [.. Enumerable.Range(0, onsets).Where(o => _asOnset[o] == o)];
        int[] all = [.. Enumerable.Range(0, cells)], some = [.. all.Where(i => cells <= 6 || Math.Min(i, cells - 1 - i) % 3 == 0 || i == cells / 2 - 1 || i == cells / 2)];
        var best = double.NegativeInfinity;
        for (var n = 0; n < own.Length; n += 2)
        {
            foreach (var i in some) Look(At(n, i));
            foreach (var i in all.Except(some)) Between(At(n, some.Last(c => c < i)), At(n, some.First(c => c > i)), At(n, i), i);
        }
        for (var n = 1; n < own.Length; n += 2)
            foreach (var i in all)
                if (n + 1 < own.Length) Between(At(n - 1, i), At(n + 1, i), At(n, i), -1);
                else Look(At(n, i));
        foreach (var point in points) point.Log = points[_asOnset[point.Onset] * cells + point.Cell].Log;
        return [.. points];

        Point At(int n, int cell) => points[own[n] * cells + cell];
        void Look(Point point)
        {
            Place(story, story.Cells[point.Cell].Middle, beside);
            point.Log = Near(story, story.Cells[point.Cell].Middle, point.Onset);
            best = Math.Max(best, point.Log);
        }
        void Between(Point low, Point high, Point point, int cell)
        {
            var share = cell < 0 ? 0.5 : (story.Cells[cell].Middle - story.Cells[low.Cell].Middle) / (story.Cells[high.Cell].Middle - story.Cells[low.Cell].Middle);
            point.Log = low.Log + share * (high.Log - low.Log);
            if (Math.Abs(high.Log - low.Log) > Alike && Math.Max(low.Log, high.Log) > best - Negligible) Look(point);
        }
    }

    private void InFull(Story story, Story? beside, List<Point> points)
    {
        var least = points[0].Log + points[0].Prior - FarBelow;
        var full = points.Where(p => _asOnset[p.Onset] == p.Onset).TakeWhile((p, i) => i < MostInFull && p.Log + p.Prior >= least).ToArray();
        var moved = 0.0;
        foreach (var point in full)
        {
            var nearly = point.Log;
            Place(story, story.Cells[point.Cell].Middle, beside);
            (point.Log, point.LogSlipScale) = At(story, story.Cells[point.Cell].Middle, point.Onset);
            point.InFull = true;
            moved += (point.Log - nearly) / full.Length;
        }
        foreach (var point in points.Where(p => !p.InFull))
            (point.Log, point.LogSlipScale) = full.FirstOrDefault(f => f.Cell == point.Cell && f.Onset == _asOnset[point.Onset]) is { } same
                ? (same.Log, same.LogSlipScale) : (point.Log + moved, full[0].LogSlipScale);
        var best = full.MaxBy(p => p.Log + p.Prior)!;
        var beyond = BeyondGaussian(story, story.Cells[best.Cell].Middle, best.Onset, beside, best.Log);
        foreach (var point in points) point.Log += beyond;
    }

    /// <summary>Whether all readings say the same around two onsets: both lie before the first of them.</summary>
    private bool Same(IReadOnlyList<WearObservable>[] wear, int a, int b) => _single.SameAround(a, b) && wear[a].Count == wear[b].Count
        && wear[a].Zip(wear[b]).All(x => x.First.Tyre == x.Second.Tyre && x.First.Kind == x.Second.Kind && x.First.Evidence.SameAs(x.Second.Evidence));

    private static StoryFit Gather(Story story, List<Point> points, int onsets)
    {
        var (log, scale, byOnset) = (new double[story.Cells.Count], new (double, double)[story.Cells.Count], new double[onsets]);
        for (var i = 0; i < log.Length; i++)
        {
            var here = points.Where(p => p.Cell == i).ToArray();
            log[i] = StoryFit.LogSum(here.Select(p => p.Log + p.Prior)) - Math.Log(story.Cells[i].Share);
            scale[i] = here.MaxBy(p => p.Log + p.Prior)!.LogSlipScale;
        }
        for (var o = 0; o < onsets; o++) byOnset[o] = StoryFit.LogSum(points.Where(p => p.Onset == o).Select(p => p.Log + p.Prior));
        return new StoryFit(story, log, scale, byOnset);
    }

    private void Place(Story? story, double magnitude, Story? beside)
    {
        Array.Clear(_state);
        _ordinarySd.CopyTo(_priorSd, 0);
        foreach (var (state, weight) in story?.Moves ?? [])
        {
            _state[state] = magnitude * weight;
            // A wheel that shares a split keeps part of its own latitude; a quantity told in full keeps none; a sensor's
            // zero that a bent arm adds to keeps all of it.
            if (story!.IsAngle && _model.Dimensions[state].Tolerance is null) continue;
            _priorSd[state] *= Math.Abs(weight) < 1 ? Math.Sqrt(0.5) : 0;
        }
        foreach (var (state, _) in beside?.Moves ?? []) _priorSd[state] = beside!.Spread;
    }

    private double Near(Story? story, double magnitude, int onset, int within = -1)
    {
        if (story is { Moves.Count: 0 }) return At(story, magnitude, onset).LogLikelihood;
        var joint = _joint[onset];
        var (top, sum) = (double.NegativeInfinity, 0.0);
        joint.Near(_state, _priorSd, fit =>
        {
            var log = fit.LogLikelihood + Inside(fit, within) + _single.LogLikelihood(story, magnitude, onset, See(joint, fit));
            if (log > top) (top, sum) = (log, sum * Math.Exp(top - log) + 1);
            else sum += Math.Exp(log - top);
        });
        return top + Math.Log(sum) + (story is null ? 0 : _bench.LogLikelihood(story, _state));
    }

    /// <summary>Sums over the gain and over which readings are wild.</summary>
    private (double LogLikelihood, (double Mean, double Sd) LogSlipScale) At(Story? story, double magnitude, int onset, int within = -1)
    {
        var ordinary = within < 0 && (story is null || story.Moves.Count == 0);
        var (logs, scales) = (new List<double>(), new List<(double Mean, double Sd)>());
        for (var g = 0; g < _inOrder.Length; g++)
            foreach (var branch in ordinary ? _inOrder[g] : Branches(onset, g, within))
            {
                logs.Add(JointGaussian.Gains[g].LogWeight + branch.Log + _single.LogLikelihood(story, magnitude, onset, branch.Seen));
                scales.Add(branch.LogSlipScale);
            }
        var total = StoryFit.LogSum(logs);
        double mean = 0, square = 0;
        for (var i = 0; i < logs.Count; i++)
        {
            var share = Math.Exp(logs[i] - total);
            mean += share * scales[i].Mean;
            square += share * (scales[i].Mean * scales[i].Mean + scales[i].Sd * scales[i].Sd);
        }
        return (total + _bench.LogLikelihood(story, _state), (mean, Math.Sqrt(Math.Max(0, square - mean * mean))));
    }

    /// <summary>
    /// Choices of wild readings along the worst ones: taking a reading as wild costs its small prior share, so that no
    /// single figure decides, and takes back what it had made of all other unknowns.
    /// </summary>
    private List<Branch> Branches(int onset, int gain, int within = -1)
    {
        var branches = new List<Branch>(2);
        var joint = _joint[onset];
        joint.At(_state, _priorSd, gain, fit => branches.Add(new Branch(fit.LogLikelihood + Inside(fit, within), See(joint, fit), joint.LogSlipScale())));
        return branches;
    }

    private StateSeen See(JointGaussian joint, in JointFit fit)
    {
        var (slip, before) = (new (double, double)[_model.Positions.Count], new (double, double)[_model.Positions.Count]);
        for (var i = 0; i < slip.Length; i++) (slip[i], before[i]) = (joint.ShapeSlip(i, _priorSd, fit), joint.ShapeSlipBefore(i, _priorSd, fit));
        return new StateSeen(slip, before, joint.Steering(_model.Torque, _state, _priorSd, fit), joint.Steering(_model.WheelAngle, _state, _priorSd, fit));
    }

    /// <summary>
    /// The Gaussian stands in for "within tolerance"; what of its posterior lies beyond belongs to another story and is
    /// taken off here, so that a story in order never explains an angle that is out.
    /// </summary>
    /// <param name="fit">Posterior.</param>
    /// <param name="within">A dimension held within a cell of its own; −1 for none.</param>
    private double Inside(JointFit fit, int within = -1)
    {
        double sum = 0;
        for (var d = 0; d < _ordinarySd.Length; d++)
        {
            if (_model.Dimensions[d].Tolerance is not { } tolerance || _state[d] != 0 || d == within) continue;
            var sd = Math.Sqrt(fit.Variance[d]);
            var bound = tolerance / _priorSd[d];
            var inside = Normal.CDF(0, 1, (bound - fit.Mean[d]) / sd) - Normal.CDF(0, 1, (-bound - fit.Mean[d]) / sd);
            sum += Math.Log(Math.Max(inside, 1e-12)) - LogPriorInside;
        }
        return sum;
    }
}
