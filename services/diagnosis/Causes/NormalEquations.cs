using System.Numerics;

namespace WearWatch.Diagnosis.Causes;

/// <summary>
/// Normal equations A·u = b of a few dozen unknowns, solved again and again in the same memory: Cholesky A = UᵀU by rows, passing over
/// zeros (tyres of different axles meet only in the last columns). Not safe for concurrent use.
/// </summary>
/// <param name="p">Unknowns.</param>
internal sealed class NormalEquations(int p)
{
    private readonly double[] _upper = new double[p * p], _inverse = new double[p * p]; // U and U⁻¹, row by row
    private readonly double[] _b = new double[p], _forward = new double[p];

    /// <summary>Copies a system in; the upper triangle and the right-hand side are returned to be completed.</summary>
    public (double[] Upper, double[] B) Start(double[] upper, double[] b)
    {
        upper.CopyTo(_upper, 0);
        b.CopyTo(_b, 0);
        return (_upper, _b);
    }

    /// <summary>Factors what <see cref="Start"/> returned; returns the log determinant of A.</summary>
    public double Factor()
    {
        double product = 1, logDet = 0;
        for (var m = 0; m < p; m++)
        {
            var pivot = _upper.AsSpan(m * p, p);
            var root = Math.Sqrt(pivot[m]);
            product *= root;
            if (product is > 1e100 or < 1e-100) (logDet, product) = (logDet + Math.Log(product), 1);
            var one = 1 / root;
            for (var k = m; k < p; k++) pivot[k] *= one;
            for (var j = m + 1; j < p; j++)
                if (pivot[j] != 0) Subtract(_upper.AsSpan(j * p + j, p - j), pivot[j..], pivot[j]);
        }
        return 2 * (logDet + Math.Log(product));
    }

    /// <summary>Best values by forward and backward substitution; returns bᵀA⁻¹b.</summary>
    public double Means(Span<double> mean)
    {
        double square = 0;
        for (var k = 0; k < p; k++)
        {
            var f = _b[k] / _upper[k * p + k];
            _b[k] = f;
            square += f * f;
            if (f != 0) Subtract(_b.AsSpan(k + 1, p - k - 1), _upper.AsSpan(k * p + k + 1, p - k - 1), f);
        }
        for (var k = p - 1; k >= 0; k--)
            mean[k] = (_b[k] - Dot(_upper.AsSpan(k * p + k + 1, p - k - 1), mean.Slice(k + 1, p - k - 1))) / _upper[k * p + k];
        return square;
    }

    /// <summary>Best values and their variances; returns bᵀA⁻¹b. <see cref="Reach"/> is ready after it.</summary>
    public double Posterior(Span<double> mean, Span<double> variance)
    {
        Invert();
        Forward(_b);
        for (var k = 0; k < p; k++)
        {
            var row = _inverse.AsSpan(k * p + k, p - k);
            (mean[k], variance[k]) = (Dot(row, _forward.AsSpan(k, p - k)), Dot(row, row));
        }
        return Dot(_forward, _forward);
    }

    /// <summary>cᵀA⁻¹c: variance that the unknowns give to what hangs on them by c.</summary>
    public double Reach(ReadOnlySpan<double> column)
    {
        Forward(column);
        return Dot(_forward, _forward);
    }

    private void Invert()
    {
        Array.Clear(_inverse);
        for (var k = 0; k < p; k++)
        {
            var row = _inverse.AsSpan(k * p, p);
            row[k] = 1;
            for (var m = k; m < p; m++)
            {
                if (row[m] == 0) continue;
                row[m] /= _upper[m * p + m];
                Subtract(row[(m + 1)..], _upper.AsSpan(m * p + m + 1, p - m - 1), row[m]);
            }
        }
    }

    /// <summary>U⁻ᵀ times a column.</summary>
    private void Forward(ReadOnlySpan<double> column)
    {
        Array.Clear(_forward);
        for (var k = 0; k < p; k++)
            if (column[k] != 0) Subtract(_forward.AsSpan(k), _inverse.AsSpan(k * p + k, p - k), -column[k]);
    }

    private static void Subtract(Span<double> from, ReadOnlySpan<double> row, double factor)
    {
        row = row[..from.Length];
        var (width, by, i) = (Vector<double>.Count, new Vector<double>(factor), 0);
        for (; i <= from.Length - width; i += width) (new Vector<double>(from[i..]) - by * new Vector<double>(row[i..])).CopyTo(from[i..]);
        for (; i < from.Length; i++) from[i] -= factor * row[i];
    }

    private static double Dot(ReadOnlySpan<double> x, ReadOnlySpan<double> y)
    {
        y = y[..x.Length];
        var (width, sum, i) = (Vector<double>.Count, Vector<double>.Zero, 0);
        for (; i <= x.Length - width; i += width) sum += new Vector<double>(x[i..]) * new Vector<double>(y[i..]);
        var all = Vector.Sum(sum);
        for (; i < x.Length; i++) all += x[i] * y[i];
        return all;
    }
}
