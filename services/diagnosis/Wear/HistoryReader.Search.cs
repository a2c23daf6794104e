using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// The history as a whole. Step by step a climb can end where the first survey, or the one odd one, has talked the others
/// round. So it starts from two sides, surveys first and tyres first, and from the better end it tries to take back and to
/// put together; what decides is the joint probability of all readings and of all that is said about them.
/// </summary>
internal sealed partial class HistoryReader
{
    private const int MostSteps = 24;

    /// <summary>Explanations of one survey tried beside the present one.</summary>
    private const int Tried = 3;

    private sealed record State(Explanation[] Explanation, KeyValuePair<(int Survey, int Position), double>[] Misread, (int, int)[] NotThatTyre, (Position, int, double)[] Inferred, FittingCuts.Cut[][] Cuts);

    private State Save() => new([.. _explanation], [.. _misread], [.. _notThatTyre], [.. _inferredCuts], _cuts.Saved());

    private void Restore(State state)
    {
        state.Explanation.CopyTo(_explanation, 0);
        _misread.Clear();
        foreach (var (key, value) in state.Misread) _misread[key] = value;
        _notThatTyre.Clear();
        _notThatTyre.UnionWith(state.NotThatTyre);
        _inferredCuts.Clear();
        _inferredCuts.AddRange(state.Inferred);
        _cuts.Restore(state.Cuts);
        Restate();
    }

    private bool Plain => _inferredCuts.Count == 0 && _misread.Count == 0 && _explanation.All(e => e.Kind == ExplanationKind.AsWritten);

    private void Search()
    {
        var start = Save();
        Ascend();
        if (Plain) return;
        var (surveysFirst, joint) = (Save(), Joint());
        Restore(start);
        Climb(_surveys.Count, AxleChanged);
        Climb(_positions.Length, Tyre);
        Ascend();
        if (Joint() < joint) Restore(surveysFirst);
        Refine();
    }

    /// <summary>ln of the joint probability of the readings and of what is said about them, up to a constant.</summary>
    private double Joint()
    {
        double log = 0;
        for (var p = 0; p < _positions.Length; p++)
        {
            var cuts = _cuts.At(p);
            for (var f = 0; f < cuts.Count; f++)
            {
                var evidence = _evidence[p][f];
                if (evidence.Points.Count == 0) continue;
                var n = evidence.Points.Count;
                // A recorded start is no reading: the readings are judged given it.
                if (evidence.Started) log += evidence.Of(0, n) - evidence.Of(0, 1);
                else log += Unrecorded(p, cuts[f]) ? evidence.OfChanged(0, n, NewAt(evidence.Points[0].Survey, p)) : evidence.Of(0, n);
            }
        }
        foreach (var (s, p) in _misread.Keys) log += _logMisread + Lonely(s, p);
        for (var s = 0; s < _surveys.Count; s++) log += Said(s);
        foreach (var byAxle in _inferredCuts.GroupBy(c => (c.Position.Axle, c.Survey)))
        {
            var (tyres, changed) = (_positions.Count(p => p.Axle == byAxle.Key.Axle), byAxle.Count());
            log += changed == tyres ? Math.Log(_context.Errors.AxleChanged) : changed * _logChange;
        }
        return log;
    }

    private bool Unrecorded(int p, FittingCuts.Cut cut) => cut.Survey > 0 && (cut.Record is null || _notThatTyre.Contains((p, cut.Survey)));

    /// <summary>ln of the prior of what is said of a survey, the change of unit, and the readings if they are another vehicle's.</summary>
    private double Said(int s)
    {
        var e = _explanation[s];
        if (e.Kind == ExplanationKind.AsWritten) return 0;
        if (_surveys[s].Survey.Confirmed) return -1e9; // Someone has said what it means.
        int axles = 0, figures = 0;
        double log = 0;
        for (var p = 0; p < _positions.Length; p++)
        {
            if (_written[Slot(s, p)] is not { } shape) continue;
            axles |= 1 << _positions[p].Axle;
            figures += 1 + (shape.EdgeMm is null ? 0 : 1) + (shape.ShoulderMm is null ? 0 : 1);
            if (e.Kind == ExplanationKind.OtherVehicle) log += Lonely(s, p);
        }
        log += figures * Math.Log(e.Factor);
        var prior = Set(axles).LogPrior(e, _surveys[s].Survey.ResolutionMm);
        if (!e.CanBeDoneToTyres || !(Reaches(s, 1) || Reaches(s, -1))) return log + prior;
        // Walk after walk, up to the last or from the first on, the same exchange was one done to the tyres, and is said once.
        if (s > 0 && _explanation[s - 1] == e) return log;
        return log + (s + 1 < _surveys.Count && _explanation[s + 1] == e ? MovedLogPrior(e) : Math.Max(prior, MovedLogPrior(e)));
    }

    /// <summary>A workshop exchanges the wheels of one axle, or two axles; all wheels across at once it hardly does.</summary>
    private double MovedLogPrior(Explanation e) => Math.Log(_context.Errors.TyresMoved / (e.Kind == ExplanationKind.SidesSwapped ? 30 : 3));

    private bool Reaches(int s, int step)
    {
        var e = _explanation[s];
        for (; s >= 0 && s < _surveys.Count; s += step)
            if (_explanation[s] != e) return false;
        return true;
    }

    /// <summary>ln density of a tyre's reading for which its history says nothing.</summary>
    private double Lonely(int s, int p)
    {
        var shape = Shape(s, p) ?? _written[Slot(s, p)];
        if (shape is null) return 0;
        var point = new FittingPoint { Survey = s, Km = _km[s].Value, Mean = shape.MeanDepthMm, Edge = shape.EdgeMm, Shoulder = shape.ShoulderMm };
        return new FittingEvidence([point], Prior(p, _cuts.Of(p, s)), Square(WanderSdMm), Square(_context.TechnicianSdMm)).Of(0, 1);
    }

