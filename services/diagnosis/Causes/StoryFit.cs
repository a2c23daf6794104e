namespace WearWatch.Diagnosis.Causes;

/// <summary>A story weighed against everything: the log likelihood of each cell of its magnitude.</summary>
/// <param name="Story">What.</param>
/// <param name="LogLikelihood">Per cell.</param>
/// <param name="LogServiceSlip">Posterior mean and SD of the service slip's logarithm, per cell, in units of 1.</param>
public sealed record StoryFit(Story Story, double[] LogLikelihood, (double Mean, double Sd)[] LogServiceSlip)
{
    /// <summary>Log likelihood of the story with its magnitude integrated out.</summary>
    public double Evidence { get; } = LogSum(Story.Cells.Select((c, i) => Math.Log(c.Share) + LogLikelihood[i]));

    /// <summary>Posterior share of each cell, given the story.</summary>
    public double[] CellShares() => [.. Story.Cells.Select((c, i) => Math.Exp(Math.Log(c.Share) + LogLikelihood[i] - Evidence))];

    /// <summary>ln Σ exp, safe against overflow.</summary>
    public static double LogSum(IEnumerable<double> logs)
    {
        var all = logs as IReadOnlyCollection<double> ?? [.. logs];
        var top = all.Count == 0 ? double.NegativeInfinity : all.Max();
        return double.IsNegativeInfinity(top) ? top : top + Math.Log(all.Sum(l => Math.Exp(l - top)));
    }
}
