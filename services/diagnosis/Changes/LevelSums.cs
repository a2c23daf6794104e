namespace WearWatch.Diagnosis.Changes;

/// <summary>Running sums of weighted values: their mean and their squared error about it.</summary>
internal readonly record struct LevelSums(double W, double Wy, double Wyy)
{
    public double Mean => Wy / W;

    /// <summary>Squared error about the mean.</summary>
    public double Scatter => W > 0 ? Math.Max(0, Wyy - Wy * Wy / W) : 0;

    public LevelSums With(double y, double w) => new(W + w, Wy + w * y, Wyy + w * y * y);

    public LevelSums Less(LevelSums other) => new(W - other.W, Wy - other.Wy, Wyy - other.Wyy);
}
