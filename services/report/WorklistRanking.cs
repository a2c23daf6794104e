using MathNet.Numerics.Distributions;
using WearWatch.Contracts.V1;
using WearWatch.Diagnosis.Statistics;
using Range = WearWatch.Contracts.V1.Range;

namespace WearWatch.Report;

/// <summary>Ranks diagnoses into Monday's list (expected net benefit) and finds where one more survey is worth most.</summary>
internal static class WorklistRanking
{
    /// <summary>Holding torque that drivers complain of, N·m at the wheel; from memory. An operator's setting replaces it.</summary>
    public const double DefaultHoldingTorqueBoundNm = 0.8;

    /// <summary>Below this probability of misalignment a vehicle is not listed as "not yet", it is simply sound.</summary>
    private const double ListedFrom = 0.2;

    public static List<WorklistRow> Rank(IEnumerable<Contracts.V1.Diagnosis> diagnoses, Func<string, double> holdingTorqueBoundNm, WorklistSort sort)
    {
        var rows = diagnoses.Select(d => (Diagnosis: d, Because: Listed(d, holdingTorqueBoundNm(d.Depot)))).Select(r => Row(r.Diagnosis, r.Because)).ToList();
        Comparison<WorklistRow> order = sort switch
        {
            WorklistSort.Probability => (a, b) => b.MisalignedProbability.CompareTo(a.MisalignedProbability),
            WorklistSort.CostOfWaiting => (a, b) => Value(b.CostOfWaitingPerWeek).CompareTo(Value(a.CostOfWaitingPerWeek)),
            WorklistSort.Vehicle => (a, b) => string.CompareOrdinal(a.VehicleId, b.VehicleId),
            WorklistSort.NetBenefit => (a, b) => Value(b.NetBenefit).CompareTo(Value(a.NetBenefit)),
            _ => (a, b) => (Group(a), -Worth(a)).CompareTo((Group(b), -Worth(b))),
        };
        rows.Sort((a, b) => order(a, b) is var first and not 0 ? first : string.CompareOrdinal(a.VehicleId, b.VehicleId));
        for (var i = 0; i < rows.Count; i++) rows[i].Rank = i + 1;
        return rows;
    }

    /// <summary>
    /// What pays stands by its net benefit. Among what does not pay yet net benefit would only sort by the price of the
    /// job, so the probability of misalignment does.
    /// </summary>
    private static double Worth(WorklistRow row) => row.ListedBecause == ListedBecause.NotYet ? row.MisalignedProbability : Value(row.NetBenefit);

    private static int Group(WorklistRow row) => row.ListedBecause == ListedBecause.NotYet ? 1 : 0;

    private static double Value(Range? range) => range?.Value ?? double.NegativeInfinity;

    private static ListedBecause Listed(Contracts.V1.Diagnosis d, double boundNm)
    {
        if (d.NetBenefit is { Value: > 0 }) return ListedBecause.Pays;
        return d.SteeringPull is { } pull && ProbabilityBeyond(pull, boundNm) >= 0.5 && d.MisalignedProbability >= ListedFrom ? ListedBecause.Pull : ListedBecause.NotYet;
    }

    /// <summary>Probability that the size of a figure is beyond a bound, from its 90 % interval.</summary>
    private static double ProbabilityBeyond(Range figure, double bound)
    {
        var error = (figure.High - figure.Low) / (2 * Estimate.Z90);
        if (error <= 0) return Math.Abs(figure.Value) > bound ? 1 : 0;
        return 1 - Normal.CDF(figure.Value, error, bound) + Normal.CDF(figure.Value, error, -bound);
    }

    private static WorklistRow Row(Contracts.V1.Diagnosis d, ListedBecause because)
    {
        var row = new WorklistRow
        {
            VehicleId = d.VehicleId,
            Depot = d.Depot,
            AsOf = d.AsOf,
            VehicleClass = d.VehicleClass,
            MisalignedProbability = d.MisalignedProbability,
            CostOfWaitingPerWeek = d.CostOfWaitingPerWeek,
            NetBenefit = d.NetBenefit,
            ListedBecause = because,
            Why = WorklistReason.Why(d, because),
            FirstCheck = WorklistReason.FirstCheck(d),
        };
        row.Causes.Add(d.Causes);
        return row;
    }

    /// <summary>
    /// Where one more survey is worth most: expected value of sample information for the choice between aligning (worth
    /// X) and waiting (worth 0), X normal with the diagnosis's mean and error. One more survey on n takes the share
    /// 1 − (n/(n+1))³ of the variance (variance of a slope over evenly spaced readings falls with the cube of their
    /// number). H. Raiffa and R. Schlaifer, Applied Statistical Decision Theory, 1961 (from memory).
    /// </summary>
    public static List<GaugeFirstRow> GaugeFirst(IEnumerable<Contracts.V1.Diagnosis> diagnoses)
    {
        var rows = new List<(double Worth, GaugeFirstRow Row)>();
        foreach (var d in diagnoses.Where(d => d.NetBenefit is not null))
        {
            var mean = d.NetBenefit.Value;
            var error = (d.NetBenefit.High - d.NetBenefit.Low) / (2 * Estimate.Z90);
            if (error <= 0) continue;
            var surveys = d.Tyres.Select(t => t.SurveyIds.Count).DefaultIfEmpty(0).Max();
            var left = surveys == 0 ? 0 : Math.Pow(surveys / (surveys + 1.0), 3);
            var worth = ValueOfInformation(mean, error * Math.Sqrt(1 - left));
            var most = ValueOfInformation(mean, error);
            if (worth < 0.02 * d.JobPrice) continue;
            rows.Add((worth, new GaugeFirstRow
            {
                VehicleId = d.VehicleId,
                Depot = d.Depot,
                Why = FormattableString.Invariant($"Aligning nets {mean:0} {d.NetBenefit.Unit} but may be anything from {d.NetBenefit.Low:0} to {d.NetBenefit.High:0}; one more survey on the {surveys} there are is worth about {worth:0} {d.NetBenefit.Unit}."),
                Worth = new Range { Value = worth, Low = 0, High = most, Unit = d.NetBenefit.Unit },
            }));
        }
        return [.. rows.OrderByDescending(r => r.Worth).ThenBy(r => r.Row.VehicleId, StringComparer.Ordinal).Take(20).Select(r => r.Row)];
    }

    /// <summary>E[max(0, M)] − max(0, mean), M normal with the given mean and spread.</summary>
    internal static double ValueOfInformation(double mean, double spread)
    {
        if (spread <= 0) return 0;
        var z = mean / spread;
        return spread * Normal.PDF(0, 1, z) + mean * Normal.CDF(0, 1, z) - Math.Max(0, mean);
    }
}
