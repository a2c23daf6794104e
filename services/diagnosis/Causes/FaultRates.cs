using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Causes;

/// <summary>
/// How common faults are in this fleet: share of vehicles out of alignment by class, and of each angle among the faults. What few
/// vehicles say stays near the prior. Plain numbers, to be kept in a fleet snapshot.
/// </summary>
/// <remarks>
/// Mixing shares by expectation and maximisation (Dempster, Laird and Rubin, J. R. Statist. Soc. B 39 (1977) 1), with Beta and Dirichlet
/// priors: of each vehicle it needs only how much likelier its figures are under each angle than in order, which its verdict
/// holds once the prior is divided out.
/// </remarks>
public sealed record FaultRates
{
    /// <summary>Weight of the prior: the fleet's share, in vehicles; a class's about the fleet's, in vehicles; the angles', in faults (from memory).</summary>
    private const double FleetWeight = 40, ClassWeight = 20, AngleWeight = 15;

    private const int Rounds = 200;
    private const double Settled = 1e-7;

    /// <summary>Share of vehicles with an angle beyond tolerance.</summary>
    public required IReadOnlyDictionary<VehicleClass, double> MisalignedShare { get; init; }
    /// <summary>Relative frequency of each angle among faults, over the classes that have it, in the scale of <see cref="FaultPriors.AngleWeights"/>.</summary>
    public required IReadOnlyDictionary<Quantity, double> AngleWeights { get; init; }
    /// <summary>Vehicles that tell.</summary>
    public required int Vehicles { get; init; }

    public static FaultRates None { get; } = new() { MisalignedShare = new Dictionary<VehicleClass, double>(), AngleWeights = FaultPriors.Default.AngleWeights, Vehicles = 0 };

    /// <summary>Priors of a class in this fleet.</summary>
    public FaultPriors Of(VehicleClass kind) => FaultPriors.Default with
    {
        MisalignedShare = MisalignedShare.GetValueOrDefault(kind, FaultPriors.Default.MisalignedShare),
        AngleWeights = AngleWeights,
    };

    /// <summary>Shares from verdicts that were worked out under the default priors; their order does not matter.</summary>
    public static FaultRates Fit(IReadOnlyList<(VehicleClass Class, Verdict Verdict)> fleet)
    {
        if (fleet.Count == 0) return None;
        var prior = FaultPriors.Default;
        Quantity[] angles = [.. prior.AngleWeights.Keys.Order()];
        VehicleClass[] classes = [.. fleet.Select(f => f.Class).Distinct().Order()];
        Row[] rows = [.. fleet.Select(f => new Row(Array.IndexOf(classes, f.Class), Ratios(f.Verdict, angles, prior))).OrderBy(r => r.Class).ThenBy(r => r.Ratio.Sum())];
        double[] usual = [.. angles.Select(q => prior.AngleWeights[q])], weights = [.. usual];
        var (shares, counts) = (Enumerable.Repeat(prior.MisalignedShare, classes.Length).ToArray(), classes.Select((_, c) => rows.Count(r => r.Class == c)).ToArray());
        for (var round = 0; round < Rounds; round++)
        {
            // Posterior faults by class and by angle, and how many of each angle the priors' own proportions would have given.
            var (found, among, expected) = (new double[classes.Length], new double[angles.Length], new double[angles.Length]);
            foreach (var row in rows) row.Share(shares[row.Class], weights, usual, found, among, expected);
            var whole = (FleetWeight * prior.MisalignedShare + found.Sum()) / (FleetWeight + rows.Length);
            var moved = 0.0;
            for (var c = 0; c < shares.Length; c++) moved = Math.Max(moved, Math.Abs(shares[c] - (shares[c] = (ClassWeight * whole + found[c]) / (ClassWeight + counts[c]))));
            for (var q = 0; q < weights.Length; q++)
            {
                var had = AngleWeight * usual[q] / usual.Sum();
                moved = Math.Max(moved, Math.Abs(weights[q] - (weights[q] = usual[q] * (had + among[q]) / (had + expected[q]))));
            }
            if (moved < Settled) break;
        }
        return new FaultRates
        {
            MisalignedShare = classes.Select((c, i) => (c, i)).ToDictionary(x => x.c, x => shares[x.i]),
            AngleWeights = angles.Select((q, i) => (q, i)).ToDictionary(x => x.q, x => weights[x.i]),
            Vehicles = rows.Length,
        };
    }

    /// <summary>Likelihood of each angle over that in order; 0 for an angle that the vehicle does not have.</summary>
    private static double[] Ratios(Verdict verdict, Quantity[] angles, FaultPriors prior)
    {
        var stated = verdict.Causes.Where(c => prior.AngleWeights.ContainsKey(c.Quantity)).GroupBy(c => c.Quantity).ToDictionary(g => g.Key, g => g.Sum(c => c.Probability));
        var total = stated.Keys.Sum(q => prior.AngleWeights[q]);
        var inOrder = Math.Max(1e-9, 1 - verdict.MisalignedProbability) / (1 - prior.MisalignedShare);
        return [.. angles.Select(q => stated.TryGetValue(q, out var p) ? Math.Max(1e-12, p / (prior.MisalignedShare * prior.AngleWeights[q] / total) / inOrder) : 0)];
    }

    private sealed record Row(int Class, double[] Ratio)
    {
        /// <summary>Adds the vehicle's posterior shares.</summary>
        public void Share(double misaligned, double[] weights, double[] usual, double[] byClass, double[] byAngle, double[] expected)
        {
            double total = 0, usually = 0, faulty = 0;
            for (var q = 0; q < Ratio.Length; q++)
            {
                if (Ratio[q] == 0) continue;
                (total, usually, faulty) = (total + weights[q], usually + usual[q], faulty + weights[q] * Ratio[q]);
            }
            if (total <= 0) return;
            faulty *= misaligned / total;
            var share = faulty / (1 - misaligned + faulty);
            byClass[Class] += share;
            for (var q = 0; q < Ratio.Length; q++)
            {
                if (Ratio[q] == 0) continue;
                byAngle[q] += misaligned / total * weights[q] * Ratio[q] / (1 - misaligned + faulty);
                expected[q] += share * usual[q] / usually;
            }
        }
    }
}
