using MathNet.Numerics.Statistics;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Unusual;

/// <summary>
/// Vehicles unlike their class in ways that no rule names. Each figure is standardised by its class's median and median
/// absolute deviation, the directions in which the fleet varies together come from principal components, and a vehicle is
/// measured by two distances that keep magnitude: what those directions leave unexplained (squared prediction error) and
/// how far out it lies along them (Hotelling's T²). Screening only: it asks for an inspection and never claims a cause.
/// </summary>
public static class UnusualVehicles
{
    /// <summary>Vehicles of a class, or of a class with a given figure, below which there is no telling what is usual.</summary>
    public const int LeastVehicles = 8;

    /// <summary>Vehicles of a class from which its distances have a spread of their own; below, the fleet's is used.</summary>
    private const int LeastForOwnSpread = 100;

    /// <summary>Median absolute deviation to standard deviation, normal law.</summary>
    private const double MadToSigma = 1.482602218505602;

    /// <summary>Standardised figures are held to this many spreads while directions are sought, so that no fault makes its own.</summary>
    private const double Winsor = 3;

    private const int MostDirections = 5;

    /// <summary>Parts the fleet is cut into when distances are learnt: each part is measured by a fit of the others.</summary>
    private const int Parts = 5;

    /// <summary>Fits what is usual. Order of the fleet does not matter; the latest figures of a vehicle given twice count.</summary>
    public static UnusualFit Fit(IReadOnlyList<VehicleFigures> fleet)
    {
        var sorted = fleet.GroupBy(f => f.Vehicle.VehicleId).Select(g => g.MaxBy(f => f.AsOf)!).OrderBy(f => f.Vehicle.Class).ThenBy(f => f.Vehicle.VehicleId, StringComparer.Ordinal).ToList();
        var fit = WithoutDistances(sorted);
        if (fit.Classes.Count == 0) return fit;
        // A vehicle that helped to set the centre and the spread looks nearer than a new one will: so each is measured by
        // a fit that has not seen it, with the figures that a rule has named left out, exactly as it will be judged.
        var unit = new DistanceSpread(0, 1);
        var distances = new List<(VehicleClass Class, UnusualDistances Of)>();
        for (var part = 0; part < Parts; part++)
        {
            var others = WithoutDistances([.. sorted.Where((_, i) => i % Parts != part)]);
            others = others with { Classes = [.. others.Classes.Select(c => c with { SquaredPredictionError = unit, HotellingT2 = unit })] };
            foreach (var own in sorted.Where((_, i) => i % Parts == part))
                if (others.Distances(own, GeometryRules.Find(own)) is { } distance) distances.Add((own.Vehicle.Class, distance));
        }
        return WithDistances(fit, distances);
    }

    private static UnusualFit WithoutDistances(IReadOnlyList<VehicleFigures> sorted)
    {
        var classes = sorted.GroupBy(f => f.Vehicle.Class).Where(g => g.Count() >= LeastVehicles).OrderBy(g => g.Key).Select(g => Spread(g.Key, [.. g])).ToList();
        var rows = sorted
            .Select(f => (Figures: f, Class: classes.FirstOrDefault(c => c.Class == f.Vehicle.Class)))
            .Where(x => x.Class is not null)
            .Select(x => Standardise(x.Figures, x.Class!))
            .Where(z => z.Any(double.IsFinite)).ToList();
        var fit = new UnusualFit
        {
            Figures = [.. UnusualFigures.All.Select(f => f.Name)],
            Classes = classes,
            Components = [],
            ComponentVariance = [],
            ResidualScale = [.. Enumerable.Repeat(1.0, UnusualFigures.All.Count)],
        };
        return rows.Count == 0 ? fit : WithDirections(fit, rows);
    }

    /// <summary>
    /// Each figure less its class's centre over its spread; a figure less certain than is usual in its class counts less.
    /// NaN where the figure or its spread is not known.
    /// </summary>
    internal static double[] Standardise(VehicleFigures figures, ClassSpread own)
    {
        var z = new double[UnusualFigures.All.Count];
        for (var j = 0; j < z.Length; j++)
        {
            if (own.Scale[j] <= 0 || Known(UnusualFigures.All[j].Of(figures)) is not { } figure) { z[j] = double.NaN; continue; }
            var extra = figure.StandardError * figure.StandardError - own.TypicalError[j] * own.TypicalError[j];
            z[j] = (figure.Value - own.Centre[j]) / Math.Sqrt(own.Scale[j] * own.Scale[j] + Math.Max(0, extra));
        }
        return z;
    }

