namespace WearWatch.Simulator.Best;

/// <summary>
/// What one vehicle's readings and signals would be, noise apart, for any wheel angles and any course of a fault, everything
/// else being as it truly was; and how far what was read lies from that. The simulator's own physics, so arranged that only
/// what a fault changes is worked out anew.
/// </summary>
public sealed class VehicleModel
{
    /// <summary>Wheels with the tyres of some time: tyres of before the window by axle, then one set from each change of tyres to the next.</summary>
    private sealed record Set(StraightRunning OnRoads, StraightRunning? Flat, WheelState[] Wheels, bool[] Needed);

    private sealed record Trip(TripMeans Means, int Set, double SteerOffsetDeg, double TorqueOffsetNm);

    private readonly FleetVehicle _v;
    private readonly VehicleLog _log;
    private readonly int _days;
    private readonly double[][] _profiles;
    private readonly SlidingTable[] _sliding;
    private readonly List<Set> _sets = [];
    private readonly List<TyreModel> _tyres = [];
    private readonly List<Trip> _trips = [];
    private readonly List<(BenchRead Read, int Quantity)> _bench = [];
    private readonly List<BenchWord> _benchWords;
    private readonly List<DriverWeek> _driverWeeks;
    private readonly Geometry _target, _sound, _fault, _whole;
    private readonly Geometry[] _rolling;
    private readonly double[][] _slip;
    private readonly double[] _weights = new double[5];

    public AngleSpace Angles { get; }
    public FleetVehicle Vehicle => _v;
    /// <summary>Days in the window.</summary>
    public int Days => _days;
    /// <summary>First day from which the wheel angles are asked for; before it they are known (a repair).</summary>
    public double KnownUntil { get; }

    public VehicleModel(VehicleHistory history, Scenario scenario)
    {
        (_v, _log, _days) = (history.Vehicle, history.Log!, scenario.Days);
        var type = _v.Type;
        var repaired = _v.AfterRepair is not null;
        KnownUntil = repaired ? Math.Floor(_v.Fault!.RepairDay) + 1 : double.NegativeInfinity;
        Angles = new(type, repaired ? _v.AfterRepair! : _v.Sound, repaired ? Geometry.RepairedSpread : Geometry.SoundSpread);
        (_sound, _fault, _whole, _target) = (new(type.Axles.Length), new(type.Axles.Length), new(type.Axles.Length), new(type.Axles.Length));
        Angles.Place(new double[Angles.Count], _target);
        _rolling = [.. Enumerable.Range(0, 5).Select(_ => new Geometry(type.Axles.Length))];
        _slip = [.. Enumerable.Range(0, 5).Select(_ => new double[_v.Positions.Length])];
        _profiles = [.. type.Axles.Select((_, a) => history.Tyres.Profile(a))];
        var tables = type.Axles.DistinctBy(a => a.ServiceSlipDeg).ToDictionary(a => a.ServiceSlipDeg, a => new SlidingTable(a, _v.Duty));
        _sliding = [.. type.Axles.Select(a => tables[a.ServiceSlipDeg])];
        AddSets();
        AddTyres();
        foreach (var trip in _log.Trips.Where(t => t.Day >= KnownUntil)) AddTrip(trip);
        _bench = [.. _log.Bench.Where(b => b.Day + 0.5 >= KnownUntil).Select(b => (b, b.Index))];
        _benchWords = repaired ? [] : _log.BenchWords;
        _driverWeeks = [.. _log.DriverWeeks.Where(w => w.Day >= KnownUntil)];
        Residuals = _tyres.Sum(t => t.Residuals) + 2 * _trips.Count + _bench.Count;
    }

    /// <summary>How many normal errors there are.</summary>
    public int Residuals { get; }

    private double[] EarlierPerDay(EarlierLife life) => [.. Enumerable.Repeat(life.Km / (7 * life.Weeks), 7 * life.Weeks)];

    private int FirstWindowSet => _v.Type.Axles.Length;

    private int SetOn(double day) => FirstWindowSet + _log.TyreEvenings.Count(e => e + 1 <= day);

