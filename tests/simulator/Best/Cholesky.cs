namespace WearWatch.Simulator.Best;

/// <summary>Small symmetric positive definite systems, row by row in one array.</summary>
internal static class Cholesky
{
    /// <summary>Replaces the matrix's lower triangle by its factor L, A = L Lᵀ.</summary>
    public static void Factor(Span<double> a, int n)
    {
        for (var j = 0; j < n; j++)
        {
            for (var i = j; i < n; i++)
            {
                var sum = a[i * n + j];
                for (var k = 0; k < j; k++) sum -= a[i * n + k] * a[j * n + k];
                a[i * n + j] = i == j ? Math.Sqrt(Math.Max(sum, 1e-300)) : sum / a[j * n + j];
            }
        }
    }

    /// <summary>Solves L Lᵀ x = b in place.</summary>
    public static void Solve(ReadOnlySpan<double> l, int n, Span<double> b)
    {
        for (var i = 0; i < n; i++)
        {
            for (var k = 0; k < i; k++) b[i] -= l[i * n + k] * b[k];
            b[i] /= l[i * n + i];
        }
        SolveTransposed(l, n, b);
    }

    /// <summary>Solves Lᵀ x = b in place: a standard normal b becomes a draw with the covariance A⁻¹.</summary>
    public static void SolveTransposed(ReadOnlySpan<double> l, int n, Span<double> b)
    {
        for (var i = n - 1; i >= 0; i--)
        {
            for (var k = i + 1; k < n; k++) b[i] -= l[k * n + i] * b[k];
            b[i] /= l[i * n + i];
        }
    }

    /// <summary>L⁻¹, lower.</summary>
    public static double[] InverseOfFactor(ReadOnlySpan<double> l, int n)
    {
        var inverse = new double[n * n];
        for (var j = 0; j < n; j++)
            for (var i = j; i < n; i++)
            {
                var sum = i == j ? 1.0 : 0;
                for (var k = j; k < i; k++) sum -= l[i * n + k] * inverse[k * n + j];
                inverse[i * n + j] = sum / l[i * n + i];
            }
        return inverse;
    }

    /// <summary>Log of the determinant of A.</summary>
    public static double LogDeterminant(ReadOnlySpan<double> l, int n)
    {
        double sum = 0;
        for (var i = 0; i < n; i++) sum += 2 * Math.Log(l[i * n + i]);
        return sum;
    }
}