    private static ClassSpread Spread(VehicleClass vehicleClass, IReadOnlyList<VehicleFigures> vehicles)
    {
        var width = UnusualFigures.All.Count;
        var (centre, scale, error) = (new double[width], new double[width], new double[width]);
        for (var j = 0; j < width; j++)
        {
            var known = vehicles.Select(v => Known(UnusualFigures.All[j].Of(v))).OfType<Estimate>().ToList();
            if (known.Count < LeastVehicles) continue;
            var values = known.Select(e => e.Value).ToList();
            centre[j] = values.Median();
            scale[j] = Math.Max(RobustSigma(values, centre[j]), UnusualFigures.All[j].Floor);
            error[j] = known.Select(e => e.StandardError).Median();
        }
        var unit = new DistanceSpread(1, 1);
        return new ClassSpread { Class = vehicleClass, Vehicles = vehicles.Count, Centre = centre, Scale = scale, TypicalError = error, SquaredPredictionError = unit, HotellingT2 = unit };
    }

    private static UnusualFit WithDirections(UnusualFit fit, IReadOnlyList<double[]> rows)
    {
        var filled = rows.Select(z => Array.ConvertAll(z, v => double.IsFinite(v) ? Math.Clamp(v, -Winsor, Winsor) : 0)).ToList();
        var present = Enumerable.Range(0, fit.Figures.Length).Count(j => rows.Any(z => double.IsFinite(z[j])));
        // At least four vehicles and two figures for every direction, else the directions are noise.
        var rank = Math.Min(MostDirections, Math.Min(rows.Count / 4, present / 2));
        if (rank >= 1 && filled.Any(r => r.Any(v => v != 0)))
        {
            var directions = PrincipalDirections.Of(filled, rank);
            var scores = directions.Select(d => filled.Select(r => r.Zip(d, (x, y) => x * y).Sum()).ToList()).ToList();
            var variance = scores.Select(s => Math.Pow(RobustSigma(s, 0), 2)).ToList();
            // A direction that carries no more than one figure's own spread says nothing in common.
            var keep = Enumerable.Range(0, directions.Length).Where(k => variance[k] > 1).ToList();
            fit = fit with { Components = [.. keep.Select(k => directions[k])], ComponentVariance = [.. keep.Select(k => variance[k])] };
        }
        var residuals = rows.Select(z => PrincipalScores.Residual(z, PrincipalScores.Of(z, fit.Components, fit.ComponentVariance), fit.Components)).ToList();
        return fit with { ResidualScale = [.. Enumerable.Range(0, fit.Figures.Length).Select(j => ResidualSigma(residuals, j))] };
    }

    private static double ResidualSigma(IReadOnlyList<double[]> residuals, int j)
    {
        var known = residuals.Select(r => r[j]).Where(double.IsFinite).ToList();
        // Never below a fifth of the figure's own spread: a figure the directions explain almost fully is not known that well.
        return known.Count < LeastVehicles ? 1 : Math.Max(0.2, RobustSigma(known, 0));
    }

    private static UnusualFit WithDistances(UnusualFit fit, IReadOnlyList<(VehicleClass Class, UnusualDistances Of)> distances)
    {
        var (fleetSpe, fleetT2) = (Of(distances.Select(d => d.Of.SquaredPredictionError)), Of(distances.Select(d => d.Of.HotellingT2)));
        return fit with
        {
            Classes = [.. fit.Classes.Select(c =>
            {
                var own = distances.Where(d => d.Class == c.Class).Select(d => d.Of).ToList();
                return own.Count < LeastForOwnSpread
                    ? c with { SquaredPredictionError = fleetSpe, HotellingT2 = fleetT2 }
                    : c with { SquaredPredictionError = Of(own.Select(d => d.SquaredPredictionError)), HotellingT2 = Of(own.Select(d => d.HotellingT2)) };
            })],
        };
    }

    private static DistanceSpread Of(IEnumerable<double> meanSquares)
    {
        var roots = meanSquares.Select(Math.Cbrt).ToList();
        if (roots.Count == 0) return new(1, 1);
        var centre = roots.Median();
        // The upper half only: it is the upper tail that a limit is set on, and it is the longer one.
        return new(centre, Math.Max(RobustSigma([.. roots.Where(r => r >= centre)], centre), 0.05));
    }

    /// <summary>From the median absolute deviation; from the mean absolute deviation where more than half the values are equal.</summary>
    private static double RobustSigma(IReadOnlyList<double> values, double centre)
    {
        var deviations = values.Select(v => Math.Abs(v - centre)).ToList();
        var mad = deviations.Median();
        return mad > 0 ? MadToSigma * mad : Math.Sqrt(Math.PI / 2) * deviations.Average();
    }

    private static Estimate? Known(Estimate? figure) =>
        figure is { } f && double.IsFinite(f.Value) && double.IsFinite(f.StandardError) ? f : null;
}
