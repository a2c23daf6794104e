namespace WearWatch.Simulator.Best;

/// <summary>Sliding energy of an axle's tyres by slip, tabulated for one duty.</summary>
public sealed class SlidingTable
{
    private const double StepDeg = 0.01, MostDeg = 3;
    private readonly double[] _mean, _shifted;

    public SlidingTable(AxleType axle, Duty duty)
    {
        var n = (int)(MostDeg / StepDeg) + 2;
        (_mean, _shifted) = (new double[n], new double[n]);
        for (var i = 0; i < n; i++) (_mean[i], _shifted[i]) = TreadWear.Sliding(axle, duty, i * StepDeg);
    }

    /// <summary>The mean is even in slip, what leans outboard is odd.</summary>
    public (double Mean, double Shifted) At(double towardsToeInDeg)
    {
        var at = Math.Min(Math.Abs(towardsToeInDeg), MostDeg) / StepDeg;
        var i = (int)at;
        var part = at - i;
        var shifted = _shifted[i] + part * (_shifted[i + 1] - _shifted[i]);
        return (_mean[i] + part * (_mean[i + 1] - _mean[i]), towardsToeInDeg < 0 ? -shifted : shifted);
    }
}

/// <summary>
/// Wear against the loss that the usual rate alone would make: a tyre wears at its strip's rate × stage(worn), so that
/// ∫ dw ÷ stage(w) is the integral of the rate, whatever the rate did on the way.
/// </summary>
public sealed class StageTable
{
    private const double StepMm = 0.01;
    private readonly double _newDepthMm;
    /// <summary>Wear at each step of the integral.</summary>
    private readonly List<double> _worn = [0];

    public StageTable(double newDepthMm)
    {
        _newDepthMm = newDepthMm;
        while (_worn[^1] < newDepthMm)
        {
            var half = _worn[^1] + StepMm / 2 * Tyre.Stage(_worn[^1], newDepthMm); // midpoint rule
            _worn.Add(_worn[^1] + StepMm * Tyre.Stage(half, newDepthMm));
        }
    }

    /// <summary>Integral of the rate that has worn so much, mm.</summary>
    public double Integral(double wornMm)
    {
        var i = Math.Max(0, _worn.BinarySearch(wornMm) is var at && at < 0 ? ~at - 1 : at);
        return i >= _worn.Count - 1 ? i * StepMm : (i + (wornMm - _worn[i]) / (_worn[i + 1] - _worn[i])) * StepMm;
    }

    /// <summary>Wear, mm, when the rate's integral is so much; at most the whole tread.</summary>
    public double Worn(double integral)
    {
        var at = integral / StepMm;
        var i = (int)at;
        return i >= _worn.Count - 1 ? _newDepthMm : _worn[i] + (at - i) * (_worn[i + 1] - _worn[i]);
    }
}
