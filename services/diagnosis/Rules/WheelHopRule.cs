using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Rules;

/// <summary>The signals shake where wheels hop and where an unbalanced wheel turns: balance, damper or bearing; no angle is named.</summary>
public static class WheelHopRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        // Where a tyre shows it as well, the cupping finding speaks and takes this as evidence.
        if (EvidenceOf(figures) is not { } evidence || CuppingRule.Find(figures).Any()) yield break;
        var hop = figures.Study!.WheelHop!;
        yield return new Finding
        {
            Kind = FindingKind.WheelHop,
            Sentence = $"{evidence.Statement}, as with a worn damper or a wheel out of balance.",
            EvidenceFor = [evidence, .. Witnesses.Reports(figures, Symptom.Shakes, "shakes")],
            Confounders =
            [
                new("A rough road shakes every vehicle", "Vehicles on the same roads"),
                new("A sensor with much noise of its own", "The same band while standing"),
            ],
            Causes = [Quantity.Damper],
            FirstCheck = FirstCheck.For(CheckFor.WheelHop),
            AlignmentMends = false,
            Strength = Math.Min(RuleLimits.StrengthCap, RuleLimits.AloneErrors.Value * hop.Rms / Limit(hop).Value),
        };
    }

    /// <summary>The signal's statement where it stands; null otherwise.</summary>
    internal static Evidence? EvidenceOf(VehicleFigures figures)
    {
        if (figures.Study?.WheelHop is not { } hop || hop.Seconds < RuleLimits.HopSeconds.Value) return null;
        if (!(hop.Share >= RuleLimits.HopShare.Value) || !(hop.Rms >= Limit(hop).Value)) return null;
        var (what, unit) = hop.Channel == SteeringChannel.DriverTorque ? ("steering torque", "N·m") : ("lateral acceleration", "m/s²");
        return new($"The {what} shakes by {TradeWords.Number(hop.Rms, 2)} {unit} between 8 and 16 Hz, {TradeWords.Number(100 * hop.Share, 0)} % of its faster movement", Witnesses.Signals(figures));
    }

    private static RuleLimit Limit(WheelHop hop) => hop.Channel == SteeringChannel.DriverTorque ? RuleLimits.HopTorque : RuleLimits.HopAcceleration;
}
