using MathNet.Numerics.Distributions;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Causes;

/// <summary>What single readings are compared with at one state: slip that shapes each tyre since the onset and before it, torque (N·m) and wheel angle (deg), each with mean and SD.</summary>
public sealed record StateSeen((double Mean, double Sd)[] Slip, (double Mean, double Sd)[] SlipBefore, (double Mean, double Sd) Torque, (double Mean, double Sd) WheelAngle);

/// <summary>
/// Evidence that needs no joint law: hand rubs, pressures, shoulder wear, unevenness round the tyre, pull under
/// braking, what was seen and what drivers said. Each is weighed against what the story predicts for it.
/// </summary>
public sealed class SingleReadings
{
    /// <summary>Rubs: chance of noting what was not felt, slip at which half the hands catch, and its spread (from memory).</summary>
    private const double RubError = 0.12, RubThreshold = 0.35, RubSpread = 0.35;

    /// <summary>Chance that whoever walked round noted outward for inward throughout (from memory).</summary>
    private const double RubSwapped = 0.05;

    /// <summary>Shoulder wear per share of pressure lost, and its rest, as share of the normal rate (from memory).</summary>
    private const double ShoulderPerShare = 0.9, ShoulderRest = 0.12;

    private const double PressureSd = 0.04, RoundRest = 0.12, RoundUsual = 0.10, BrakeRestNm = 0.35, BrakeDragNm = 1.2;

    /// <summary>Ordinary change of off-centre angle and of the column's torque over some months (from memory).</summary>
    private const double AngleDriftDeg = 0.6, TorqueDriftNm = 0.15;

    /// <summary>Share of look-alikes that came about within the months that samples reach back (a sensor's zero after service, a tyre exchanged); from memory.</summary>
    private const double MovedLately = 0.1;

    /// <summary>Most that all driver reports of one kind may weigh, as a factor.</summary>
    private const double ReportFactor = 2.0;

    private const int ReportDays = 180;

    private readonly VehicleModel _model;
    private readonly TyreFigures?[] _tyres;
    private readonly double[] _pressureInOrder, _roundInOrder;
    private readonly int _pullsLeft, _pullsRight, _notStraight, _shakes;

    public SingleReadings(VehicleModel model)
    {
        _model = model;
        _tyres = [.. model.Positions.Select(p => model.Figures.At(p))];
        _pressureInOrder = [.. _tyres.Select(t => t is null ? 0 : Pressure(t, 0))];
        _roundInOrder = [.. _tyres.Select(t => t is null ? 0 : Round(t, null))];
        var recent = model.Figures.DriverReports
            .Where(r => model.Figures.AsOf.DayNumber - DateOnly.FromDateTime(r.At.UtcDateTime).DayNumber is >= 0 and <= ReportDays)
            .CountBy(r => r.Symptom).ToDictionary();
        _pullsLeft = recent.GetValueOrDefault(Symptom.PullsLeft);
        _pullsRight = recent.GetValueOrDefault(Symptom.PullsRight);
        _notStraight = recent.GetValueOrDefault(Symptom.WheelNotStraight);
        _shakes = recent.GetValueOrDefault(Symptom.Shakes);
    }

