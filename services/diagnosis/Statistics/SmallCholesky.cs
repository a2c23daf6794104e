namespace WearWatch.Diagnosis.Statistics;

/// <summary>Cholesky factor of the few-by-few covariance matrices of one place, in place; larger systems go to MathNet.</summary>
internal static class SmallCholesky
{
    /// <summary>Replaces the lower triangle of a positive definite matrix by its factor.</summary>
    public static void Factor(double[,] a)
    {
        for (var j = 0; j < a.GetLength(0); j++)
        {
            for (var k = 0; k < j; k++)
                for (var i = j; i < a.GetLength(0); i++) a[i, j] -= a[i, k] * a[j, k];
            var root = Math.Sqrt(Math.Max(a[j, j], 1e-15));
            for (var i = j; i < a.GetLength(0); i++) a[i, j] /= root;
        }
    }

    /// <summary>Solves L·z = b in place, after which inner products are those of the inverse covariance.</summary>
    public static void Whiten(double[,] factor, double[] b)
    {
        for (var i = 0; i < b.Length; i++)
        {
            for (var k = 0; k < i; k++) b[i] -= factor[i, k] * b[k];
            b[i] /= factor[i, i];
        }
    }
}
