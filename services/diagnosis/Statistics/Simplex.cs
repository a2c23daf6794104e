namespace WearWatch.Diagnosis.Statistics;

/// <summary>Minimum of a function of a few variables without derivatives.</summary>
/// <remarks>J. A. Nelder and R. Mead, Comput. J. 7 (1965) 308, with their coefficients 1, 2, 1/2 and 1/2; deterministic.</remarks>
internal static class Simplex
{
    private const int MostSteps = 2000;

    public static double[] Minimise(Func<double[], double> f, double[] start, double step)
    {
        var n = start.Length;
        var points = new List<(double[] At, double Value)> { (start, f(start)) };
        for (var i = 0; i < n; i++)
        {
            var at = (double[])start.Clone();
            at[i] += step;
            points.Add((at, f(at)));
        }
        for (var count = 0; count < MostSteps; count++)
        {
            points.Sort((a, b) => a.Value.CompareTo(b.Value));
            if (Width(points) < 1e-8) break;
            var middle = new double[n];
            foreach (var (at, _) in points.Take(n))
                for (var i = 0; i < n; i++) middle[i] += at[i] / n;
            var worst = points[n];
            var reflected = Along(1);
            if (reflected.Value < points[0].Value)
            {
                var expanded = Along(2);
                points[n] = expanded.Value < reflected.Value ? expanded : reflected;
            }
            else if (reflected.Value < points[n - 1].Value)
            {
                points[n] = reflected;
            }
            else
            {
                var contracted = Along(reflected.Value < worst.Value ? 0.5 : -0.5);
                if (contracted.Value < Math.Min(worst.Value, reflected.Value)) points[n] = contracted;
                else for (var k = 1; k <= n; k++) points[k] = Halfway(points[k].At);
            }

            (double[] At, double Value) Along(double factor)
            {
                double[] at = [.. middle.Select((m, i) => m + factor * (m - worst.At[i]))];
                return (at, f(at));
            }

            (double[] At, double Value) Halfway(double[] from)
            {
                double[] at = [.. from.Select((v, i) => (v + points[0].At[i]) / 2)];
                return (at, f(at));
            }
        }
        return points.MinBy(p => p.Value).At;
    }

    private static double Width(List<(double[] At, double Value)> points) => points.Skip(1).Max(p => p.At.Zip(points[0].At, (a, b) => Math.Abs(a - b)).Max());
}