    /// <summary>Log likelihood of all of it, up to what every story shares.</summary>
    /// <param name="story">What is wrong, or null.</param>
    /// <param name="magnitude">How far, in the quantity's unit.</param>
    /// <param name="onset">Index into <see cref="Onsets.DaysAgo"/>: since when.</param>
    /// <param name="seen">What the joint law makes of it.</param>
    public double LogLikelihood(Story? story, double magnitude, int onset, StateSeen seen)
    {
        var sum = Reports(story, seen) + Brake(story) + Changes(story, magnitude, Onsets.DaysAgo[onset]);
        double straight = 0, swapped = 0;
        for (var i = 0; i < _tyres.Length; i++)
        {
            if (_tyres[i] is not { } tyre) continue;
            var at = story is not null && story.Axle == tyre.Position.Axle && (story.Side is null || story.Side == tyre.Position.Side);
            var (slip, sd) = seen.Slip[i];
            var damper = at && story!.Quantity == Quantity.Damper;
            sum += at && story!.Quantity == Quantity.Pressure ? Pressure(tyre, magnitude) : _pressureInOrder[i];
            sum += (damper ? Round(tyre, magnitude) : _roundInOrder[i]) + Cupped(tyre, damper, slip);
            var (before, after) = _model.Figures.Wear?.At(tyre.Position)?.ByOnset[onset] is { } dated ? (dated.Before, dated.After)
                : (new Rubs(), new(tyre.RubsCatchingOutward, tyre.RubsCatchingInward, tyre.RubsCatchingNeither));
            // The same edge felt again is not new evidence in full, whichever side of the onset it was felt on.
            var count = before.Count + after.Count;
            if (count == 0) continue;
            var weight = (1 + 0.4 * (count - 1)) / count;
            var was = seen.SlipBefore[i];
            straight += weight * (Felt(after, slip, sd) + Felt(before, was.Mean, was.Sd));
            swapped += weight * (Felt(after.Exchanged(), slip, sd) + Felt(before.Exchanged(), was.Mean, was.Sd));
        }
        return sum + straight + Math.Log(1 - RubSwapped + RubSwapped * Math.Exp(swapped - straight));
    }

    private double Pressure(TyreFigures tyre, double share)
    {
        double sum = 0;
        if (tyre.PressureShare is { } measured)
            sum += Guarded(measured, share, PressureSd, 0.4);
        if (tyre.ShoulderMmPer1000Km is { } shoulder)
            sum += Guarded(shoulder * (1 / Observables.NormalRate(_model, tyre)), -ShoulderPerShare * share, ShoulderRest + 0.4 * Math.Abs(ShoulderPerShare * share), 1.5);
        return sum;
    }

    private static double Round(TyreFigures tyre, double? damper) =>
        tyre.RoundVariationMm is { } round ? Guarded(round, damper ?? RoundUsual, RoundRest, 1.5) : 0;

    private static double Cupped(TyreFigures tyre, bool damper, double slip)
    {
        // Steady slip can start cupping on a free-rolling tyre.
        var chance = damper ? 0.4 : Math.Abs(slip) > 1.5 ? 0.06 : 0.015;
        return Math.Log(tyre.Seen.Contains(Seen.Cupped) ? chance : 1 - chance);
    }

    private static double Felt(Rubs rubs, double slip, double sd)
    {
        if (rubs.Count == 0) return 0;
        var spread = Math.Sqrt(RubSpread * RubSpread + sd * sd);
        var feltOutward = Normal.CDF(0, 1, (slip - RubThreshold) / spread);
        var feltInward = Normal.CDF(0, 1, (-slip - RubThreshold) / spread);
        double Noted(double felt) => Math.Log((1 - RubError) * Math.Max(0, felt) + RubError / 3);
        return rubs.Outward * Noted(feltOutward) + rubs.Inward * Noted(feltInward) + rubs.Neither * Noted(1 - feltOutward - feltInward);
    }

    private double Brake(Story? story)
    {
        if (_model.Figures.Steering?.BrakePullNm is not { } pull || _model.IsTrailer) return 0;
        var share = Math.Max(0.3, _model.AssistShare);
        return Guarded(pull, 0, (story?.Quantity == Quantity.Drag ? BrakeDragNm : BrakeRestNm) * share, 4 * share);
    }

    /// <summary>Share of a fault by which the present weeks exceed those before.</summary>
    private static double Grown(SteeringFigures steering, double daysAgo)
    {
        var earliest = Math.Max(steering.EarliestDaysAgo ?? 180, SteeringFigures.PresentDays + 1);
        return Math.Min(1, daysAgo / SteeringFigures.PresentDays) - Math.Clamp((daysAgo - SteeringFigures.PresentDays) / (earliest - SteeringFigures.PresentDays), 0, 1);
    }

