using MathNet.Numerics.LinearAlgebra;

namespace WearWatch.Diagnosis.Statistics;

/// <summary>A random term: effects of a factor's levels, one a level and column, normal about zero and correlated within a level.</summary>
/// <param name="Level">Level of each case, 0 to <paramref name="Levels"/> − 1.</param>
/// <param name="Levels">Number of levels.</param>
/// <param name="Columns">What each effect multiplies, by case: a column of ones for an intercept, a covariate for a slope.</param>
public sealed record RandomTerm(int[] Level, int Levels, IReadOnlyList<double[]> Columns)
{
    /// <summary>Free parameters of the covariance of one level's effects.</summary>
    public int Parameters => Columns.Count * (Columns.Count + 1) / 2;
}

/// <summary>A fitted linear mixed model.</summary>
/// <param name="Fixed">Fixed effects with their standard errors.</param>
/// <param name="Covariances">Covariance of one level's effects, by term.</param>
/// <param name="ResidualVariance">Variance of a case about its fit.</param>
/// <param name="Deviance">−2 ln of the (restricted) likelihood.</param>
/// <param name="Effects">Predicted effects by term, level and column (best linear unbiased) with their standard errors given the variances.</param>
public sealed record MixedFit(IReadOnlyList<Estimate> Fixed, IReadOnlyList<double[,]> Covariances, double ResidualVariance, double Deviance, IReadOnlyList<Estimate[,]> Effects);

/// <summary>
/// Linear mixed model with nested or crossed random effects by maximum or restricted maximum likelihood. The likelihood is profiled
/// over fixed effects and residual variance; what remains, the factors of the effects' relative covariances, is searched by simplex.
/// Dense: meant for some hundreds of effects.
/// </summary>
/// <remarks>
/// N. M. Laird and J. H. Ware, Biometrics 38 (1982) 963; profiled criterion as in D. Bates, M. Mächler, B. Bolker and S. Walker,
/// J. Stat. Softw. 67:1 (2015), eqs. 33 and 41; simplex of J. A. Nelder and R. Mead, Comput. J. 7 (1965) 308.
/// </remarks>
public sealed class MixedModel
{
    private readonly Matrix<double> _x, _ztz, _ztx, _xtx;
    private readonly Vector<double> _zty, _xty;
    private readonly double _yty;
    private readonly IReadOnlyList<RandomTerm> _terms;
    private readonly int _n, _p, _q;
    private readonly bool _restricted;

    private MixedModel(double[] y, IReadOnlyList<double[]> x, IReadOnlyList<RandomTerm> terms, bool restricted)
    {
        (_terms, _restricted, _n, _p) = (terms, restricted, y.Length, x.Count);
        _q = terms.Sum(t => t.Levels * t.Columns.Count);
        _x = Matrix<double>.Build.DenseOfColumnArrays(x);
        var z = Matrix<double>.Build.Dense(_n, _q);
        var from = 0;
        foreach (var term in terms)
        {
            for (var i = 0; i < _n; i++)
                for (var c = 0; c < term.Columns.Count; c++) z[i, from + term.Level[i] * term.Columns.Count + c] = term.Columns[c][i];
            from += term.Levels * term.Columns.Count;
        }
        var response = Vector<double>.Build.DenseOfArray(y);
        (_ztz, _ztx, _xtx) = (z.TransposeThisAndMultiply(z), z.TransposeThisAndMultiply(_x), _x.TransposeThisAndMultiply(_x));
        (_zty, _xty, _yty) = (z.TransposeThisAndMultiply(response), _x.TransposeThisAndMultiply(response), response * response);
    }

    /// <param name="y">Response, one a case.</param>
    /// <param name="x">Columns of the fixed design, of full rank, fewer than cases.</param>
    /// <param name="terms">At least one random term.</param>
    /// <param name="restricted">Restricted maximum likelihood; else maximum likelihood.</param>
    public static MixedFit Fit(double[] y, IReadOnlyList<double[]> x, IReadOnlyList<RandomTerm> terms, bool restricted = true)
    {
        if (x.Count == 0 || x.Any(c => c.Length != y.Length) || y.Length <= x.Count) throw new ArgumentException("the fixed design does not fit the response", nameof(x));
        if (terms.Count == 0 || terms.Any(t => t.Level.Length != y.Length || t.Columns.Any(c => c.Length != y.Length))) throw new ArgumentException("a random term does not fit the response", nameof(terms));
        var model = new MixedModel(y, x, terms, restricted);
        double[] theta = [.. terms.SelectMany(t => Start(t.Columns.Count))];
        // A simplex that has shrunk may have stalled: begun anew at its best it goes on until it gains nothing.
        var best = model.Solve(theta).Deviance;
        for (var round = 0; round < 6; round++)
        {
            theta = Simplex.Minimise(t => model.Solve(t).Deviance, theta, step: round == 0 ? 0.5 : 0.1);
            var now = model.Solve(theta).Deviance;
            if (best - now < 1e-9 * (1 + Math.Abs(now)) && round > 0) break;
            best = now;
        }
        return model.Result(theta);
    }

