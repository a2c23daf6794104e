using MathNet.Numerics.LinearAlgebra;

namespace WearWatch.Diagnosis.Unusual;

/// <summary>Scores along the common directions from the figures that are known.</summary>
internal static class PrincipalScores
{
    /// <summary>
    /// Ridge least squares over the known figures: (V'V + Λ⁻¹) t = V'z, the posterior mean of probabilistic principal
    /// components with unit noise (Tipping &amp; Bishop, J. R. Statist. Soc. B 61 (1999) 611), so that missing figures pull nothing.
    /// </summary>
    public static double[] Of(double[] z, double[][] components, double[] variance)
    {
        var k = components.Length;
        if (k == 0) return [];
        var known = Enumerable.Range(0, z.Length).Where(j => double.IsFinite(z[j])).ToArray();
        var normal = Matrix<double>.Build.Dense(k, k, (a, b) => known.Sum(j => components[a][j] * components[b][j]) + (a == b ? 1 / variance[a] : 0));
        var right = Vector<double>.Build.Dense(k, a => known.Sum(j => components[a][j] * z[j]));
        return normal.Cholesky().Solve(right).ToArray();
    }

    public static double[] Residual(double[] z, double[] scores, double[][] components)
    {
        var residual = new double[z.Length];
        for (var j = 0; j < z.Length; j++)
        {
            residual[j] = z[j];
            for (var k = 0; k < scores.Length; k++) residual[j] -= scores[k] * components[k][j];
        }
        return residual;
    }
}