    /// <summary>All tyres of an axle changed at a survey, where that explains their readings better.</summary>
    private void AxleChanged(int s, ref (double Gain, Action? Apply) best)
    {
        if (s == 0) return;
        foreach (var axle in _positions.Select(p => p.Axle).Distinct())
        {
            var gain = Math.Log(_context.Errors.AxleChanged);
            var (read, ahead) = (0, false);
            for (var p = 0; p < _positions.Length; p++)
            {
                if (_positions[p].Axle != axle) continue;
                var evidence = _evidence[p][_cuts.Of(p, s)];
                var k = _place[Slot(s, p)];
                if (k < 0) continue;
                if (k == 0) { ahead = true; break; }
                read++;
                gain += evidence.Of(0, k) + evidence.OfChanged(k, evidence.Points.Count, NewAt(s, p)) - evidence.Of(0, evidence.Points.Count);
            }
            if (!ahead && read > 0 && gain > best.Gain) best = (gain, () => ChangeAxle(axle, s, gain));
        }
    }

    private void ChangeAxle(int axle, int s, double gain)
    {
        for (var p = 0; p < _positions.Length; p++)
            if (_positions[p].Axle == axle && !_inferredCuts.Any(c => c.Position == _positions[p] && c.Survey == s)) Changed(p, s, gain)();
    }

    /// <summary>From the better start: take back what was inferred, say it otherwise, put several things together, as long as the joint probability rises.</summary>
    private void Refine()
    {
        var joint = Joint();
        for (var step = 0; step < MostSteps; step++)
        {
            var here = Save();
            (double Joint, State? State) best = (joint + 0.5, null);
            foreach (var proposal in Proposals())
            {
                proposal();
                Restate();
                var value = Joint();
                if (value > best.Joint) best = (value, Save());
                Restore(here);
            }
            if (best.State is null) return;
            Restore(best.State);
            joint = best.Joint;
            if (Climb(_positions.Length, Tyre))
            {
                var after = Joint();
                if (after > joint) joint = after;
                else Restore(best.State);
            }
        }
    }

    private List<Action> Proposals()
    {
        List<Action> list = [];
        var runs = new HashSet<Explanation>();
        for (var s = 0; s < _surveys.Count; s++)
        {
            foreach (var e in Likeliest(s, false)) Say(s, e, false);
            foreach (var e in Likeliest(s, true)) Say(s, e, true);
        }
        // The same exchange from a survey on, or up to it.
        foreach (var e in runs)
        {
            for (var k = 1; k < _surveys.Count; k++)
            {
                var at = k;
                list.Add(() => Exchange(e, at, _surveys.Count - 1, at));
                list.Add(() => Exchange(e, 0, at - 1, at));
            }
        }
        foreach (var (axle, s) in _inferredCuts.Select(c => (c.Position.Axle, c.Survey)).Distinct()) list.Add(() => Drop(s, p => _positions[p].Axle == axle));
        foreach (var (position, s, _) in _inferredCuts.ToArray()) list.Add(() => Drop(s, p => _positions[p] == position));
        foreach (var key in _misread.Keys.ToArray()) list.Add(() => _misread.Remove(key));
        for (var s = 1; s < _surveys.Count; s++)
        {
            foreach (var axle in _positions.Select(p => p.Axle).Distinct())
            {
                var at = s;
                list.Add(() => ChangeAxle(axle, at, 2));
            }
        }
        return list;

        void Say(int s, Explanation e, bool alone)
        {
            if (e.CanBeDoneToTyres) runs.Add(e);
            if (alone) list.Add(() => { Clear(s); _explanation[s] = e; });
            else if (e != _explanation[s]) list.Add(() => _explanation[s] = e);
        }
    }

    private void Exchange(Explanation e, int first, int last, int since)
    {
        Drop(since, p => e.Belongs(_positions[p]) != _positions[p]);
        for (var s = 0; s < _surveys.Count; s++)
            if (s >= first && s <= last) _explanation[s] = e;
            else if (_explanation[s] == e) _explanation[s] = Explanation.AsWritten;
    }

    /// <summary>Nothing inferred at a survey, nor at the next, which a single odd survey makes look changed back.</summary>
    private void Clear(int s)
    {
        Drop(s, _ => true);
        Drop(s + 1, _ => true);
        for (var p = 0; p < _positions.Length; p++) _misread.Remove((s, p));
    }

    private void Drop(int s, Func<int, bool> where)
    {
        for (var p = 0; p < _positions.Length; p++)
        {
            if (!where(p)) continue;
            if (_inferredCuts.RemoveAll(c => c.Survey == s && c.Position == _positions[p]) == 0) continue;
            if (!_notThatTyre.Remove((p, s))) _cuts.Drop(p, s);
        }
    }

    /// <summary>The likeliest explanations of a survey, with or without what was inferred at it.</summary>
    private Explanation[] Likeliest(int s, bool alone)
    {
        State? here = null;
        if (alone)
        {
            if (!_inferredCuts.Any(c => c.Survey == s || c.Survey == s + 1) && !_misread.Keys.Any(k => k.Survey == s)) return [];
            here = Save();
            Clear(s);
            Restate();
        }
        Weigh(s);
        Explanation[] list = [Explanation.AsWritten, .. _weighed[s].Where(w => w.Explanation.Kind is not (ExplanationKind.ComparedSurveyWrong or ExplanationKind.AsWritten)).Take(Tried).Select(w => w.Explanation)];
        if (here is not null) Restore(here);
        return list;
    }
}