    /// <summary>Whether two onsets predict the same of what steering changed by and of the hands that felt the tread.</summary>
    public bool SameAround(int a, int b)
    {
        var (aDays, bDays) = (Onsets.DaysAgo[a], Onsets.DaysAgo[b]);
        var steers = !_model.IsTrailer && _model.Figures.Steering is { } steering && (Grown(steering, aDays) != Grown(steering, bDays) || Math.Min(aDays, bDays) < SteeringFigures.PresentDays);
        return !steers && _model.Positions.All(p => _model.Figures.Wear?.At(p)?.ByOnset is not { } dated
            || (dated[a].Before == dated[b].Before && dated[a].After == dated[b].After));
    }

    /// <summary>What changed between the weeks before and the present ones: what began since shows with the share of either that it was there.</summary>
    private double Changes(Story? story, double magnitude, double daysAgo)
    {
        if (_model.IsTrailer || _model.Figures.Steering is not { } steering) return 0;
        var share = Math.Max(0.3, _model.AssistShare);
        var grown = Grown(steering, daysAgo);
        return Change(steering.OffCentreChangeDeg, _model.WheelAngle, AngleDriftDeg, 6) + Change(steering.SteeringPullChangeNm, _model.Torque, TorqueDriftNm * share, 2 * share);

        double Change(Estimate? change, double[] map, double drift, double wild)
        {
            if (change is not { } seen) return 0;
            double whole = 0;
            foreach (var (state, weight) in story?.Moves ?? []) whole += map[state] * weight * magnitude;
            if (story is { IsAngle: true }) return Guarded(seen, grown * whole, drift + 0.35 * grown * Math.Abs(whole), wild);
            var still = Guarded(seen, 0, drift, wild);
            return Math.Abs(whole) < drift ? still
                : Math.Log(Math.Exp(still) * (1 - MovedLately) + MovedLately * Math.Exp(Guarded(seen, 0.6 * whole, drift + 0.35 * Math.Abs(whole), wild)));
        }
    }

    private double Reports(Story? story, StateSeen seen)
    {
        if (_model.IsTrailer || _pullsLeft + _pullsRight + _notStraight + _shakes == 0) return 0;
        var felt = 0.35 * Math.Max(0.3, _model.AssistShare); // N·m that a driver notices, from memory
        var ((pull, pullSd), (angle, angleSd)) = (seen.Torque, seen.WheelAngle);
        var width = Math.Sqrt(felt * felt + pullSd * pullSd);
        var aside = Math.Sqrt(3 * 3 + angleSd * angleSd);
        return Weak(_pullsRight, Normal.CDF(0, 1, (pull - felt) / width)) + Weak(_pullsLeft, Normal.CDF(0, 1, (-pull - felt) / width))
            + Weak(_notStraight, Normal.CDF(0, 1, (Math.Abs(angle) - 5) / aside)) + Weak(_shakes, story?.Quantity == Quantity.Damper ? 1 : 0.2);
    }

    /// <summary>A report weighs between 1/√2 and √2; more of the same add little.</summary>
    private static double Weak(int count, double chance) =>
        count == 0 ? 0 : Math.Log(ReportFactor) * (chance - 0.5) * (1 + 0.3 * Math.Min(3, count - 1));

    /// <summary>Log density with a share of wild readings.</summary>
    private static double Guarded(Estimate estimate, double expected, double rest, double wildSd)
    {
        var variance = rest * rest + estimate.StandardError * estimate.StandardError;
        var wild = wildSd * wildSd + estimate.StandardError * estimate.StandardError;
        return Math.Log((1 - Sensitivities.WildShare) * Density(estimate.Value - expected, variance) + Sensitivities.WildShare * Density(estimate.Value, wild));
    }

    internal static double Density(double departure, double variance) => Math.Exp(-0.5 * departure * departure / variance) / Math.Sqrt(2 * Math.PI * variance);
}
