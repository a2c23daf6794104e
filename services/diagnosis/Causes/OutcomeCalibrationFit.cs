using MathNet.Numerics.LinearAlgebra;
using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Causes;

/// <summary>
/// Posterior mode of the calibration: for each class a shift and a slope about the fleet's, the fleet's about 'as stated'; for each
/// reason to be sent that is not the list's or the calendar's an extra shift of its own.
/// </summary>
/// <remarks>
/// Selection: a vehicle sent by the list was chosen by its stated probability, which the likelihood is conditioned on, so the choice drops
/// out; a routine one was not chosen. One sent on suspicion was chosen by what the driver or technician knew besides: its extra shift has
/// a prior so wide that suspects move it and not the calibration. Records that err are weighed by their likelihood ratio; the mode
/// is found by expectation-maximisation with one Newton step a round (Lange, J. R. Statist. Soc. B 57 (1995) 425), from 'as stated' on.
/// </remarks>
internal static class OutcomeCalibrationFit
{
    /// <summary>Prior spreads, log odds and slope: the fleet about 'as stated', a class about the fleet, a reason about nothing (from memory).</summary>
    private const double FleetShiftSd = 0.4, FleetSlopeSd = 0.2, ClassShiftSd = 0.3, ClassSlopeSd = 0.12, ReasonSd = 8;

    /// <summary>Weight of log(slope) − slope, which has its mode at 1 and keeps every slope above zero.</summary>
    private const double SlopeGuard = 2;

    private const int MostRounds = 400;

    private readonly record struct Row(int Class, int Reason, double X, double Ratio);

    public static OutcomeCalibration Of(IReadOnlyList<ConfirmedOutcome> outcomes)
    {
        var classes = outcomes.Select(o => o.VehicleClass).Distinct().Order(StringComparer.Ordinal).ToList();
        var reasons = outcomes.Select(o => o.SentBecause).Where(HasOwnShift).Distinct().Order().ToList();
        var rows = outcomes.Select(o => new Row(classes.IndexOf(o.VehicleClass), reasons.IndexOf(o.SentBecause), OutcomeCalibration.LogOdds(o.StatedProbability!.Value), o.LikelihoodRatio)).ToArray();
        var at = Mode(rows, classes.Count, reasons.Count);
        return new OutcomeCalibration
        {
            Fleet = new("", at[0], at[1], outcomes.Count),
            Classes = [.. classes.Select((c, i) => new ClassCalibration(c, at[2 + 2 * i], at[3 + 2 * i], rows.Count(r => r.Class == i)))],
            SentShift = reasons.Select((r, i) => (r, at[2 + 2 * classes.Count + i])).ToDictionary(x => x.r, x => x.Item2),
            Used = outcomes.Count,
            LeftOut = 0,
            Angles = OutcomeConformal.Of([]),
        };
    }

    private static bool HasOwnShift(SentBecause reason) => reason is not (SentBecause.Routine or SentBecause.Listed);

    /// <summary>Layout: fleet shift and slope, then both of each class, then the reasons.</summary>
    private static double[] Mode(Row[] rows, int classes, int reasons)
    {
        var at = new double[2 + 2 * classes + reasons];
        for (var k = 1; k < 2 + 2 * classes; k += 2) at[k] = 1;
        if (rows.Length == 0) return at;
        var objective = Objective(rows, classes, at);
        for (var round = 0; round < MostRounds; round++)
        {
            var step = Step(rows, classes, at);
            var size = 1.0;
            double[] next;
            double value;
            do
            {
                next = [.. at.Zip(step, (a, s) => a + size * s)];
                value = Positive(next, classes) ? Objective(rows, classes, next) : double.NegativeInfinity;
                size /= 2;
            }
            while (value < objective && size > 1e-9);
            if (!(value >= objective)) break;
            var gain = value - objective;
            (at, objective) = (next, value);
            if (gain < 1e-11 * (1 + Math.Abs(objective))) break;
        }
        return at;
    }

    private static bool Positive(double[] at, int classes) => Enumerable.Range(0, classes + 1).All(c => at[1 + 2 * c] > 0);

    private static double Linear(in Row row, int classes, double[] at) =>
        at[2 + 2 * row.Class] + at[3 + 2 * row.Class] * row.X + (row.Reason >= 0 ? at[2 + 2 * classes + row.Reason] : 0);

    private static double Objective(Row[] rows, int classes, double[] at)
    {
        var sum = 0.0;
        foreach (var row in rows)
        {
            var q = Sigma(Linear(row, classes, at));
            sum += Math.Log(row.Ratio * q + 1 - q);
        }
        for (var c = 0; c <= classes; c++)
        {
            var (shift, slope) = (at[2 * c], at[2 * c + 1]);
            sum += SlopeGuard * (Math.Log(slope) - slope);
            sum -= c == 0
                ? Half(shift, FleetShiftSd) + Half(slope - 1, FleetSlopeSd)
                : Half(shift - at[0], ClassShiftSd) + Half(slope - at[1], ClassSlopeSd);
        }
        for (var k = 2 + 2 * classes; k < at.Length; k++) sum -= Half(at[k], ReasonSd);
        return sum;
    }

    /// <summary>Newton step on the expected complete likelihood, whose curvature is never the wrong way.</summary>
    private static double[] Step(Row[] rows, int classes, double[] at)
    {
        var gradient = Vector<double>.Build.Dense(at.Length);
        var curvature = Matrix<double>.Build.Dense(at.Length, at.Length);
        foreach (var row in rows)
        {
            var q = Sigma(Linear(row, classes, at));
            var expected = row.Ratio * q / (row.Ratio * q + 1 - q);
            var (shift, slope) = (2 + 2 * row.Class, 3 + 2 * row.Class);
            Span<(int At, double Factor)> parts = [(shift, 1), (slope, row.X), (2 + 2 * classes + Math.Max(0, row.Reason), row.Reason >= 0 ? 1 : 0)];
            foreach (var (i, f) in parts)
            {
                if (f == 0) continue;
                gradient[i] += (expected - q) * f;
                foreach (var (j, g) in parts) if (g != 0) curvature[i, j] += q * (1 - q) * f * g;
            }
        }
        for (var c = 0; c <= classes; c++)
        {
            var slope = at[2 * c + 1];
            gradient[2 * c + 1] += SlopeGuard * (1 / slope - 1);
            curvature[2 * c + 1, 2 * c + 1] += SlopeGuard / (slope * slope);
            if (c == 0) { Pull(0, -1, FleetShiftSd, 0); Pull(1, -1, FleetSlopeSd, 1); }
            else { Pull(2 * c, 0, ClassShiftSd, 0); Pull(2 * c + 1, 1, ClassSlopeSd, 0); }
        }
        for (var k = 2 + 2 * classes; k < at.Length; k++) Pull(k, -1, ReasonSd, 0);
        return [.. curvature.Cholesky().Solve(gradient)];

        // A normal prior on one element about another (or about a fixed centre).
        void Pull(int i, int about, double sd, double centre)
        {
            var weight = 1 / (sd * sd);
            var difference = at[i] - (about < 0 ? centre : at[about]);
            gradient[i] -= weight * difference;
            curvature[i, i] += weight;
            if (about < 0) return;
            gradient[about] += weight * difference;
            curvature[about, about] += weight;
            curvature[i, about] -= weight;
            curvature[about, i] -= weight;
        }
    }

    private static double Half(double difference, double sd) => difference * difference / (2 * sd * sd);

    private static double Sigma(double x) => 1 / (1 + Math.Exp(-x));
}
