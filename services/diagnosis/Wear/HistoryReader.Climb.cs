using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Which reading of the surveys and tyres is taken: the climb, what makes one survey or one tyre ask for a change, and what is acted on.</summary>
internal sealed partial class HistoryReader
{
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
        if (axles == 0 || behind == 0 || _surveys[s].Survey.Confirmed) return;
        var set = Set(axles);
        // The fleet's fit takes what is plain at its word; one vehicle's answer states the weights.
        if (!_context.Thorough && _explanation[s].Kind == ExplanationKind.AsWritten && PlainSurvey.Fits(set, _seen, _expected, _context.TechnicianSdMm, _surveys[s].Survey.ResolutionMm)) return;
        _weighed[s] = SurveyExplanation.Weigh(set, _seen, _expected, _context.TechnicianSdMm, _surveys[s].Survey.ResolutionMm);
    }

    private ExplanationSet Set(int axles)
    {
        if (!_sets.TryGetValue(axles, out var set))
            _sets[axles] = set = ExplanationSet.Of(_tread.Vehicle, _positions, [.. Enumerable.Range(1, Position.MaxAxle).Where(a => (axles & (1 << a)) != 0)], _context.Errors);
        return set;
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
                var gain = evidence.Of(0, k) + evidence.OfChanged(k, n, NewAt(points[k].Survey, p)) - whole + _logChange;
                if (gain > best.Gain) best = (gain, Changed(p, points[k].Survey, gain));
            }
            // The last survey cannot be told from a change: it waits for the next.
            for (var k = evidence.Started ? 1 : 0; n > 2 && k < n - 1; k++)
            {
                var gain = evidence.Without(k) + evidence.Of(k, k + 1) - whole + _logMisread;
                if (gain > best.Gain && !_surveys[points[k].Survey].Survey.Confirmed) best = (gain, Misread(p, points[k].Survey, gain));
            }
        }
    }

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
}
