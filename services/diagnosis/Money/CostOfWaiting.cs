using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Geometry;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Money;

/// <summary>Money lost per week while a vehicle is not aligned: tyres worn before their time and drag paid as fuel or energy.</summary>
/// <param name="PerWeek">Posterior mean and 90 % interval; the probability of being out is already inside.</param>
/// <param name="TyresPerWeek">Mean share of it that is tyres.</param>
/// <param name="DragPerWeek">Mean share of it that is fuel or energy.</param>
/// <param name="Currency">ISO 4217.</param>
/// <param name="Assumed">What the operator did not give.</param>
public sealed record CostOfWaiting(Interval PerWeek, double TyresPerWeek, double DragPerWeek, string Currency, IReadOnlyList<string> Assumed)
{
    /// <summary>Spread of the normal wear rate and of the cornering stiffness, as logarithms (from memory).</summary>
    private const double RateLogSd = 0.20, StiffnessLogSd = 0.25;

    /// <summary>Five-point Gauss–Hermite rule for the standard normal law (Abramowitz &amp; Stegun 25.10, rescaled).</summary>
    private static readonly (double Node, double Weight)[] Hermite =
        [(-2.856970, 0.011257), (-1.355626, 0.222076), (0, 0.533333), (1.355626, 0.222076), (2.856970, 0.011257)];

    /// <summary>Cost of waiting of one vehicle.</summary>
    /// <param name="figures">For the normal rate, new depth and axles.</param>
    /// <param name="verdict">Stories with their effects.</param>
    /// <param name="inputs">Prices and use.</param>
    public static CostOfWaiting Of(VehicleFigures figures, Verdict verdict, MoneyInputs inputs)
    {
        var model = new VehicleModel(figures);
        var perUnit = model.Positions.ToDictionary(p => p, p => TyreCostPerWeek(model, inputs, p));
        var points = new List<(double Cost, double Weight)>();
        double tyres = 0, drag = 0;
        foreach (var effect in verdict.Effects)
        {
            var tyre = effect.ExtraWear.Sum(w => w.Value * perUnit[w.Key]);
            var fuel = DragCostPerWeek(effect.DragN, figures.Vehicle.Electric, inputs);
            var (tyreSd, fuelSd) = (Math.Sqrt(effect.ExtraWearLogSd * effect.ExtraWearLogSd + RateLogSd * RateLogSd), StiffnessLogSd);
            foreach (var (tn, tw) in Hermite)
                foreach (var (fn, fw) in Hermite)
                {
                    var (t, f, weight) = (tyre * Math.Exp(tyreSd * tn), fuel * Math.Exp(fuelSd * fn), effect.Probability * tw * fw);
                    points.Add((t + f, weight));
                    tyres += weight * t;
                    drag += weight * f;
                }
        }
        points.Add((0, Math.Max(0, 1 - points.Sum(p => p.Weight))));
        points.Sort();
        // A rare dear fault draws the mean beyond the quantiles; the interval reaches at least to the mean.
        var mean = tyres + drag;
        return new CostOfWaiting(new Interval(mean, Math.Min(mean, Quantile(points, 0.05)), Math.Max(mean, Quantile(points, 0.95))), tyres, drag, inputs.Currency, inputs.Assumed);
    }

    /// <summary>Money per week for each unit of extra wear: km per week · w0/(new depth − change-at depth) · price.</summary>
    private static double TyreCostPerWeek(VehicleModel model, MoneyInputs inputs, Position position)
    {
        var tyre = model.Figures.At(position);
        var rate = tyre is null
            ? position.Axle == 1 && !model.IsTrailer ? model.Class.FrontRate : model.Class.RearRate
            : Observables.NormalRate(model, tyre);
        return inputs.KmPerWeek / 1000 * rate / inputs.UsableDepthMm(tyre, model.Class.NewDepthMm) * inputs.TyrePriceAt(model.Figures.Vehicle, position);
    }

    /// <summary>Money per week for a drag force, N.</summary>
    public static double DragCostPerWeek(double dragN, bool electric, MoneyInputs inputs) =>
        inputs.KmPerWeek / 100 * dragN * (electric ? ToeDrag.KWhPer100KmPerN : ToeDrag.LitresPer100KmPerN) * inputs.EnergyPrice;

    private static double Quantile(List<(double Cost, double Weight)> sorted, double p)
    {
        var total = sorted.Sum(s => s.Weight);
        double before = 0;
        foreach (var (cost, weight) in sorted)
        {
            before += weight;
            if (before >= p * total) return cost;
        }
        return sorted[^1].Cost;
    }
}