    /// <summary>Lower triangle of a unit factor, by columns.</summary>
    private static IEnumerable<double> Start(int size)
    {
        for (var j = 0; j < size; j++)
            for (var i = j; i < size; i++) yield return i == j ? 1 : 0;
    }

    private sealed record Solution(double Deviance, Vector<double> Beta, Vector<double> U, double ResidualVariance, Matrix<double> Factor, Matrix<double> FixedPrecision, Matrix<double> Lambda);

    private Matrix<double> Lambda(double[] theta)
    {
        var lambda = Matrix<double>.Build.Dense(_q, _q);
        int from = 0, at = 0;
        foreach (var term in _terms)
        {
            var size = term.Columns.Count;
            for (var j = 0; j < size; j++)
                for (var i = j; i < size; i++, at++)
                    for (var level = 0; level < term.Levels; level++) lambda[from + level * size + i, from + level * size + j] = theta[at];
            from += term.Levels * size;
        }
        return lambda;
    }

    private Solution Solve(double[] theta)
    {
        var lambda = Lambda(theta);
        var inner = lambda.TransposeThisAndMultiply(_ztz * lambda) + Matrix<double>.Build.DenseIdentity(_q);
        var factor = inner.Cholesky();
        var (ltx, lty) = (lambda.TransposeThisAndMultiply(_ztx), lambda.TransposeThisAndMultiply(_zty));
        var (solvedX, solvedY) = (factor.Solve(ltx), factor.Solve(lty));
        var precision = _xtx - ltx.TransposeThisAndMultiply(solvedX);
        var fixedFactor = precision.Cholesky();
        var beta = fixedFactor.Solve(_xty - ltx.TransposeThisAndMultiply(solvedY));
        var u = solvedY - solvedX * beta;
        var rest = _yty - lty * u - _xty * beta;
        var freedom = _restricted ? _n - _p : _n;
        var deviance = factor.DeterminantLn + (_restricted ? fixedFactor.DeterminantLn : 0) + freedom * (1 + Math.Log(2 * Math.PI * Math.Max(rest, 1e-300) / freedom));
        return new(deviance, beta, u, rest / freedom, inner, precision, lambda);
    }

    private MixedFit Result(double[] theta)
    {
        var s = Solve(theta);
        var fixedCovariance = s.FixedPrecision.Inverse() * s.ResidualVariance;
        var b = s.Lambda * s.U;
        // Error of a predicted effect: what is left of its own spread, and what the fixed effects bring in.
        var inner = s.Factor.Inverse();
        var through = s.Lambda * inner * s.Lambda.TransposeThisAndMultiply(_ztx);
        var spread = s.Lambda * inner * s.Lambda.Transpose() * s.ResidualVariance + through * fixedCovariance * through.Transpose();
        var covariances = new List<double[,]>();
        var effects = new List<Estimate[,]>();
        int from = 0, at = 0;
        foreach (var term in _terms)
        {
            var size = term.Columns.Count;
            var factor = Matrix<double>.Build.Dense(size, size);
            for (var j = 0; j < size; j++)
                for (var i = j; i < size; i++) factor[i, j] = theta[at++];
            covariances.Add((factor * factor.Transpose() * s.ResidualVariance).ToArray());
            var table = new Estimate[term.Levels, size];
            for (var level = 0; level < term.Levels; level++)
                for (var c = 0; c < size; c++, from++) table[level, c] = new(b[from], Math.Sqrt(Math.Max(0, spread[from, from])));
            effects.Add(table);
        }
        return new([.. s.Beta.Select((v, i) => new Estimate(v, Math.Sqrt(fixedCovariance[i, i])))], covariances, s.ResidualVariance, s.Deviance, effects);
    }
}
