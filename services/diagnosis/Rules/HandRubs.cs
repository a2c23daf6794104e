using System.Globalization;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>
/// What each technician's hand is worth: error rates from tyres that several of them rubbed within a few months, and with them how much
/// step of the rib edges the rubs of a tyre speak for. Takes the place of one error for all hands.
/// </summary>
public static class HandRubs
{
    /// <summary>Edges stay as they are about that long, days (from memory: fins follow the slip within some 3000 km).</summary>
    private const int WindowDays = 90;

    /// <summary>Tyres rubbed more than once below which no hand is told from another.</summary>
    private const int LeastShared = 30;

    /// <summary>A technician starts from what all hands do, as from this many rubs (from memory).</summary>
    private const double PooledReadings = 20;

    /// <summary>Spread of the step behind one and the same answer, mm (from memory).</summary>
    private const double StepSpreadMm = 0.15;

    /// <summary>Error rates of the fleet's technicians; null where too few tyres were rubbed twice.</summary>
    public static ObserverAgreement? Fit(IEnumerable<VehicleTread> fleet)
    {
        var said = fleet.SelectMany(Observations).ToList();
        return said.GroupBy(o => o.Item).Count(g => g.Count() > 1) < LeastShared ? null : ObserverAgreement.Fit(said, 3, PooledReadings);
    }

    /// <summary>Tyres with the step that their rubs speak for; where the rubs counted for a tyre are not those of its surveys as written, they stay counts.</summary>
    public static IReadOnlyList<TyreFigures> Weighed(IReadOnlyList<TyreFigures> tyres, VehicleTread tread, ObserverAgreement? agreement)
    {
        if (agreement is null) return tyres;
        var surveys = tread.Surveys.ToDictionary(s => s.SurveyId, s => s.Survey);
        return [.. tyres.Select(t => t with { FeltMm = Felt(t, surveys, agreement) })];
    }

    private static Estimate? Felt(TyreFigures tyre, Dictionary<string, TreadSurvey> surveys, ObserverAgreement agreement)
    {
        var rubs = tyre.SurveyIds.Where(surveys.ContainsKey).Select(id => surveys[id])
            .SelectMany(s => s.Tyres.Where(r => r.Position == tyre.Position && r.HandRub != HandRub.NotTaken).Select(r => (Observer: s.Technician ?? "", Said: Category(r.HandRub)))).ToList();
        int Count(int category) => rubs.Count(r => r.Said == category);
        if (rubs.Count == 0 || (Count(0), Count(1), Count(2)) != (tyre.RubsCatchingOutward, tyre.RubsCatchingNeither, tyre.RubsCatchingInward)) return null;
        // Before the shares: how common feather is must not count once for every rub.
        var p = agreement.Of(rubs, flat: true);
        var mean = (p[0] - p[2]) * RuleLimits.FeltStep.Value;
        var variance = (p[0] + p[2]) * RuleLimits.FeltStep.Value * RuleLimits.FeltStep.Value - mean * mean;
        return new(mean, Math.Sqrt(variance + StepSpreadMm * StepSpreadMm / rubs.Count));
    }

    private static IEnumerable<Observation> Observations(VehicleTread tread)
    {
        var fitted = tread.Fittings.GroupBy(f => f.Position).ToDictionary(g => g.Key, g => g.Select(f => f.At).Order().ToList());
        foreach (var stored in tread.Surveys)
            foreach (var tyre in stored.Survey.Tyres.Where(t => t.HandRub != HandRub.NotTaken))
            {
                var before = fitted.GetValueOrDefault(tyre.Position)?.Count(at => at <= stored.Survey.At) ?? 0;
                var window = stored.Survey.At.UtcTicks / TimeSpan.TicksPerDay / WindowDays;
                yield return new(string.Create(CultureInfo.InvariantCulture, $"{tread.Vehicle.VehicleId}|{tyre.Position}|{before}|{window}"), stored.Survey.Technician ?? "", Category(tyre.HandRub));
            }
    }

    private static int Category(HandRub rub) => rub switch { HandRub.CatchesOutward => 0, HandRub.Neither => 1, _ => 2 };
}
