using MathNet.Numerics.LinearAlgebra;

namespace WearWatch.Diagnosis.Roads;

/// <summary>Covariance of gains, crowns and component levels once the vehicles are eliminated: a dense border and one level a component.</summary>
internal sealed class RoadBorder
{
    private readonly int _border;
    private readonly double[] _level;  // what holds each component's level
    private readonly double[] _across; // level against border, over the level's own
    private readonly Matrix<double> _covariance;

    /// <param name="s">The system.</param>
    /// <param name="border">Unknowns of the border.</param>
    /// <param name="columns">The system's columns for them, and for all levels at once.</param>
    /// <param name="answers">The vehicles' answers to them, row by lane.</param>
    public RoadBorder(RoadSystem s, int[] border, double[][] columns, double[] answers)
    {
        _border = border.Length;
        (_level, _across) = (new double[s.Components], new double[s.Components * _border]);
        var held = new double[_border, _border];
        for (var y = 0; y < _border; y++)
            for (var other = 0; other < _border; other++) held[y, other] = (columns[y][border[other]] + columns[other][border[y]]) / 2;
        for (var k = 0; k < s.Components; k++)
        {
            _level[k] = columns[_border][s.LevelAt + k];
            for (var y = 0; y < _border; y++) _across[k * _border + y] = columns[y][s.LevelAt + k];
        }
        for (var i = 0; i < s.LevelAt; i++)
        {
            var (mine, k) = (i * columns.Length, s.Component[i / RoadProblem.Lanes]);
            _level[k] -= columns[_border][i] * answers[mine + _border];
            for (var y = 0; y < _border; y++)
            {
                _across[k * _border + y] -= columns[_border][i] * answers[mine + y];
                for (var other = 0; other <= y; other++)
                {
                    var taken = (columns[y][i] * answers[mine + other] + columns[other][i] * answers[mine + y]) / 2;
                    held[y, other] -= taken;
                    if (other < y) held[other, y] -= taken;
                }
            }
        }
        for (var k = 0; k < s.Components; k++)
            for (var y = 0; y < _border; y++)
            {
                for (var other = 0; other < _border; other++) held[y, other] -= _across[k * _border + y] * _across[k * _border + other] / _level[k];
            }
        for (var i = 0; i < _across.Length; i++) _across[i] /= _level[i / _border];
        _covariance = _border == 0 ? Matrix<double>.Build.Dense(1, 1) : Matrix<double>.Build.DenseOfArray(held).Cholesky().Solve(Matrix<double>.Build.DenseIdentity(_border));
    }

    public double BorderVariance(int y) => _covariance[y, y];

    public double LevelVariance(int component)
    {
        Span<double> level = stackalloc double[_border + 1];
        level[_border] = 1;
        return Of(component, level);
    }

    /// <summary>Variance of a sum of the border's unknowns and the component's level, whose factor comes last.</summary>
    public double Of(int component, ReadOnlySpan<double> factors)
    {
        var level = factors[_border];
        Span<double> left = stackalloc double[_border];
        for (var y = 0; y < _border; y++) left[y] = factors[y] - level * _across[component * _border + y];
        var variance = level * level / _level[component];
        for (var y = 0; y < _border; y++)
            for (var other = 0; other < _border; other++) variance += left[y] * left[other] * _covariance[y, other];
        return variance;
    }
}
