namespace WearWatch.Simulator.Best;

/// <summary>A tyre between two of its readings on one position with one set of wheels.</summary>
internal sealed class TyreSpan(Position position, bool turned, int set, DistanceClock clock, double down, double from, double to)
{
    public Position Position => position;
    public bool Turned => turned;
    public int Set => set;
    /// <summary>Distance weighed by month.</summary>
    public DistanceClock Clock => clock;
    /// <summary>Share of the distance it runs on the road.</summary>
    public double Down => down;
    public double From => from;
    public double To => to;
    /// <summary>Index of the reading taken at its end; none where negative.</summary>
    public int Reading { get; set; } = -1;
    public double[]? KnownWear { get; private set; }
    public double KnownFeather { get; private set; }

    /// <summary>Its wheel angles are known: nothing about it changes with what is supposed.</summary>
    public void Fix(double[] wear, double slipTowardsToeIn) => (KnownWear, KnownFeather) = (wear, Tyre.SettledFeather(slipTowardsToeIn));
}

/// <summary>One tyre's wear and feather for what is supposed, and the errors of its readings.</summary>
internal sealed class TyreModel
{
    /// <summary>Points at which the memory of feather is sampled: middles of equal shares of an exponential.</summary>
    private static readonly double[] s_lagsKm = [.. Enumerable.Range(0, 6).Select(j => -Tyre.FeatherMemoryKm * Math.Log(1 - (j + 0.5) / 6))];

    private sealed record Read(int Day, bool Turned, double[] MeanMm, double[] VarianceMm2, List<DepthRead> Coarse, List<EdgeRead> Edges, List<RubRead> Rubs, (int Span, double Day)[] Lags);

    /// <summary>Variance that takes a reading out of the normal errors.</summary>
    private const double FarMm2 = 1e6;

    private readonly Tyre _tyre;
    private readonly int _grooves;
    private readonly VehicleLog _log;
    private readonly StageTable _stage;
    private readonly List<TyreSpan> _spans = [];
    private readonly List<(DistanceClock Km, double From, double To, double Down)> _life = [];
    private readonly List<Read> _reads = [];
    private readonly double[] _factor, _start;
    private double[,] _smooth = new double[0, 0];
    private double[] _feather = [], _whiten = [];
    private readonly double[] _integral = new double[Tyre.Strips], _depth = new double[Tyre.Strips], _weights = new double[5];

    public TyreModel(Tyre tyre, int grooves, VehicleLog log)
    {
        (_tyre, _grooves, _log, _stage) = (tyre, grooves, log, new(tyre.NewDepthMm));
        _factor = [.. tyre.StripFactor];
        if (tyre.Turned) Array.Reverse(_factor);
        _start = [.. tyre.NewDepths.Select(d => _stage.Integral(tyre.NewDepthMm - d))];
    }

    public IReadOnlyList<TyreSpan> Spans => _spans;
    public int Residuals { get; private set; }

    public void Add(Stint stint, int set, DistanceClock weighed, DistanceClock km, double from, double to, double down)
    {
        _life.Add((km, from, to, down));
        var days = _log.Depths.Where(d => d.Tyre == _tyre && d.Day >= from && d.Day < to && d.Day > 0).Select(d => d.Day).Distinct().Order().ToList();
        var at = from;
        foreach (var day in days)
        {
            if (day > at || _spans.Count == 0 || from >= 0) _spans.Add(new(stint.Position, stint.Turned, set, weighed, down, at, day) { Reading = _reads.Count });
            AddRead(day, stint.Turned);
            at = day;
        }
        if (at < to) _spans.Add(new(stint.Position, stint.Turned, set, weighed, down, at, to));
    }

    private void AddRead(int day, bool turned)
    {
        var here = _log.Depths.Where(d => d.Tyre == _tyre && d.Day == day).ToLookup(d => d.Groove);
        var coarse = here.SelectMany(g => g).Where(d => d.StepMm > 0.5).ToList();
        double Mean(int g) => here[g].Average(d => d.Mm - d.KnownMm);
        double Variance(int g) => here[g].Average(d => d.RepeatMm * d.RepeatMm + d.StepMm * d.StepMm / 12) / here[g].Count();
        _reads.Add(new(day, turned, [.. Enumerable.Range(0, _grooves).Select(Mean)], [.. Enumerable.Range(0, _grooves).Select(Variance)], coarse,
            [.. _log.Edges.Where(e => e.Tyre == _tyre && e.Day == day)], [.. _log.Rubs.Where(r => r.Tyre == _tyre && r.Day == day)], []));
    }

    /// <summary>Cuts off what lies after the last reading and makes ready; false where it was never read.</summary>
    public bool Close()
    {
        if (_reads.Count == 0) return false;
        while (_spans[^1].Reading < 0) _spans.RemoveAt(_spans.Count - 1);
        for (var i = 0; i < _reads.Count; i++) _reads[i] = _reads[i] with { Lags = Lags(_reads[i].Day) };
        (_smooth, _feather) = (new double[_reads.Count, _grooves], new double[_reads.Count]);
        _whiten = Whitening();
        Residuals = _reads.Count * _grooves + _reads.Sum(r => r.Edges.Count);
        return true;
    }

    private double KmAt(double day) => _life.Where(l => l.From < day).Sum(l => l.Down * (l.Km.Distance(Math.Min(day, l.To)) - l.Km.Distance(l.From)));

    private (int, double)[] Lags(int day)
    {
        var now = KmAt(day);
        var lags = new List<(int, double)>();
        foreach (var lag in s_lagsKm)
        {
            if (lag > now) continue; // before it was new
            double low = _life[0].From, high = day;
            for (var i = 0; i < 30; i++)
            {
                var middle = (low + high) / 2;
                if (now - KmAt(middle) > lag) low = middle;
                else high = middle;
            }
            var span = _spans.FindIndex(s => s.To >= low);
            lags.Add((Math.Max(0, span), low));
        }
        return [.. lags];
    }

