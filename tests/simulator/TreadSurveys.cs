using WearWatch.Simulator.Best;

namespace WearWatch.Simulator;

/// <summary>A blunder or a refusal planted in one survey.</summary>
public sealed record Planted(string Kind, string SurveyId, string? Note = null);

/// <summary>One walk as it truly was.</summary>
/// <param name="LeftRightErrors">
/// How far left and right tyres differ, in standard errors of one reading of each groove: root of the sum of squares over
/// pairs of grooves. A swap of sides below some 4 can hardly be seen.
/// </param>
public sealed record Taken(string SurveyId, int Day, double OdometerKm, int Axles, double LeftRightErrors);

/// <summary>The walks round one vehicle, with what technicians get wrong.</summary>
public sealed class TreadSurveys
{
    /// <summary>Repeat of a step felt between rib edges, mm.</summary>
    public const double EdgeRepeatMm = 0.12;

    private readonly FleetVehicle _vehicle;
    private readonly Scenario _scenario;
    private readonly Technician[] _technicians;
    private readonly Rows _rows;
    private readonly RandomStream _random;
    private readonly VehicleLog? _log;
    private int _count;

    public List<Planted> Planted { get; } = [];
    public List<Taken> Walks { get; } = [];
    /// <summary>Days on which surveys are taken.</summary>
    public HashSet<int> Days { get; } = [];

    public TreadSurveys(FleetVehicle vehicle, Scenario scenario, Technician[] technicians, Rows rows, VehicleLog? log)
    {
        (_vehicle, _scenario, _rows, _log) = (vehicle, scenario, rows, log);
        _random = new RandomStream(scenario.Seed, 6, vehicle.Index);
        _technicians = [.. technicians.Where(t => t.Depot == vehicle.Depot.Index)];
        if (scenario.NoSurveys) return;
        for (var day = _random.Whole(1, 16); day < scenario.Days; day += _random.Whole(19, 34)) Days.Add(day);
    }

    private string DrawBlunder(Technician technician)
    {
        if (_vehicle.RecordsSwapped && _count is 3 or 5) return "swapped_sides";
        return _random.Unit() switch
        {
            < 0.022 => "swapped_sides",
            < 0.034 => technician.In32nds ? "none" : "unit_mix_up",
            < 0.046 => "wrong_wheel",
            < 0.095 => "half_finished",
            _ => "none",
        };
    }

    public void Take(int day, double odometerKm, Tyre[] tyres)
    {
        _count++;
        var technician = _random.Pick(_technicians);
        var blunder = DrawBlunder(technician);
        var id = $"s-{_vehicle.Id}-{_count:D2}";
        if (blunder != "none") Planted.Add(new(blunder, id));
        var axles = _vehicle.Type.Axles.Length;
        var reached = blunder == "half_finished" ? Math.Max(1, axles - 1) : axles;
        var distance = Distance(odometerKm, id);
        _rows.Add("surveys", id, _vehicle.Id, _scenario.Time(day + _random.Between(0.22, 0.38)), technician.Id, technician.Gauge,
            technician.In32nds ? 1 : 0.1, technician.In32nds ? "1/32in" : "mm", null, distance, distance is null ? "none" : _vehicle.DistanceSource,
            blunder != "half_finished");
        var (places, pressures, rubs) = (_random.Chance(0.3) ? 3 : 1, _random.Chance(0.5), _random.Chance(0.6));
        if (_vehicle.CuppedPosition >= 0 && _random.Chance(0.6)) places = 3;
        Walks.Add(new(id, day, odometerKm, reached, LeftRightErrors(technician, tyres, reached, places)));
        foreach (var p in _vehicle.Positions.Where(p => p.Axle < reached))
        {
            var name = Written(p, blunder);
            if (p.Dual == 'I' && _random.Chance(0.12))
            {
                _rows.Add("survey_tyres", id, name, null, null, null, null, "gauge does not reach between the duals");
                continue;
            }
            Read(p, name, (id, day), technician, tyres[p.Index], places, blunder == "unit_mix_up");
            Note(p, name, (id, day), tyres[p.Index], pressures, rubs);
        }
    }

    private double LeftRightErrors(Technician technician, Tyre[] tyres, int reached, int places)
    {
        var step = technician.In32nds ? Technician.MmPer32nd : 0.1;
        // Repeat and rounding of each place, and the groove's own deviation, on either side.
        var variance = 2 * ((technician.RepeatMm * technician.RepeatMm + step * step / 12) / places + 0.05 * 0.05);
        var grooves = _vehicle.Type.Grooves;
        double sum = 0;
        foreach (var left in _vehicle.Positions.Where(p => p.Left && p.Axle < reached))
        {
            var right = _vehicle.Positions.First(p => !p.Left && p.Axle == left.Axle && p.Dual == left.Dual);
            for (var k = 0; k < grooves; k++)
                sum += Math.Pow(tyres[left.Index].SmoothDepth(k, grooves) - tyres[right.Index].SmoothDepth(k, grooves), 2) / variance;
        }
        return Math.Sqrt(sum);
    }

    private double? Distance(double odometerKm, string id)
    {
        if (_vehicle.DistanceSource != "none" && _vehicle.Index % 64 == 10 && _count == 3)
        {
            Planted.Add(new("distance_back", id));
            return Math.Round(odometerKm) - 9000;
        }
        return _vehicle.DistanceSource == "none" || _random.Chance(0.04) ? null : Math.Round(odometerKm);
    }

