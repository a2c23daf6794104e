using Microsoft.ML;
using Microsoft.ML.Data;

namespace WearWatch.Diagnosis.Unusual;

/// <summary>
/// Directions in which vehicles of a fleet vary together, by Microsoft.ML's seeded principal component transform. Only the
/// directions are taken from it; distances are our own, because its anomaly score is relative and loses magnitude.
/// </summary>
internal static class PrincipalDirections
{
    /// <summary>Any fixed number: the same rows in the same order give the same directions.</summary>
    private const int Seed = 20261201;

    /// <param name="rows">Standardised figures about their robust centre, missing as 0; all of one length.</param>
    /// <param name="rank">Directions wanted, 1 to the length of a row.</param>
    /// <returns>Orthonormal directions, strongest first, each with its largest element positive.</returns>
    public static double[][] Of(IReadOnlyList<double[]> rows, int rank)
    {
        var length = rows[0].Length;
        var context = new MLContext(seed: Seed);
        var schema = SchemaDefinition.Create(typeof(Row));
        schema[nameof(Row.Figures)].ColumnType = new VectorDataViewType(NumberDataViewType.Single, length);
        IDataView View(IEnumerable<double[]> data) =>
            context.Data.LoadFromEnumerable(data.Select(d => new Row { Figures = Array.ConvertAll(d, v => (float)v) }), schema);

        var model = context.Transforms
            .ProjectToPrincipalComponents("Scores", nameof(Row.Figures), rank: rank, ensureZeroMean: false, seed: Seed)
            .Fit(View(rows));
        // The transform is linear: what it makes of the unit vectors is its matrix.
        var units = Enumerable.Range(0, length).Select(j => { var unit = new double[length]; unit[j] = 1; return unit; });
        var loadings = model.Transform(View(units)).GetColumn<float[]>("Scores").ToArray();
        return Orthonormal(Enumerable.Range(0, rank).Select(k => loadings.Select(row => (double)row[k]).ToArray()));
    }

    /// <summary>Gram–Schmidt in double precision over the transform's single-precision directions; a vanishing one is dropped.</summary>
    private static double[][] Orthonormal(IEnumerable<double[]> directions)
    {
        var kept = new List<double[]>();
        foreach (var direction in directions)
        {
            foreach (var earlier in kept)
            {
                var along = Dot(direction, earlier);
                for (var j = 0; j < direction.Length; j++) direction[j] -= along * earlier[j];
            }
            var norm = Math.Sqrt(Dot(direction, direction));
            if (!double.IsFinite(norm) || norm < 1e-3) continue;
            var flip = direction.MaxBy(Math.Abs) < 0 ? -1 / norm : 1 / norm;
            for (var j = 0; j < direction.Length; j++) direction[j] *= flip;
            kept.Add(direction);
        }
        return [.. kept];
    }

    private static double Dot(double[] a, double[] b)
    {
        var sum = 0.0;
        for (var j = 0; j < a.Length; j++) sum += a[j] * b[j];
        return sum;
    }

    private sealed class Row
    {
        public float[] Figures { get; set; } = [];
    }
}