    private void AddSets()
    {
        var windows = _log.TyreEvenings.Select(e => e + 1).Prepend(0).Append(_days).ToList();
        var wheels = Enumerable.Range(0, FirstWindowSet).Select(a => _log.Earlier[a].Wheels)
            .Concat(Enumerable.Range(0, windows.Count - 1).Select(i => _log.Days[Math.Min((windows[i] + windows[i + 1]) / 2, _days - 1)].Wheels)).ToList();
        for (var i = 0; i < wheels.Count; i++)
        {
            var flat = i >= FirstWindowSet && !_v.Type.IsTrailer ? new StraightRunning(_v.Type, _v.Positions, wheels[i], 0) : null;
            _sets.Add(new(new(_v.Type, _v.Positions, wheels[i], _v.Duty.MeanBank), flat, wheels[i], new bool[_v.Positions.Length]));
        }
    }

    private void AddTyres()
    {
        var window = new DistanceClock(0, [.. _log.Days.Select(d => d.Km)]);
        var weighed = new DistanceClock(0, [.. _log.Days.Select(d => d.Km * d.Month)]);
        var earlier = _log.Earlier.ToDictionary(e => e.Key, e => new DistanceClock(-7.0 * e.Value.Weeks, EarlierPerDay(e.Value)));
        foreach (var stints in _log.Stints.GroupBy(s => s.Tyre))
        {
            var tyre = new TyreModel(stints.Key, _v.Type.Grooves, _log);
            foreach (var stint in stints.OrderBy(s => s.From))
            {
                var axle = stint.Position.Axle;
                if (stint.From < 0) tyre.Add(stint, axle, earlier[axle], earlier[axle], stint.From, 0, _v.Type.Axles[axle].DownShare);
                for (var from = Math.Max(0, stint.From); from < Math.Min(stint.To, _days);)
                {
                    var set = SetOn(from);
                    var to = Math.Min(Math.Min(stint.To, _days), set - FirstWindowSet < _log.TyreEvenings.Count ? _log.TyreEvenings[set - FirstWindowSet] + 1 : _days);
                    if (from < KnownUntil) to = Math.Min(to, KnownUntil);
                    tyre.Add(stint, set, weighed, window, from, to, _v.Type.Axles[axle].DownShare);
                    from = to;
                }
            }
            if (!tyre.Close()) continue;
            _tyres.Add(tyre);
            foreach (var span in tyre.Spans)
            {
                _sets[span.Set].Needed[span.Position.Index] = true;
                if (span.To <= KnownUntil) span.Fix(KnownWear(span), -span.Position.Sign * KnownSlip(span));
            }
        }
    }

    /// <summary>Slip over a span whose wheel angles are known: that of its middle.</summary>
    private double KnownSlip(TyreSpan span)
    {
        var set = _sets[span.Set];
        set.OnRoads.Solve(_v.GeometryAt((span.From + span.To) / 2).Rolling(_v.Type), _slip[0]);
        return _slip[0][span.Position.Index] + OneWay(span.Position);
    }

    /// <summary>Rate integral of each strip over a span whose wheel angles are known, mm.</summary>
    private double[] KnownWear(TyreSpan span)
    {
        var sum = new double[Tyre.Strips];
        var rates = new double[Tyre.Strips];
        // A week at a time, as earlier life was lived.
        var parts = Math.Max(1, (int)Math.Ceiling((span.To - span.From) / 7));
        for (var i = 0; i < parts; i++)
        {
            var (a, b) = (span.From + 7 * i, Math.Min(span.From + 7 * i + 7, span.To));
            var g = _v.GeometryAt((a + b) / 2);
            _sets[span.Set].OnRoads.Solve(g.Rolling(_v.Type), _slip[0]);
            Rates(span.Position, g, _slip[0][span.Position.Index], rates);
            for (var s = 0; s < sum.Length; s++) sum[s] += rates[s] * span.Down / 1000 * (span.Clock.Distance(b) - span.Clock.Distance(a));
        }
        return sum;
    }

    private void AddTrip(TripMeans means)
    {
        var set = SetOn(means.Day);
        var here = new StraightRunning(_v.Type, _v.Positions, _log.Days[means.Day].Wheels, 0).Solve(_target.Rolling(_v.Type), _slip[0]);
        var usual = _sets[set].Flat!.Solve(_target.Rolling(_v.Type), _slip[0]);
        _trips.Add(new(means, set, here.SteerDeg - usual.SteerDeg, here.TorqueNm - usual.TorqueNm));
    }

