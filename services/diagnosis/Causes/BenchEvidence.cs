using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Geometry;

namespace WearWatch.Diagnosis.Causes;

/// <summary>
/// What the last visit to the workshop says of today. Angles as the vehicle left the bench count as a measurement,
/// angles before count when nothing was adjusted; a bare 'in order' or 'adjusted' lowers every fault, 'could not
/// adjust' raises it. All of it fades with time and distance, as new faults arise.
/// </summary>
public sealed class BenchEvidence
{
    /// <summary>Years and km over which an angle outlives the bench by a factor e (alignment intervals of the trade, from memory).</summary>
    private const double LastsYears = 1.5, LastsKm = 150_000;

    /// <summary>Chance that a bench calls a faulty vehicle in order; how much 'could not adjust' speaks for a fault (from memory).</summary>
    private const double Missed = 0.10, NotMendedFactor = 3;

    /// <summary>Chance that an angle measured out was put right without a record, or written down wrongly (from memory).</summary>
    private const double MendedUnseen = 0.02;

    private readonly IReadOnlyList<(Quantity Quantity, int? Axle, Side? Side, double Departure, double Tolerance)> _measured = [];
    private readonly WorkshopResult _result;
    private readonly double _persisted;
    private readonly VehicleModel _model;

    public BenchEvidence(VehicleModel model)
    {
        _model = model;
        var figures = model.Figures;
        var last = figures.WorkshopRecords
            .Where(r => DateOnly.FromDateTime(r.At.UtcDateTime) <= figures.AsOf && (r.Result != WorkshopResult.Unknown || r.Angles.Count > 0))
            .MaxBy(r => r.At);
        if (last is null) return;
        var years = (figures.AsOf.DayNumber - DateOnly.FromDateTime(last.At.UtcDateTime).DayNumber) / 365.25;
        var km = years * 52.18 * (figures.Vehicle.KmPerWeek ?? 0);
        _persisted = Math.Exp(-Math.Max(years / LastsYears, km / LastsKm));
        _result = last.Result;
        var adjusted = last.Result == WorkshopResult.Adjusted;
        _measured = [.. last.Angles.SelectMany(a => Measured(a, adjusted))];
    }

    private IEnumerable<(Quantity, int?, Side?, double, double)> Measured(MeasuredAngle angle, bool adjusted)
    {
        var value = angle.AfterDeg ?? (adjusted ? null : angle.BeforeDeg);
        // The front axle's and the whole vehicle's quantities are found whether or not the paper names the axle.
        var axle = angle.Quantity is Quantity.FrontTotalToe ? 1 : angle.Quantity is Quantity.Camber or Quantity.RearTotalToe or Quantity.TandemSkew ? angle.Axle : null;
        if (value is not { } deg || Tolerances.For(_model.Figures.Vehicle, angle.Quantity, axle, _model.Figures.Tolerances, _model.Figures.AsOf) is not { } tolerance) yield break;
        if (angle.Quantity != Quantity.CamberSplit && _model.IndexOf(angle.Quantity, axle, angle.Side) < 0) yield break;
        yield return (angle.Quantity, axle, angle.Side, deg - tolerance.Target, tolerance.PlusMinus);
    }

    /// <summary>Log likelihood of the record if the state is so today.</summary>
    public double LogLikelihood(Story? story, ReadOnlySpan<double> state)
    {
        if (_persisted == 0) return 0;
        double sum = 0;
        var covered = false;
        foreach (var m in _measured)
        {
            var expected = Expected(m.Quantity, m.Axle, m.Side, state);
            var bench = Math.Pow(0.2 * m.Tolerance, 2);
            var inOrder = SingleReadings.Density(m.Departure, Math.Pow(Sensitivities.InOrderSd * m.Tolerance, 2) + bench);
            var broad = SingleReadings.Density(m.Departure, Math.Pow(2.5 * m.Tolerance, 2));
            var usual = (1 - MendedUnseen) * inOrder + MendedUnseen * broad;
            if (expected == 0) sum += Math.Log(usual);
            else
            {
                sum += Math.Log(_persisted * SingleReadings.Density(m.Departure - expected, bench) + (1 - _persisted) * usual);
                covered = true;
            }
        }
        if (story is { IsAngle: true } && !covered) sum += Math.Log(Bare());
        return sum;
    }

    private double Bare() => _result switch
    {
        WorkshopResult.InOrder or WorkshopResult.Adjusted => 1 - _persisted + _persisted * Missed,
        WorkshopResult.CouldNotAdjust or WorkshopResult.PartsNeeded => 1 + _persisted * (NotMendedFactor - 1),
        _ => 1,
    };

    private double Expected(Quantity quantity, int? axle, Side? side, ReadOnlySpan<double> state) => quantity == Quantity.CamberSplit
        ? state[_model.IndexOf(Quantity.Camber, 1, Side.Left)] - state[_model.IndexOf(Quantity.Camber, 1, Side.Right)]
        : state[_model.IndexOf(quantity, axle, side)];
}
