using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Geometry;

namespace WearWatch.Diagnosis.Causes;

/// <summary>What one story at one magnitude costs on the road.</summary>
/// <param name="Probability">Posterior probability of this story at about this magnitude.</param>
/// <param name="ExtraWear">Wear beyond normal as share of it (multiplier less 1; negative where the fault relieves a wheel), by position; median over the service slip.</param>
/// <param name="ExtraWearLogSd">Spread of the logarithm of every ExtraWear, common to all tyres.</param>
/// <param name="DragN">Extra rolling drag, N.</param>
public sealed record StoryEffect(double Probability, IReadOnlyDictionary<Position, double> ExtraWear, double ExtraWearLogSd, double DragN)
{
    /// <summary>Extra wear of camber alone: the loaded shoulder goes first, a share of the mean rate per degree (from memory).</summary>
    private const double CamberWearPerDeg = 0.08;

    internal static StoryEffect Of(VehicleModel model, Story story, double magnitude, double probability, (double Mean, double Sd) logSlipScale)
    {
        var wear = new Dictionary<Position, double>();
        double drag = 0;
        for (var i = 0; i < model.Positions.Count; i++)
        {
            double slip = 0, camber = 0;
            foreach (var (state, weight) in story.Moves)
            {
                slip += model.Slip[i, state] * magnitude * weight;
                camber += model.Camber[i, state] * magnitude * weight;
            }
            drag += ToeDrag.TyreN(model.Class.TyreStiffnessNPerRad, slip * Sensitivities.ServiceSlipDeg);
            var z = slip * Math.Exp(logSlipScale.Mean);
            // Against normal wear, which has the slip on the crown inside; a wheel that the fault relieves wears less.
            var crown = model.CrownSlip * (model.Positions[i].Side == Side.Right ? 1 : -1);
            var extra = (z * z + 2 * z * crown) / (1 + crown * crown) + CamberWearPerDeg * Math.Abs(camber);
            if (extra != 0) wear[model.Positions[i]] = extra;
        }
        return new StoryEffect(probability, wear, 2 * logSlipScale.Sd, drag);
    }
}
