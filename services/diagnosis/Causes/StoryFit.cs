namespace WearWatch.Diagnosis.Causes;

/// <summary>A story weighed against everything: the log likelihood of each cell of its magnitude.</summary>
/// <param name="Story">What.</param>
/// <param name="LogLikelihood">Per cell.</param>
/// <param name="LogSlipScale">Posterior mean and SD of the slip scale's logarithm, per cell.</param>
/// <param name="ByOnset">Log likelihood of each onset with its prior share, the magnitude integrated out; in the order of <see cref="Wear.Onsets.DaysAgo"/>.</param>
public sealed record StoryFit(Story Story, double[] LogLikelihood, (double Mean, double Sd)[] LogSlipScale, double[] ByOnset)
{
    /// <summary>Log likelihood of the story with its magnitude integrated out.</summary>
    public double Evidence => LogSum(Story.Cells.Select((c, i) => Math.Log(c.Share) + LogLikelihood[i]));

    /// <summary>Posterior share of each cell, given the story.</summary>
    public double[] CellShares()
    {
        var evidence = Evidence;
        return [.. Story.Cells.Select((c, i) => Math.Exp(Math.Log(c.Share) + LogLikelihood[i] - evidence))];
    }

    /// <summary>ln Σ exp, safe against overflow.</summary>
    public static double LogSum(IEnumerable<double> logs)
    {
        var all = logs as IReadOnlyCollection<double> ?? [.. logs];
        var top = all.Count == 0 ? double.NegativeInfinity : all.Max();
        return double.IsNegativeInfinity(top) ? top : top + Math.Log(all.Sum(l => Math.Exp(l - top)));
    }
}
