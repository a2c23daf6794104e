using MathNet.Numerics.LinearAlgebra;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>By how much a technician or a gauge reads too deep.</summary>
/// <param name="Reader">Technician or gauge.</param>
/// <param name="BiasMm">mm; its error is mostly what all readers may share, which nothing in the readings can show.</param>
/// <param name="AgainstOthersSdMm">Standard error of the bias against the mean of all readers, mm: what matters to a rate.</param>
/// <param name="Readings">Tyre readings behind it.</param>
public sealed record ReaderBias(string Reader, Estimate BiasMm, double AgainstOthersSdMm, int Readings);

/// <summary>
/// Crossed random effects of technicians and gauges on the depths of the whole fleet, against each fitting's own line
/// (intercept free, rate shrunk to the fleet's). Only differences between readers can show; what all share stays in the depths.
/// </summary>
/// <remarks>Ridge form of the mixed model: N. M. Laird and J. H. Ware, Biometrics 38 (1982) 963.</remarks>
internal static class ReaderBiases
{
    /// <summary>One reading of a fitting's mean depth.</summary>
    public readonly record struct Reading(double Km, double DepthMm, double Variance, int Technician, int Gauge);

    /// <summary>Variance of a fitting's level about the mean of its own readings, mm²: as good as free, or the fleet's depths would feign a bias common to all.</summary>
    private const double FreeVariance = 1e4;

    public static (ReaderBias[] Technicians, ReaderBias[] Gauges) Fit(
        IReadOnlyList<(IReadOnlyList<Reading> Readings, Estimate RateMmPerKm)> fittings, IReadOnlyList<string> technicians, IReadOnlyList<string> gauges)
    {
        var size = technicians.Count + gauges.Count;
        if (size == 0) return ([], []);
        var counts = new int[size];
        var information = Matrix<double>.Build.Dense(size, size);
        var beta = Vector<double>.Build.Dense(size);
        Matrix<double> inverse = Matrix<double>.Build.Dense(size, size);
        for (var pass = 0; pass < 3; pass++)
        {
            information.Clear();
            Array.Clear(counts);
            var right = Vector<double>.Build.Dense(size);
            for (var i = 0; i < size; i++) information[i, i] = 1 / Math.Pow(i < technicians.Count ? GaugeNoise.TechnicianSdMm : GaugeNoise.GaugeSdMm, 2);
            foreach (var (readings, rate) in fittings) Add(readings, rate, technicians.Count, beta, pass > 0, information, right, counts);
            var factor = information.Cholesky();
            beta = factor.Solve(right);
            if (pass == 2) inverse = factor.Solve(Matrix<double>.Build.DenseIdentity(size));
        }
        ReaderBias Of(string name, int i, int from, int count) => new(name, new(beta[i], Math.Sqrt(inverse[i, i])), AgainstOthers(inverse, i, from, count), counts[i]);
        return ([.. technicians.Select((t, i) => Of(t, i, 0, technicians.Count))], [.. gauges.Select((g, i) => Of(g, technicians.Count + i, technicians.Count, gauges.Count))]);
    }

    private static double AgainstOthers(Matrix<double> covariance, int i, int from, int count)
    {
        double row = 0, all = 0;
        for (var j = from; j < from + count; j++)
        {
            row += covariance[i, j] / count;
            for (var k = from; k < from + count; k++) all += covariance[j, k] / count / count;
        }
        return Math.Sqrt(Math.Max(0, covariance[i, i] - 2 * row + all));
    }

    private static void Add(IReadOnlyList<Reading> readings, Estimate rate, int offset, Vector<double> beta, bool robust, Matrix<double> information, Vector<double> right, int[] counts)
    {
        var n = readings.Count;
        if (n < 2) return;
        var x0 = readings.Average(r => r.Km);
        var covariance = new double[n, n];
        var columns = new SortedDictionary<int, double[]>();
        var y = new double[n];
        for (var i = 0; i < n; i++)
        {
            var r = readings[i];
            y[i] = r.DepthMm + rate.Value * (r.Km - x0);
            foreach (var c in Columns(r, offset))
            {
                if (!columns.TryGetValue(c, out var column)) columns[c] = column = new double[n];
                column[i] = 1;
                counts[c]++;
            }
        }
        if (robust) HoldIn(readings, offset, beta, y);
        var level = y.Average();
        for (var i = 0; i < n; i++) y[i] -= level;
        for (var i = 0; i < n; i++)
        {
            for (var j = 0; j <= i; j++)
                covariance[i, j] = FreeVariance + rate.StandardError * rate.StandardError * (readings[i].Km - x0) * (readings[j].Km - x0);
            covariance[i, i] += readings[i].Variance;
        }
        SmallCholesky.Factor(covariance);
        SmallCholesky.Whiten(covariance, y);
        foreach (var (_, column) in columns) SmallCholesky.Whiten(covariance, column);
        foreach (var (a, ca) in columns)
        {
            right[a] += Dot(ca, y);
            foreach (var (b, cb) in columns) information[a, b] += Dot(ca, cb);
        }
    }

    /// <summary>Huber's pseudo-values: residuals from the fitting's median beyond 2 standard deviations are pulled in.</summary>
    private static void HoldIn(IReadOnlyList<Reading> readings, int offset, Vector<double> beta, double[] y)
    {
        var rest = y.Select((v, i) => v - Columns(readings[i], offset).Sum(c => beta[c])).ToArray();
        var middle = Medians.Median(rest);
        for (var i = 0; i < y.Length; i++)
        {
            var bound = 2.5 * Math.Sqrt(readings[i].Variance);
            y[i] += Math.Clamp(rest[i] - middle, -bound, bound) - (rest[i] - middle);
        }
    }

    private static IEnumerable<int> Columns(Reading r, int offset)
    {
        if (r.Technician >= 0) yield return r.Technician;
        if (r.Gauge >= 0) yield return offset + r.Gauge;
    }

    private static double Dot(double[] a, double[] b)
    {
        double sum = 0;
        for (var i = 0; i < a.Length; i++) sum += a[i] * b[i];
        return sum;
    }
}