    /// <summary>Position under which a tyre's readings are written down.</summary>
    private string Written(Position p, string blunder)
    {
        var written = p;
        if (blunder == "swapped_sides") written = p with { Left = !p.Left };
        // The technician starts on the wrong corner: first and last axle of the left side exchanged.
        if (blunder == "wrong_wheel" && p.Left && p.Dual != 'I')
        {
            var last = _vehicle.Type.Axles.Length - 1;
            var axle = p.Axle == 0 ? last : p.Axle == last ? 0 : p.Axle;
            written = _vehicle.Positions.First(q => q.Axle == axle && q.Left && q.Dual != 'I');
        }
        return new Position(0, written.Axle, written.Left, written.Dual).Name;
    }

    private void Read(Position p, string name, (string Id, int Day) survey, Technician technician, Tyre tyre, int places, bool unitMixUp)
    {
        var id = survey.Id;
        var grooves = _vehicle.Type.Grooves;
        var step = technician.In32nds ? Technician.MmPer32nd : 0.1;
        var first = _random.Between(0, 360);
        for (var place = 0; place < places; place++)
        {
            var clock = (int)(first + 120 * place) % 360;
            var cup = tyre.CuppingMm * Math.Sin((2 * clock + 40 * p.Index) * Math.PI / 180);
            for (var groove = 0; groove < grooves; groove++)
            {
                var depth = tyre.GrooveDepth(groove, grooves, _random) + cup + technician.BiasMm + technician.RepeatMm * _random.Normal();
                if (unitMixUp) depth /= Technician.MmPer32nd;
                var steps = Math.Max(0, Math.Round(depth / step));
                var gaugeStep = unitMixUp ? step * Technician.MmPer32nd : step;
                _log?.Depths.Add(new(tyre, survey.Day, groove, steps * gaugeStep, gaugeStep, cup + technician.BiasMm, technician.RepeatMm));
                var text = technician.In32nds ? steps.ToString("0") : Decimal(steps / 10, id);
                if (_vehicle.Index % 16 == 5 && _count == 2 && p.Index == 0 && groove == 0 && place == 0)
                {
                    Planted.Add(new("depth_above_new", id, name));
                    text = technician.In32nds ? (tyre.NewDepthMm / Technician.MmPer32nd + 4).ToString("0") : (tyre.NewDepthMm + 3).ToString("0.0");
                }
                double? edge = technician.FeelsEdges && groove is > 0 and < 4 ? Math.Round((tyre.FeatherMm + EdgeRepeatMm * _random.Normal()) / step) * (technician.In32nds ? 1 : 0.1) : null;
                if (edge is { } felt) _log?.Edges.Add(new(tyre, survey.Day, technician.In32nds ? felt * step : felt, step));
                _rows.Add("readings", id, name, groove + 1, text, places == 1 ? null : clock, edge);
            }
        }
    }

    /// <summary>The figure as written: now and then with digits exchanged, read on a wear bar, or with needless zeros.</summary>
    private string Decimal(double mm, string id)
    {
        var text = mm.ToString("0.0");
        if (_random.Chance(0.002) && text.Length == 3 && text[0] != text[2] && text[2] != '0')
        {
            Planted.Add(new("digits_exchanged", id));
            return $"{text[2]}.{text[0]}";
        }
        if (_random.Chance(0.003) && mm > 2.2)
        {
            Planted.Add(new("wear_bar_reading", id));
            return (mm - 1.6).ToString("0.0");
        }
        return _random.Chance(0.01) ? text + "0" : text.EndsWith(".0", StringComparison.Ordinal) && _random.Chance(0.3) ? text[..^2] : text;
    }

    private void Note(Position p, string name, (string Id, int Day) survey, Tyre tyre, bool pressures, bool rubs)
    {
        var id = survey.Id;
        var axle = _vehicle.Type.Axles[p.Axle];
        var warm = pressures && _random.Chance(0.3);
        double? pressure = pressures && !(p.Dual == 'I' && _random.Chance(0.2))
            ? Math.Round((axle.PressureKpa * (1 + _vehicle.PressureShare[p.Index] + (warm ? 0.08 : 0)) + 6 * _random.Normal()) / 5) * 5 : null;
        var rub = rubs && p.Dual != 'I' ? HandRub(tyre) : null;
        if (rub is not null) _log?.Rubs.Add(new(tyre, survey.Day, rub == "neither" ? 0 : rub == "catches_outward" ? 1 : -1));
        var seen = tyre.CuppingMm > 0.4 && _random.Chance(0.7) ? "cupped" : _random.Chance(0.004) ? "cut" : _random.Chance(0.004) ? "heel_toe" : null;
        if (pressure is null && rub is null && seen is null) return;
        _rows.Add("survey_tyres", id, name, pressure, pressure is null ? null : warm, rub, seen, null);
    }

    /// <summary>Chance that the hand catches anything on fins of some height, and that it then tells the wrong way round.</summary>
    public static (double Felt, double Wrong) RubChances(double featherMm)
    {
        var strength = Math.Abs(featherMm) / 0.27;
        return (0.06 + 0.9 * (1 - Math.Exp(-strength * strength)), strength < 1 ? 0.3 : 0.12);
    }

    /// <summary>
    /// The hand moving outward catches on fins at the inboard rib edges (toe-in). Weak feather is mostly not felt; of what
    /// is felt some 15 % is told the wrong way round.
    /// </summary>
    private string HandRub(Tyre tyre)
    {
        var (felt, wrong) = RubChances(tyre.FeatherMm);
        if (!_random.Chance(felt)) return "neither";
        var outward = tyre.FeatherMm > 0 != _random.Chance(wrong);
        return outward ? "catches_outward" : "catches_inward";
    }
}
