using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Points of the fittings as the present reading has them: where each began, what a tyre put on since would show, what is believed before any reading.</summary>
internal sealed partial class HistoryReader
{
    /// <summary>Spread of any depth a tyre can have, mm, about the middle of its life.</summary>
    private const double AnyDepthSdMm = 5;

    /// <summary>Spread of the depth of a new tyre about the one recorded last for its axle, and about the usual one of its kind, mm; from memory.</summary>
    private const double KnownNewSdMm = 0.5, UsualNewSdMm = 2;

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
}
