using MathNet.Numerics.Distributions;
using MathNet.Numerics.Statistics;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Unusual;

/// <summary>
/// Vehicles unlike their class in ways that no rule names. Each figure is standardised by its class's median and median
/// absolute deviation, the directions in which the fleet varies together come from principal components, and a vehicle is
/// measured by distances that keep magnitude: what those directions leave unexplained (the greatest of it, and its breadth)
/// and how far out it lies along them (Hotelling's T²). Screening only: it asks for an inspection and never claims a cause.
/// </summary>
public static class UnusualVehicles
{
    /// <summary>Vehicles of a class, or of a class with a given figure, below which there is no telling what is usual.</summary>
    public const int LeastVehicles = 8;

    /// <summary>Vehicles of a class from which its distances have a spread of their own; below, the fleet's is used.</summary>
    private const int LeastForOwnSpread = 300;

    /// <summary>Median absolute deviation to standard deviation, normal law.</summary>
    private const double MadToSigma = 1.482602218505602;

    /// <summary>Standardised figures are held to this many spreads while directions are sought and scores along them taken, so that no fault makes its own.</summary>
    internal const double Winsor = 3;

    private const int MostDirections = 5;

    /// <summary>Spreads from the centre beyond which a value does not help to set what is usual.</summary>
    private const double FarOut = 5;

    /// <summary>Values up to which spreads are taken from all pairs.</summary>
    private const int MostPairwise = 100;

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
            others = others with { Classes = [.. others.Classes.Select(c => c with { Greatest = unit, Breadth = unit, Along = unit })] };
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
            z[j] = (figure.Value - own.Centre[j]) / (own.Doubt[j] * Math.Sqrt(own.Scale[j] * own.Scale[j] + Math.Max(0, extra)));
        }
        return z;
    }

    private static ClassSpread Spread(VehicleClass vehicleClass, IReadOnlyList<VehicleFigures> vehicles)
    {
        var width = UnusualFigures.All.Count;
        var (centre, scale, error, doubt) = (new double[width], new double[width], new double[width], Enumerable.Repeat(1.0, width).ToArray());
        for (var j = 0; j < width; j++)
        {
            var known = vehicles.Select(v => Known(UnusualFigures.All[j].Of(v))).OfType<Estimate>().ToList();
            if (known.Count < LeastVehicles) continue;
            var values = known.Select(e => e.Value).ToList();
            centre[j] = values.Median();
            (scale[j], doubt[j]) = SpreadOf(values, centre[j]);
            // Several vehicles with one fault widen the spread of a small class: what lies far out is left out once.
            var near = values.Where(v => Math.Abs(v - centre[j]) <= FarOut * scale[j]).ToList();
            if (near.Count >= LeastVehicles && near.Count < values.Count)
            {
                centre[j] = near.Median();
                (scale[j], doubt[j]) = SpreadOf(near, centre[j]);
            }
            scale[j] = Math.Max(scale[j], UnusualFigures.All[j].Floor);
            error[j] = known.Select(e => e.StandardError).Median();
        }
        var unit = new DistanceSpread(1, 1);
        return new ClassSpread { Class = vehicleClass, Vehicles = vehicles.Count, Centre = centre, Scale = scale, TypicalError = error, Doubt = doubt, Greatest = unit, Breadth = unit, Along = unit };
    }

    /// <summary>
    /// Robust spread and the doubt about it. Of few values the quartile of all pairwise differences (Rousseeuw &amp; Croux, J. Am. Statist.
    /// Assoc. 88 (1993) 1273, efficiency 0.82) wastes less than the median absolute deviation (0.37). A spread from n values has about
    /// efficiency × (n − 1) degrees of freedom: the doubt is what Student's law asks over the normal one at two sound figures in a
    /// thousand, times the vagueness of the median.
    /// </summary>
    private static (double Scale, double Doubt) SpreadOf(List<double> values, double centre)
    {
        var n = values.Count;
        var pairwise = n <= MostPairwise;
        var scale = pairwise ? PairwiseSigma(values) : RobustSigma(values, centre);
        if (!(scale > 0)) scale = RobustSigma(values, centre);
        var freedom = (pairwise ? 0.82 : 0.37) * (n - 1);
        return (scale, StudentT.InvCDF(0, 1, freedom, 0.998) / Normal.InvCDF(0, 1, 0.998) * Math.Sqrt(1 + Math.PI / 2 / n));
    }

    private static double PairwiseSigma(List<double> values)
    {
        var n = values.Count;
        var differences = new List<double>(n * (n - 1) / 2);
        for (var i = 0; i < n; i++)
            for (var k = i + 1; k < n; k++) differences.Add(Math.Abs(values[i] - values[k]));
        differences.Sort();
        var half = n / 2 + 1;
        var rank = half * (half - 1) / 2;
        // 2.2219 for the normal law; the small-sample factor of Croux & Rousseeuw 1992.
        return 2.2219 * differences[rank - 1] * (n % 2 == 1 ? n / (n + 1.4) : n / (n + 3.8));
    }

    /// <summary>Figures held to a few spreads; NaN stays.</summary>
    internal static double[] Held(double[] z) => Array.ConvertAll(z, v => Math.Clamp(v, -Winsor, Winsor));

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
        var residuals = rows.Select(z => PrincipalScores.Residual(z, PrincipalScores.Of(Held(z), fit.Components, fit.ComponentVariance), fit.Components)).ToList();
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
        static ClassSpread With(ClassSpread c, IReadOnlyList<UnusualDistances> of) => c with
        {
            Greatest = DistanceSpread.Of(of.Select(d => d.Greatest)),
            Breadth = DistanceSpread.Of(of.Select(d => d.Breadth)),
            Along = DistanceSpread.Of(of.Select(d => d.Along)),
        };
        var fleet = distances.Select(d => d.Of).ToList();
        return fit with
        {
            Classes = [.. fit.Classes.Select(c =>
            {
                var own = distances.Where(d => d.Class == c.Class).Select(d => d.Of).ToList();
                return With(c, own.Count < LeastForOwnSpread ? fleet : own);
            })],
        };
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
