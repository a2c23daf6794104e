using MathNet.Numerics.LinearAlgebra;

namespace WearWatch.Diagnosis.Statistics;

/// <summary>Whether a few readings bear out a curve in place of a straight line: one that bends evenly (slow-down) or mostly at first (run-in).</summary>
public static class CurveEvidence
{
    /// <summary>Gain of Akaike's criterion from which the curve is believed (H. Akaike, IEEE Trans. Autom. Control 19 (1974) 716).</summary>
    public const double LeastGain = 4;

    /// <summary>Fewest readings that can show a curve.</summary>
    public const int LeastReadings = 5;

    /// <summary>True where a curve through the readings gains more than <see cref="LeastGain"/> over the line.</summary>
    /// <param name="x">Places.</param>
    /// <param name="y">Readings of equal error.</param>
    public static bool Bent(double[] x, double[] y) => Gain(x, y) is > LeastGain;

    /// <summary>AIC of the straight line less that of the better of a parabola and a line with a square root, the choice of two counted; null with fewer than five readings or four places.</summary>
    public static double? Gain(double[] x, double[] y)
    {
        if (x.Length != y.Length) throw new ArgumentException("x and y differ in length", nameof(y));
        if (x.Length < LeastReadings || x.Distinct().Count() < 4) return null;
        var (first, width) = (x.Min(), x.Max() - x.Min());
        var u = x.Select(v => (v - first) / width).ToArray();
        var line = Rest(u, y, null);
        var curve = Math.Min(Rest(u, y, v => v * v), Rest(u, y, Math.Sqrt));
        return curve <= 0 ? (line <= 0 ? -2 : double.PositiveInfinity) : x.Length * Math.Log(line / curve) - 2 - 2 * Math.Log(2);
    }

    private static double Rest(double[] u, double[] y, Func<double, double>? bend)
    {
        var design = Matrix<double>.Build.Dense(u.Length, bend is null ? 2 : 3, (i, j) => j switch { 0 => 1, 1 => u[i], _ => bend!(u[i]) });
        var response = Vector<double>.Build.DenseOfArray(y);
        var rest = response - design * design.QR().Solve(response);
        return rest * rest;
    }
}
