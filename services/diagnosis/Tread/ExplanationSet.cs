using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Tread;

/// <summary>The explanations that a survey of certain axles can have, made once and used for every such survey of a vehicle, by one thread.</summary>
internal sealed class ExplanationSet
{
    /// <param name="Explanation">Which.</param>
    /// <param name="LogPrior">ln of its prior share.</param>
    /// <param name="Factor">From the depth as stored to the depth as meant.</param>
    /// <param name="LogFactor">Its logarithm.</param>
    /// <param name="Belongs">Index of the position that a reading written at each position belongs to.</param>
    /// <param name="Reversed">By position: grooves counted from the wrong shoulder.</param>
    public sealed record Candidate(Explanation Explanation, double LogPrior, double Factor, double LogFactor, int[] Belongs, bool[] Reversed)
    {
        /// <summary>ln of the prior share in a survey whose gauge has this step, mm.</summary>
        public double LogPriorAt(double resolutionMm) => Factor == 1 ? LogPrior : LogPrior + Math.Log(ExplanationPriors.StepFactor(Explanation.Kind, resolutionMm));
    }

    /// <summary>Half the χ² of each tyre as written, and of all edges beyond what is usual, of the survey being weighed.</summary>
    public double[] Misfit { get; private init; } = [];
    public double EdgeMisfit { get; set; }

    /// <summary>Whether a rarer exchange could explain more than its prior takes off.</summary>
    public bool WorthWeighing(Candidate candidate, double least) => candidate.Explanation.Kind switch
    {
        ExplanationKind.GroovesReversed => EdgeMisfit > least,
        ExplanationKind.PositionsExchanged => MisfitOfMoved(candidate.Belongs) > least,
        _ => true,
    };

    private double MisfitOfMoved(int[] belongs)
    {
        double sum = 0;
        for (var p = 0; p < belongs.Length; p++)
            if (belongs[p] != p) sum += Misfit[p];
        return sum;
    }

    /// <summary>ln of the prior share of an explanation in a survey of these axles.</summary>
    public double LogPrior(Explanation explanation, double resolutionMm)
    {
        foreach (var candidate in Candidates)
            if (candidate.Explanation == explanation) return candidate.LogPriorAt(resolutionMm);
        return double.NegativeInfinity;
    }

    public required Candidate[] Candidates { get; init; }
    /// <summary>Axle number of each position.</summary>
    public required int[] Axle { get; init; }
    /// <summary>Axles read, ascending.</summary>
    public required int[] Axles { get; init; }

    /// <summary>Room for the fits of each position's readings to each position's expectation; one survey at a time.</summary>
    public required PairFit[] Pairs { get; init; }

    /// <param name="vehicle">The vehicle.</param>
    /// <param name="positions">Its positions in order.</param>
    /// <param name="axles">Axles read, in any order.</param>
    /// <param name="rates">How often each thing goes wrong; from memory where no fleet states its own.</param>
    public static ExplanationSet Of(Vehicle vehicle, Position[] positions, IReadOnlyList<int> axles, ErrorRates? rates = null)
    {
        int[] read = [.. axles.Order()];
        return new ExplanationSet
        {
            Axle = [.. positions.Select(p => p.Axle)],
            Axles = read,
            Misfit = new double[positions.Length],
            Pairs = new PairFit[positions.Length * positions.Length],
            Candidates = [.. ExplanationPriors.Candidates(vehicle, read, rates ?? ErrorRates.FromMemory).Select(c => new Candidate(c.Explanation, Math.Log(c.Prior), c.Explanation.Factor, Math.Log(c.Explanation.Factor),
                [.. positions.Select(p => Array.IndexOf(positions, c.Explanation.Belongs(p)))], [.. positions.Select(c.Explanation.Reverses)]))],
        };
    }
}