    private double OneWay(Position p) => _v.Duty.OneWayDeg * (p.Axle == 0 && !_v.Type.IsTrailer ? 1 : 0.5);

    private void Rates(Position p, Geometry g, double steadySlipDeg, Span<double> rates)
    {
        var (mean, shifted) = _sliding[p.Axle].At(-p.Sign * (steadySlipDeg + OneWay(p)));
        var camber = g.Camber(p.Axle, p.Left);
        for (var s = 0; s < Tyre.Strips; s++)
            rates[s] = TreadWear.StripRate(_v.Type.Axles[p.Axle], _v.Duty, mean, shifted, camber, _v.PressureShare[p.Index], 1, _profiles[p.Axle], s);
    }

    /// <summary>Works out everything for some wheel angles and a course; the answer is asked for next.</summary>
    /// <param name="normals">The sound vehicle's angles.</param>
    /// <param name="perDeg">Change of wheel angles of the full fault per degree of its quantity; null for a sound vehicle.</param>
    /// <param name="quantity">The quantity that goes wrong.</param>
    /// <param name="tolerances">Where the fault brings it, signed tolerances from target.</param>
    public void Suppose(ReadOnlySpan<double> normals, Geometry? perDeg, int quantity, double tolerances, FaultCourse course)
    {
        Angles.Place(normals, _sound);
        if (perDeg is null) _fault.Set(_sound, 0);
        else
        {
            var tolerance = Angles.Quantities[quantity].Tolerance;
            _fault.Set(perDeg, tolerance.Target + tolerances * tolerance.PlusMinus - Angles.Value(_sound, quantity));
        }
        Work(course);
    }

    /// <summary>The same for angles given outright.</summary>
    public void Suppose(Geometry sound, Geometry? change, FaultCourse course)
    {
        _sound.Set(sound, 1);
        _fault.Set(change ?? sound, change is null ? 0 : 1);
        Work(course);
    }

    private void Work(FaultCourse course)
    {
        _course = course;
        var nodes = course.Nodes.Length;
        _steer ??= new double[_sets.Count, 5];
        _torque ??= new double[_sets.Count, 5];
        _rates ??= new double[_sets.Count * 5 * _v.Positions.Length * Tyre.Strips];
        _settled ??= new double[_sets.Count * 5 * _v.Positions.Length];
        for (var k = 0; k < nodes; k++)
        {
            _whole.Set(_sound, 1);
            _whole.Add(_fault, course.Nodes[k]);
            _rolling[k].Set(_whole, 1);
            for (var a = 0; a < _rolling[k].Axles; a++)
                _rolling[k].TotalToe[a] -= (a == 0 && !_v.Type.IsTrailer ? Tolerances.FrontTotalToe(_v.Type.Class) : Tolerances.RearTotalToe(_v.Type.Class)).Target;
            for (var i = 0; i < _sets.Count; i++) AtNode(i, k);
        }
        foreach (var tyre in _tyres) tyre.Predict(course, this);
    }

    private FaultCourse _course;
    private double[,]? _steer, _torque;
    private double[]? _rates, _settled;

    private int Row(int set, int node, int position) => (set * 5 + node) * _v.Positions.Length + position;

    private void AtNode(int i, int k)
    {
        var set = _sets[i];
        if (set.Needed.AsSpan().Contains(true))
        {
            set.OnRoads.Solve(_rolling[k], _slip[k]);
            foreach (var p in _v.Positions)
            {
                if (!set.Needed[p.Index]) continue;
                var row = Row(i, k, p.Index);
                Rates(p, _whole, _slip[k][p.Index], _rates.AsSpan(row * Tyre.Strips, Tyre.Strips));
                _settled![row] = Tyre.SettledFeather(-p.Sign * (_slip[k][p.Index] + OneWay(p)));
            }
        }
        if (set.Flat is null || (_trips.Count == 0 && _driverWeeks.Count == 0)) return;
        (_steer![i, k], _, _torque![i, k]) = set.Flat.Solve(_rolling[k], _slip[k]);
    }

    /// <summary>Rates of the strips of a position, mm per 1000 km, at a node.</summary>
    internal ReadOnlySpan<double> RatesAt(int set, int node, int position) => _rates.AsSpan(Row(set, node, position) * Tyre.Strips, Tyre.Strips);

