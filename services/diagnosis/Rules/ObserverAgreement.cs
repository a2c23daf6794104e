namespace WearWatch.Diagnosis.Rules;

/// <summary>What one observer said of one item, as a category counted from 0.</summary>
public readonly record struct Observation(string Item, string Observer, int Said);

/// <summary>How often each observer says each category of each truth, learnt from what several say of the same items without a truth known.</summary>
/// <remarks>A. P. Dawid and A. M. Skene, Applied Statistics 28 (1979) 20: expectation-maximisation from the shares of votes.</remarks>
public sealed record ObserverAgreement
{
    /// <summary>Share of items of each category.</summary>
    public required double[] Shares { get; init; }
    /// <summary>By observer: probability of saying the second index where the first is the truth.</summary>
    public required IReadOnlyDictionary<string, double[][]> Errors { get; init; }
    /// <summary>The same over all observers, for those not seen.</summary>
    public required double[][] Pooled { get; init; }
    /// <summary>Natural log, without the multinomial constants.</summary>
    public required double LogLikelihood { get; init; }
    public required int Items { get; init; }

    private const int MostRounds = 500;

    /// <summary>What was never seen is not thereby impossible, but counts as nothing beside the rest.</summary>
    private const double LeastRate = 1e-100;

    /// <param name="observations">In any order.</param>
    /// <param name="categories">2 or more.</param>
    /// <param name="pooledReadings">Readings' worth of the pooled error rates that each observer starts from: 0 for the published method, more where few are seen of each.</param>
    public static ObserverAgreement? Fit(IReadOnlyCollection<Observation> observations, int categories, double pooledReadings = 0)
    {
        var items = observations.GroupBy(o => o.Item).OrderBy(g => g.Key, StringComparer.Ordinal)
            .Select(g => g.GroupBy(o => (o.Observer, o.Said)).OrderBy(x => x.Key.Observer, StringComparer.Ordinal).ThenBy(x => x.Key.Said).Select(x => (x.Key.Observer, x.Key.Said, Count: x.Count())).ToArray()).ToArray();
        if (items.Length == 0) return null;
        var truth = Array.ConvertAll(items, item => Enumerable.Range(0, categories).Select(c => item.Where(x => x.Said == c).Sum(x => x.Count) / (double)item.Sum(x => x.Count)).ToArray());
        ObserverAgreement? fit = null;
        for (var round = 0; round < MostRounds; round++)
        {
            var next = Maximise(items, truth, categories, pooledReadings);
            var logLikelihood = 0.0;
            for (var i = 0; i < items.Length; i++)
            {
                truth[i] = Posterior(next, items[i], out var log);
                logLikelihood += log;
            }
            var gain = fit is null ? double.PositiveInfinity : logLikelihood - fit.LogLikelihood;
            fit = next with { LogLikelihood = logLikelihood };
            if (Math.Abs(gain) < 1e-9) break;
        }
        return fit;
    }

    /// <summary>Probability of each truth given what was said, before the shares of the truths are taken into account where <paramref name="flat"/>.</summary>
    public double[] Of(IEnumerable<(string Observer, int Said)> said, bool flat = false) =>
        Posterior(flat ? this with { Shares = [.. Shares.Select(_ => 1.0 / Shares.Length)] } : this, [.. said.Select(s => (s.Observer, s.Said, 1))], out _);

    private static ObserverAgreement Maximise((string Observer, int Said, int Count)[][] items, double[][] truth, int categories, double pooledReadings)
    {
        double[][] Zero() => [.. Enumerable.Range(0, categories).Select(_ => new double[categories])];
        var (shares, pooled, counts) = (new double[categories], Zero(), new SortedDictionary<string, double[][]>(StringComparer.Ordinal));
        for (var i = 0; i < items.Length; i++)
            for (var c = 0; c < categories; c++)
            {
                shares[c] += truth[i][c] / items.Length;
                foreach (var (observer, said, count) in items[i])
                {
                    if (!counts.TryGetValue(observer, out var own)) counts[observer] = own = Zero();
                    own[c][said] += truth[i][c] * count;
                    pooled[c][said] += truth[i][c] * count;
                }
            }
        var rates = Array.ConvertAll(pooled, row => Normal(row, null, 0));
        return new ObserverAgreement
        {
            Shares = shares,
            Pooled = rates,
            Errors = counts.ToDictionary(o => o.Key, o => o.Value.Select((row, c) => Normal(row, rates[c], pooledReadings)).ToArray()),
            LogLikelihood = double.NegativeInfinity,
            Items = items.Length,
        };
    }

    private static double[] Normal(double[] row, double[]? toward, double readings)
    {
        var filled = row.Select((n, l) => n + (toward is null ? 0 : readings * toward[l])).ToArray();
        var sum = filled.Sum();
        return sum > 0 ? [.. filled.Select(n => n / sum)] : toward ?? [.. row.Select(_ => 1.0 / row.Length)];
    }

    private static double[] Posterior(ObserverAgreement fit, (string Observer, int Said, int Count)[] item, out double logLikelihood)
    {
        var log = new double[fit.Shares.Length];
        for (var c = 0; c < log.Length; c++)
        {
            log[c] = Math.Log(Math.Max(fit.Shares[c], LeastRate));
            foreach (var (observer, said, count) in item) log[c] += count * Math.Log(Math.Max(fit.Errors.GetValueOrDefault(observer, fit.Pooled)[c][said], LeastRate));
        }
        var most = log.Max();
        var sum = log.Sum(l => Math.Exp(l - most));
        logLikelihood = most + Math.Log(sum);
        return [.. log.Select(l => Math.Exp(l - most) / sum)];
    }
}
