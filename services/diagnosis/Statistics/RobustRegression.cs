using MathNet.Numerics.LinearAlgebra;

namespace WearWatch.Diagnosis.Statistics;

public enum RobustLoss { Huber, Bisquare }

/// <summary>A robust linear fit.</summary>
/// <param name="Coefficients">One per column of the design.</param>
/// <param name="Scale">Median absolute residual over 0.6745, in the unit of the response.</param>
/// <param name="Weights">Weight the loss left each case, 0 to 1.</param>
/// <param name="Residuals">Response less fit.</param>
public sealed record RobustFit(double[] Coefficients, double Scale, double[] Weights, double[] Residuals);

/// <summary>
/// M-estimates for any design matrix by iteratively reweighted least squares; the scale is re-estimated each step.
/// </summary>
/// <remarks>
/// P. J. Huber, Ann. Math. Statist. 35 (1964) 73; A. E. Beaton and J. W. Tukey, Technometrics 16 (1974) 147. The tuning
/// constants give 95 % efficiency under the normal law. The bisquare starts at the Huber solution, for it has several.
/// </remarks>
public static class RobustRegression
{
    public const double HuberK = 1.345;
    public const double BisquareK = 4.685;
    private const int MaxSteps = 200;

    /// <param name="design">Rows are cases; at least as many rows as columns.</param>
    /// <param name="response">One value a row.</param>
    /// <param name="loss">Which loss.</param>
    public static RobustFit Fit(double[,] design, double[] response, RobustLoss loss)
    {
        var x = Matrix<double>.Build.DenseOfArray(design);
        var y = Vector<double>.Build.DenseOfArray(response);
        if (x.RowCount != y.Count) throw new ArgumentException("design and response differ in length", nameof(response));
        var start = x.QR().Solve(y);
        var fit = Iterate(x, y, start, RobustLoss.Huber);
        return loss == RobustLoss.Huber ? fit : Iterate(x, y, Vector<double>.Build.DenseOfArray(fit.Coefficients), loss);
    }

    private static RobustFit Iterate(Matrix<double> x, Vector<double> y, Vector<double> beta, RobustLoss loss)
    {
        var residuals = y - x * beta;
        var weights = Enumerable.Repeat(1.0, y.Count).ToArray();
        double scale = 0;
        for (var step = 0; step < MaxSteps; step++)
        {
            scale = Medians.Scale(residuals.AsArray() ?? residuals.ToArray());
            if (scale < 1e-12 * (1 + y.AbsoluteMaximum())) break;
            for (var i = 0; i < weights.Length; i++) weights[i] = Weight(residuals[i] / scale, loss);
            var root = Vector<double>.Build.Dense(y.Count, i => Math.Sqrt(weights[i]));
            var next = Matrix<double>.Build.DenseOfRowVectors(x.EnumerateRows().Select((row, i) => row * root[i])).QR().Solve(y.PointwiseMultiply(root));
            var change = (next - beta).AbsoluteMaximum() / (1e-12 + next.AbsoluteMaximum());
            beta = next;
            residuals = y - x * beta;
            if (change < 1e-9) break;
        }
        return new RobustFit(beta.ToArray(), scale, weights, residuals.ToArray());
    }

    /// <summary>ψ(u)/u for a residual of u scales.</summary>
    public static double Weight(double u, RobustLoss loss)
    {
        var a = Math.Abs(u);
        if (loss == RobustLoss.Huber) return a <= HuberK ? 1 : HuberK / a;
        if (a >= BisquareK) return 0;
        var t = 1 - a / BisquareK * (a / BisquareK);
        return t * t;
    }
}
