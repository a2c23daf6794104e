using MathNet.Numerics;
using MathNet.Numerics.LinearAlgebra;

namespace WearWatch.Diagnosis.Statistics;

/// <summary>
/// Linear fit with the least median of squared residuals: almost half of the cases may be anything. Every subset of as many cases as
/// coefficients is tried, the intercept then moved to the middle of the shortest half; meant for some tens of cases.
/// </summary>
/// <remarks>P. J. Rousseeuw, J. Am. Statist. Assoc. 79 (1984) 871.</remarks>
public static class LeastMedianOfSquares
{
    private const int MostSubsets = 100_000;

    /// <summary>Coefficients, the intercept first.</summary>
    /// <param name="design">Rows are cases; the first column is ones.</param>
    /// <param name="response">One value a row.</param>
    /// <exception cref="ArgumentException">Too few or too many cases, or no subset of full rank.</exception>
    public static double[] Fit(double[,] design, double[] response)
    {
        var (n, p) = (design.GetLength(0), design.GetLength(1));
        if (n != response.Length || n <= 2 * p) throw new ArgumentException("more than two cases a coefficient are needed", nameof(design));
        if (SpecialFunctions.Binomial(n, p) > MostSubsets) throw new ArgumentException("too many cases to try every subset", nameof(design));
        var (x, y) = (Matrix<double>.Build.DenseOfArray(design), Vector<double>.Build.DenseOfArray(response));
        var half = (n + 1) / 2;
        double[]? best = null;
        var least = double.PositiveInfinity;
        var rest = new double[n];
        for (var rows = Enumerable.Range(0, p).ToArray(); rows is not null; rows = Next(rows, n))
        {
            var part = Matrix<double>.Build.Dense(p, p, (i, j) => design[rows[i], j]);
            if (Math.Abs(part.Determinant()) < 1e-9) continue;
            var beta = part.Solve(Vector<double>.Build.Dense(p, i => response[rows[i]]));
            (y - x * beta).CopyTo(Vector<double>.Build.Dense(rest));
            Array.Sort(rest);
            for (var i = 0; i + half <= n; i++)
            {
                var width = (rest[i + half - 1] - rest[i]) / 2;
                if (width >= least - 1e-12) continue;
                (least, best) = (width, beta.ToArray());
                best[0] += (rest[i + half - 1] + rest[i]) / 2;
            }
        }
        return best ?? throw new ArgumentException("no subset of cases determines the coefficients", nameof(design));
    }

    private static int[]? Next(int[] rows, int n)
    {
        var next = (int[])rows.Clone();
        for (var i = rows.Length - 1; i >= 0; i--)
        {
            if (next[i] == n - rows.Length + i) continue;
            next[i]++;
            for (var j = i + 1; j < rows.Length; j++) next[j] = next[j - 1] + 1;
            return next;
        }
        return null;
    }
}
