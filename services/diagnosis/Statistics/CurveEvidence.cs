using MathNet.Numerics.LinearAlgebra;

namespace WearWatch.Diagnosis.Statistics;

/// <summary>Whether a few readings bear out a curve in place of a straight line.</summary>
public static class CurveEvidence
{
    /// <summary>Gain of Akaike's criterion from which the curve is believed (H. Akaike, IEEE Trans. Autom. Control 19 (1974) 716).</summary>
    public const double LeastGain = 4;

    /// <summary>Fewest readings that can show a curve.</summary>
    public const int LeastReadings = 5;

    /// <summary>True where the parabola through the readings gains more than <see cref="LeastGain"/> over the line.</summary>
    /// <param name="x">Places.</param>
    /// <param name="y">Readings of equal error.</param>
    public static bool Bent(double[] x, double[] y) => Gain(x, y) is > LeastGain;

    /// <summary>AIC of the straight line less that of the parabola; null with fewer than five readings or four places.</summary>
    public static double? Gain(double[] x, double[] y)
    {
        if (x.Length != y.Length) throw new ArgumentException("x and y differ in length", nameof(y));
        if (x.Length < LeastReadings || x.Distinct().Count() < 4) return null;
        var (mean, half) = ((x.Max() + x.Min()) / 2, (x.Max() - x.Min()) / 2);
        var u = x.Select(v => (v - mean) / half).ToArray();
        var (line, parabola) = (Rest(u, y, 1), Rest(u, y, 2));
        return parabola <= 0 ? (line <= 0 ? -2 : double.PositiveInfinity) : x.Length * Math.Log(line / parabola) - 2;
    }

    private static double Rest(double[] u, double[] y, int degree)
    {
        var design = Matrix<double>.Build.Dense(u.Length, degree + 1, (i, j) => Math.Pow(u[i], j));
        var response = Vector<double>.Build.DenseOfArray(y);
        var rest = response - design * design.QR().Solve(response);
        return rest * rest;
    }
}
