namespace WearWatch.Simulator.Best;

/// <summary>When a supposed fault came, days from the start of the window; none where <see cref="Mode"/> is null.</summary>
public readonly record struct FaultCourse(FaultMode? Mode, double Start, double Full)
{
    /// <summary>Shares of the full fault between which everything is worked out by straight lines.</summary>
    public static readonly double[] None = [0], Step = [0, 1], Ramp = [0, 0.25, 0.5, 0.75, 1];

    public double[] Nodes => Mode switch { null => None, FaultMode.Drifting => Ramp, _ => Step };

    public double Share(double day) => Mode switch
    {
        null => 0,
        FaultMode.Drifting => Math.Clamp((day - Start) / (Full - Start), 0, 1),
        _ => day >= Start ? 1 : 0,
    };

    /// <summary>Weights of the nodes at a day.</summary>
    public void At(double day, Span<double> weights)
    {
        weights.Clear();
        if (Mode is null)
        {
            weights[0] = 1;
            return;
        }
        var last = weights.Length - 1;
        var at = Share(day) * last;
        var low = Math.Min((int)at, last - 1);
        weights[low + 1] = at - low;
        weights[low] = 1 - (at - low);
    }

    /// <summary>Distance (with what weighs it) driven at each node between two days: ∫ weight of the node × d distance.</summary>
    public void Between(DistanceClock clock, double from, double to, Span<double> weights)
    {
        weights.Clear();
        if (Mode is null)
        {
            weights[0] = clock.Distance(to) - clock.Distance(from);
            return;
        }
        var last = weights.Length - 1;
        // A kerb is struck at noon of a day whose whole distance counts as run after it.
        var start = Mode == FaultMode.Sudden ? Math.Floor(Start) : Start;
        var first = Math.Clamp(start, from, to);
        weights[0] += clock.Distance(first) - clock.Distance(from);
        if (Mode != FaultMode.Drifting)
        {
            weights[last] += clock.Distance(to) - clock.Distance(first);
            return;
        }
        var step = (Full - start) / last;
        for (var j = 0; j < last; j++)
        {
            var (a, b) = (Math.Clamp(start + j * step, from, to), Math.Clamp(start + (j + 1) * step, from, to));
            if (b <= a) continue;
            var distance = clock.Distance(b) - clock.Distance(a);
            var later = (clock.Moment(b) - clock.Moment(a) - (start + j * step) * distance) / step;
            weights[j + 1] += later;
            weights[j] += distance - later;
        }
        var end = Math.Clamp(Full, from, to);
        weights[last] += clock.Distance(to) - clock.Distance(end);
    }
}

/// <summary>Distance run up to a day, even within each day, and its first moment.</summary>
public sealed class DistanceClock
{
    private readonly double _from;
    private readonly double[] _perDay, _distance, _moment;

    /// <param name="from">Day at which it starts.</param>
    /// <param name="perDay">Distance of each day.</param>
    public DistanceClock(double from, double[] perDay)
    {
        (_from, _perDay) = (from, perDay);
        (_distance, _moment) = (new double[perDay.Length + 1], new double[perDay.Length + 1]);
        for (var d = 0; d < perDay.Length; d++)
        {
            _distance[d + 1] = _distance[d] + perDay[d];
            _moment[d + 1] = _moment[d] + perDay[d] * (from + d + 0.5);
        }
    }

    private (int Day, double Part) Place(double day)
    {
        var at = Math.Clamp(day - _from, 0, _perDay.Length);
        var whole = Math.Min((int)at, _perDay.Length - 1);
        return (whole, at - whole);
    }

    public double Distance(double day)
    {
        var (d, part) = Place(day);
        return _distance[d] + part * _perDay[d];
    }

    /// <summary>∫ day × d distance.</summary>
    public double Moment(double day)
    {
        var (d, part) = Place(day);
        return _moment[d] + part * _perDay[d] * (_from + d + part / 2);
    }

    /// <summary>Day at which a distance is reached, by bisection.</summary>
    public double DayOf(double distance)
    {
        if (distance <= 0) return _from;
        var d = Array.BinarySearch(_distance, distance);
        if (d < 0) d = ~d - 1;
        if (d >= _perDay.Length) return _from + _perDay.Length;
        return _from + d + (_perDay[d] > 0 ? (distance - _distance[d]) / _perDay[d] : 0);
    }
}
