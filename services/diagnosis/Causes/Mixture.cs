namespace WearWatch.Diagnosis.Causes;

/// <summary>Posterior shares over pairs of (an angle out, or none) and (a look-alike, or none).</summary>
public sealed class Mixture
{
    /// <summary>Share kept for what no story foresees, where the prior alone speaks: no verdict is ever certain (from memory).</summary>
    private const double Unforeseen = 0.02;

    private readonly double[,] _prior; // logarithm
    private readonly double[,] _log; // prior and likelihood of (angle, look-alike); last row: none, last column: none
    private readonly StoryFit?[,] _pairs;
    private readonly double _inOrder;
    private double[,]? _shares;

    /// <param name="angles">Angle stories weighed alone.</param>
    /// <param name="looks">Look-alikes weighed alone.</param>
    /// <param name="inOrder">Log likelihood with neither.</param>
    /// <param name="misalignedShare">Prior share of the angle stories together.</param>
    public Mixture(IReadOnlyList<StoryFit> angles, IReadOnlyList<StoryFit> looks, double inOrder, double misalignedShare)
    {
        (Angles, Looks, _inOrder) = (angles, looks, inOrder);
        var (rows, columns) = (angles.Count + 1, looks.Count + 1);
        (_prior, _log, _pairs) = (new double[rows, columns], new double[rows, columns], new StoryFit?[rows, columns]);
        var noLook = Math.Log(1 - Math.Min(0.9, looks.Sum(l => l.Story.Share)));
        for (var a = 0; a < rows; a++)
            for (var l = 0; l < columns; l++)
            {
                var prior = Math.Log(a < angles.Count ? angles[a].Story.Share : 1 - misalignedShare) + (l < looks.Count ? Math.Log(looks[l].Story.Share) : noLook);
                _prior[a, l] = prior;
                _log[a, l] = prior + (a < angles.Count, l < looks.Count) switch
                {
                    (true, true) => Bound(angles[a].Evidence, looks[l].Evidence, inOrder),
                    (true, false) => angles[a].Evidence,
                    (false, true) => looks[l].Evidence,
                    _ => inOrder,
                };
            }
    }

    public IReadOnlyList<StoryFit> Angles { get; }
    public IReadOnlyList<StoryFit> Looks { get; }

    public double Misaligned => Enumerable.Range(0, Angles.Count).Sum(AngleShare);

    /// <summary>Independent evidence multiplies; evidence that both explain counts once.</summary>
    private static double Bound(double angle, double look, double inOrder) => Math.Min(angle + look - inOrder, Math.Max(angle, look));

    /// <summary>Replaces the bound of one pair by its own weighing.</summary>
    public void Refine(int angle, int look, StoryFit pair)
    {
        _log[angle, look] += pair.Evidence - Bound(Angles[angle].Evidence, Looks[look].Evidence, _inOrder);
        (_pairs[angle, look], _shares) = (pair, null);
    }

    public double AngleShare(int angle) => Enumerable.Range(0, Looks.Count + 1).Sum(l => Shares()[angle, l]);

    /// <summary>Posterior share of an angle and a look-alike together.</summary>
    public double PairShare(int angle, int look) => Shares()[angle, look];

    public double LookShare(int look) => Enumerable.Range(0, Angles.Count + 1).Sum(a => Shares()[a, look]);

    /// <summary>Posterior share of each cell of an angle story, given that it is out.</summary>
    public double[] AngleCells(int angle)
    {
        var cells = new double[Angles[angle].Story.Cells.Count];
        var total = AngleShare(angle);
        for (var l = 0; l <= Looks.Count; l++)
        {
            var weight = total > 0 ? Shares()[angle, l] / total : 1.0 / (Looks.Count + 1);
            var shares = (_pairs[angle, l] ?? Angles[angle]).CellShares();
            for (var i = 0; i < cells.Length; i++) cells[i] += weight * shares[i];
        }
        return cells;
    }

    /// <summary>Posterior share of each onset of an angle story, given that it is out.</summary>
    public double[] AngleOnsets(int angle)
    {
        var onsets = new double[Angles[angle].ByOnset.Length];
        var total = AngleShare(angle);
        for (var l = 0; l <= Looks.Count; l++)
        {
            var logs = (_pairs[angle, l] ?? Angles[angle]).ByOnset;
            var all = StoryFit.LogSum(logs);
            for (var o = 0; o < onsets.Length; o++) onsets[o] += Shares()[angle, l] / total * Math.Exp(logs[o] - all);
        }
        return onsets;
    }

    private double[,] Shares()
    {
        if (_shares is not null) return _shares;
        var (total, before) = (StoryFit.LogSum([.. _log.Cast<double>()]), StoryFit.LogSum([.. _prior.Cast<double>()]));
        _shares = new double[_log.GetLength(0), _log.GetLength(1)];
        for (var a = 0; a < _log.GetLength(0); a++)
            for (var l = 0; l < _log.GetLength(1); l++)
                _shares[a, l] = (1 - Unforeseen) * Math.Exp(_log[a, l] - total) + Unforeseen * Math.Exp(_prior[a, l] - before);
        return _shares;
    }
}