    /// <summary>Fin height that a position's slip leads to at a node, mm, + inboard.</summary>
    internal double SettledAt(int set, int node, int position) => _settled![Row(set, node, position)];

    /// <summary>Errors of what was read against what is supposed, each in its standard deviations and independent.</summary>
    public void Errors(Span<double> errors)
    {
        var at = 0;
        foreach (var tyre in _tyres) at += tyre.Errors(errors[at..]);
        foreach (var trip in _trips)
        {
            var (steer, torque) = Law(trip.Set, trip.Means.Day);
            if (_course.Mode == FaultMode.Sudden && Math.Floor(_course.Start) == trip.Means.Day)
            {
                var (steerAfter, torqueAfter) = Law(trip.Set, trip.Means.Day + 0.999);
                steer += trip.Means.AfterShare * (steerAfter - steer);
                torque += trip.Means.AfterShare * (torqueAfter - torque);
            }
            errors[at++] = (trip.Means.AngleDeg - _v.Type.SteeringRatio * (steer + trip.SteerOffsetDeg)) / trip.Means.AngleSdDeg;
            errors[at++] = double.IsNaN(trip.Means.TorqueNm) ? 0 : (trip.Means.TorqueNm - torque - trip.TorqueOffsetNm) / trip.Means.TorqueSdNm;
        }
        foreach (var (read, quantity) in _bench)
        {
            var value = Angles.Value(_sound, quantity) + _course.Share(read.Day) * Angles.Value(_fault, quantity);
            // Rounded to 0.01°.
            errors[at++] = (read.Deg - value) / Math.Sqrt(Paperwork.BenchRepeatDeg * Paperwork.BenchRepeatDeg + 1e-4 / 12);
        }
    }

    private (double SteerDeg, double TorqueNm) Law(int set, double day)
    {
        var weights = _weights.AsSpan(0, _course.Nodes.Length);
        _course.At(day, weights);
        double steer = 0, torque = 0;
        for (var k = 0; k < weights.Length; k++) (steer, torque) = (steer + weights[k] * _steer![set, k], torque + weights[k] * _torque![set, k]);
        return (steer, torque);
    }

    /// <summary>Log likelihood of all that was read, up to a constant.</summary>
    public double LogLikelihood(Span<double> errors)
    {
        Errors(errors);
        double sum = 0;
        foreach (var e in errors) sum -= e * e / 2;
        foreach (var tyre in _tyres) sum += tyre.LogOfCoarseAndFelt();
        foreach (var week in _driverWeeks) sum += Math.Log(ChanceOf(week));
        foreach (var word in _benchWords)
        {
            _whole.Set(_sound, 1);
            _whole.Add(_fault, _course.Share(word.Day));
            if (Angles.Worst(_whole).Ratio <= 1 != word.InOrder) sum -= 12;
        }
        return sum;
    }

    private double ChanceOf(DriverWeek week)
    {
        var (steer, pull) = Law(SetOn(week.Day + 0.999), week.Day + 0.999);
        var (ofPull, ofWheel) = (Paperwork.ChanceOfPull(_v.Type, pull), Paperwork.ChanceOfNotStraight(_v.Type.SteeringRatio * steer + _v.Sensors.AngleZeroDeg));
        var nothing = (1 - ofPull) * (1 - ofWheel) * Paperwork.ChanceOfNothing / 4;
        return Math.Max(1e-9, week.Symptom switch
        {
            null => (1 - ofPull) * (1 - ofWheel) * (1 - Paperwork.ChanceOfNothing),
            "pulls_right" => (pull > 0 ? ofPull : 0) + nothing,
            "pulls_left" => (pull > 0 ? 0 : ofPull) + nothing,
            "wheel_not_straight" => (1 - ofPull) * ofWheel + nothing,
            _ => 1e-3, // shakes: nothing of the angles
        });
    }

    /// <summary>The vehicle at the end of the window as supposed.</summary>
    public Geometry AtEnd()
    {
        _whole.Set(_sound, 1);
        _whole.Add(_fault, _course.Share(_days));
        return _whole;
    }

    /// <summary>The sound vehicle as supposed.</summary>
    public Geometry SoundAngles => _sound;
}
