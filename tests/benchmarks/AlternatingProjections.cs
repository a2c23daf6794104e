namespace WearWatch.Benchmarks;

/// <summary>The plain reference for two-way effects: means by row, then by column, in turn, one whole-array operation after another.</summary>
internal static class AlternatingProjections
{
    private const int MostSweeps = 2000;

    /// <summary>Sweeps until the sum of squared residuals is no more than the goal.</summary>
    public static (int Sweeps, double Squares) Fit(int[] row, int[] column, float[] values, double goal)
    {
        var (rows, columns) = (row.Max() + 1, column.Max() + 1);
        var (ones, y) = (Enumerable.Repeat(1.0, values.Length).ToArray(), Array.ConvertAll(values, v => (double)v));
        var (perRow, perColumn) = (Sums(row, ones, rows), Sums(column, ones, columns));
        var (rowEffect, columnEffect) = (new double[rows], new double[columns]);
        var squares = double.PositiveInfinity;
        var sweep = 0;
        while (sweep < MostSweeps && squares > goal)
        {
            sweep++;
            rowEffect = Means(Sums(row, Less(y, columnEffect, column), rows), perRow);
            columnEffect = Means(Sums(column, Less(y, rowEffect, row), columns), perColumn);
            // Looked at every fourth sweep only: it costs as much as half a sweep.
            if (sweep % 4 == 0) squares = Squares(Less(Less(y, rowEffect, row), columnEffect, column));
        }
        return (sweep, squares);
    }

    private static double[] Less(double[] y, double[] effect, int[] index)
    {
        var left = new double[y.Length];
        for (var i = 0; i < y.Length; i++) left[i] = y[i] - effect[index[i]];
        return left;
    }

    private static double[] Sums(int[] index, double[] values, int length)
    {
        var sums = new double[length];
        for (var i = 0; i < values.Length; i++) sums[index[i]] += values[i];
        return sums;
    }

    private static double[] Means(double[] sums, double[] counts)
    {
        var means = new double[sums.Length];
        for (var i = 0; i < sums.Length; i++) means[i] = counts[i] > 0 ? sums[i] / counts[i] : 0;
        return means;
    }

    private static double Squares(double[] values)
    {
        var sum = 0.0;
        foreach (var x in values) sum += x * x;
        return sum;
    }
}