    /// <summary>Inverse of the lower Cholesky factor of the readings' covariance: repeat and rounding, and the grooves' own deviations with their memory.</summary>
    private double[] Whitening()
    {
        var n = _reads.Count;
        var covariance = new double[n * n];
        for (var i = 0; i < n; i++)
            for (var j = 0; j < n; j++)
                covariance[i * n + j] = Tyre.GrooveDeviationMm * Tyre.GrooveDeviationMm * Math.Exp(-Math.Abs(KmAt(_reads[i].Day) - KmAt(_reads[j].Day)) / Tyre.DeviationMemoryKm)
                    + (i != j ? 0 : _reads[i].Coarse.Count > 0 ? FarMm2 : _reads[i].VarianceMm2[0]);
        Cholesky.Factor(covariance, n);
        return Cholesky.InverseOfFactor(covariance, n);
    }

    public void Predict(FaultCourse course, VehicleModel model)
    {
        var nodes = course.Nodes.Length;
        var weights = _weights.AsSpan(0, nodes);
        _start.CopyTo(_integral, 0);
        foreach (var span in _spans)
        {
            if (span.KnownWear is { } known)
            {
                for (var s = 0; s < Tyre.Strips; s++) _integral[span.Turned ? Tyre.Strips - 1 - s : s] += _factor[span.Turned ? Tyre.Strips - 1 - s : s] * known[s];
            }
            else
            {
                course.Between(span.Clock, span.From, span.To, weights);
                for (var k = 0; k < nodes; k++)
                {
                    if (weights[k] == 0) continue;
                    var rates = model.RatesAt(span.Set, k, span.Position.Index);
                    var km = weights[k] * span.Down / 1000;
                    if (span.Turned)
                        for (var s = 0; s < Tyre.Strips; s++) _integral[Tyre.Strips - 1 - s] += _factor[Tyre.Strips - 1 - s] * km * rates[s];
                    else
                        for (var s = 0; s < Tyre.Strips; s++) _integral[s] += _factor[s] * km * rates[s];
                }
            }
            if (span.Reading >= 0) PredictRead(span.Reading);
        }
        for (var r = 0; r < _reads.Count; r++)
            if (_reads[r].Edges.Count + _reads[r].Rubs.Count > 0) _feather[r] = FeatherAt(_reads[r], course, model, nodes);
    }

    private void PredictRead(int r)
    {
        var turned = _reads[r].Turned;
        for (var s = 0; s < Tyre.Strips; s++)
        {
            var own = turned ? Tyre.Strips - 1 - s : s;
            _depth[s] = _tyre.NewDepthMm - _stage.Worn(_integral[own]);
        }
        for (var g = 0; g < _grooves; g++) _smooth[r, g] = Tyre.AtGroove(_depth, g, _grooves);
    }

    private double FeatherAt(Read read, FaultCourse course, VehicleModel model, int nodes)
    {
        var weights = _weights.AsSpan(0, nodes);
        double sum = 0;
        foreach (var (index, day) in read.Lags)
        {
            var span = _spans[index];
            double here = 0;
            if (span.KnownWear is not null) here = span.KnownFeather;
            else
            {
                course.At(day, weights);
                for (var k = 0; k < nodes; k++)
                    if (weights[k] != 0) here += weights[k] * model.SettledAt(span.Set, k, span.Position.Index);
            }
            sum += span.Turned == read.Turned ? here : -here;
        }
        return sum / s_lagsKm.Length;
    }

    /// <summary>Writes the normal errors; gauges in coarse steps are left to the other likelihood.</summary>
    public int Errors(Span<double> errors)
    {
        var (n, at) = (_reads.Count, 0);
        for (var g = 0; g < _grooves; g++)
            for (var i = 0; i < n; i++)
            {
                double sum = 0;
                for (var j = 0; j <= i; j++) sum += _whiten[i * n + j] * (_reads[j].MeanMm[g] - _smooth[j, g]);
                errors[at++] = sum;
            }
        for (var r = 0; r < n; r++)
            foreach (var edge in _reads[r].Edges)
                errors[at++] = (edge.Mm - _feather[r]) / Math.Sqrt(TreadSurveys.EdgeRepeatMm * TreadSurveys.EdgeRepeatMm + edge.StepMm * edge.StepMm / 12);
        return at;
    }

    /// <summary>Log likelihood of what is not normal: readings in steps far coarser than their repeat, and what the hand felt.</summary>
    public double LogOfCoarseAndFelt()
    {
        double sum = 0;
        for (var r = 0; r < _reads.Count; r++)
        {
            foreach (var read in _reads[r].Coarse)
            {
                var sd = Math.Sqrt(read.RepeatMm * read.RepeatMm + Tyre.GrooveDeviationMm * Tyre.GrooveDeviationMm);
                var off = read.Mm - read.KnownMm - _smooth[r, read.Groove];
                sum += Math.Log(Math.Max(1e-9, NormalLaw.Below((off + read.StepMm / 2) / sd) - NormalLaw.Below((off - read.StepMm / 2) / sd)));
            }
            foreach (var rub in _reads[r].Rubs)
            {
                var (felt, wrong) = TreadSurveys.RubChances(_feather[r]);
                var outward = _feather[r] > 0 ? 1 - wrong : wrong;
                sum += Math.Log(rub.Catches == 0 ? 1 - felt : felt * (rub.Catches > 0 ? outward : 1 - outward));
            }
        }
        return sum;
    }
}
