using MathNet.Numerics.LinearAlgebra;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Roads;

/// <summary>
/// The fit beside the same model written out densely and solved by MathNet: one row an observation and one a prior, Huber weights about
/// the present answer, repeated until it stands still. Spreads are taken from the fit.
/// </summary>
public class RoadModelDenseTests
{
    private sealed class Dense(RoadFleet fleet, RoadFit fit)
    {
        private readonly int _vehicles = fit.Vehicles.Count, _cells = fit.Cells.Count;

        // Unknowns: pull, angle and bias by vehicle, then cells, torque and angle gain, crown, level.
        private int Gain => 3 * _vehicles + _cells;
        private int Size => Gain + 4;

        public (Vector<double> Answer, Matrix<double> Covariance) Solve()
        {
            var x = Vector<double>.Build.Dense(Size);
            for (var c = 0; c < _cells; c++) x[3 * _vehicles + c] = fit.Cells[c].Bank.Value;
            (x[Gain], x[Gain + 1], x[Gain + 2]) = (fit.Gains[0].TorqueNmPerSine!.Value.Value, fit.Gains[0].AngleDegPerSine!.Value.Value, fit.Crowns[0].Bank.Value);
            for (var v = 0; v < _vehicles; v++) (x[3 * v], x[3 * v + 1]) = (fit.Vehicles[v].SteeringPullNm!.Value.Value, fit.Vehicles[v].OffCentreDeg!.Value.Value);
            var normal = Matrix<double>.Build.Dense(Size, Size);
            for (var step = 0; step < 60; step++)
            {
                var (design, target) = Rows(x);
                normal = design.TransposeThisAndMultiply(design);
                var next = normal.Cholesky().Solve(design.TransposeThisAndMultiply(target));
                if ((next - x).AbsoluteMaximum() < 1e-12) break;
                x = next;
            }
            return (x, normal.Inverse());
        }

        private (Matrix<double>, Vector<double>) Rows(Vector<double> x)
        {
            var (rows, targets) = (new List<double[]>(), new List<double>());
            void Row(double target, double variance, double weight, params (int At, double Factor)[] factors)
            {
                var (row, root) = (new double[Size], Math.Sqrt(weight / variance));
                foreach (var (at, factor) in factors) row[at] += root * factor;
                rows.Add(row);
                targets.Add(root * target);
            }
            double Huber(double z) => Math.Min(1, 1.345 / Math.Abs(z));
            var cells = fit.Cells.Select((c, i) => (c.Cell, i)).ToDictionary(c => c.Cell, c => c.i);
            var vehicles = fit.Vehicles.Select((v, i) => (v.VehicleId, i)).ToDictionary(v => v.VehicleId, v => v.i);
            var sizes = fleet.Runs.CountBy(r => (r.VehicleId, r.StreamId)).ToDictionary();
            foreach (var run in fleet.Runs)
            {
                var (v, cell) = (vehicles[run.VehicleId], 3 * _vehicles + cells[run.RoadCell!]);
                for (var w = 0; w < 3; w++)
                {
                    var e = (w == 0 ? run.TorqueNm : w == 1 ? run.AngleDeg : run.BankReading)!.Value;
                    var gain = w == 2 ? 1 + SteeringEquations.RollGain : x[Gain + w];
                    var (own, trip) = (e.StandardError * e.StandardError + Math.Pow(fit.Spreads[w].RunSd, 2), Math.Pow(fit.Spreads[w].TripSd, 2));
                    var huber = Huber((e.Value - x[3 * v + w] - gain * x[cell]) / Math.Sqrt(own + trip));
                    var variance = own + sizes[(run.VehicleId, run.StreamId)] * trip;
                    if (w == 2) Row(e.Value, variance, huber, (3 * v + 2, 1), (cell, gain));
                    else Row(e.Value + gain * x[cell], variance, huber, (3 * v + w, 1), (cell, gain), (Gain + w, x[cell]));
                }
            }
            for (var v = 0; v < _vehicles; v++)
            {
                var (pull, angle) = (fit.Gains[0].PullSpreadNm, fit.Gains[0].OffCentreSpreadDeg);
                Row(0, pull * pull, Huber(x[3 * v] / pull), (3 * v, 1));
                Row(0, angle * angle, Huber(x[3 * v + 1] / angle), (3 * v + 1, 1));
                Row(0, fit.ReadingZeroSpread * fit.ReadingZeroSpread, 1, (3 * v + 2, 1));
            }
            for (var c = 0; c < _cells; c++) Row(0, 0.01 * 0.01, 1, (3 * _vehicles + c, 1), (Gain + 2, -1), (Gain + 3, -1));
            Row(61, Math.Pow(0.75 * 61, 2), 1, (Gain, 1));
            Row(20, Math.Pow(0.75 * 20, 2), 1, (Gain + 1, 1));
            Row(0.02, RoadPriors.CrownError * RoadPriors.CrownError, 1, (Gain + 2, 1));
            Row(0, Math.Pow(RoadPriors.LevelError(_vehicles), 2), 1, (Gain + 3, 1));
            return (Matrix<double>.Build.DenseOfRowArrays(rows), Vector<double>.Build.DenseOfEnumerable(targets));
        }

        public Estimate Unshrunk(Vector<double> x, Matrix<double> covariance, int v, int lane)
        {
            var spread = lane == 0 ? fit.Gains[0].PullSpreadNm : fit.Gains[0].OffCentreSpreadDeg;
            var (value, variance) = (x[3 * v + lane], covariance[3 * v + lane, 3 * v + lane]);
            var left = 1 / variance - Math.Min(1, 1.345 / Math.Abs(value / spread)) / (spread * spread);
            return new(value / variance / left, Math.Sqrt(1 / left));
        }

        public int CellAt(int cell) => 3 * _vehicles + cell;
        public int GainAt => Gain;
    }

    /// <summary>The figure as it was before the vehicle's own gain put it right.</summary>
    private static Estimate OnClassGain(Estimate figure, Estimate own, Estimate class_, double bank) =>
        new(figure.Value + (own.Value - class_.Value) * bank, Math.Sqrt(Math.Pow(figure.StandardError, 2) - Math.Pow(own.StandardError * bank, 2)));

    [Theory]
    [InlineData(11)]
    [InlineData(12)]
    public void The_fit_is_the_dense_robust_least_squares_answer_with_its_errors(int seed)
    {
        var fleet = new RoadFleet(seed) { Vehicles = 9, Cells = 14 }.Drive();
        fleet.Runs[5] = fleet.Runs[5] with { TorqueNm = new Estimate(9, 0.08) };
        var fit = RoadModel.Fit(fleet.Runs, fleet.Fleet);
        var dense = new Dense(fleet, fit);
        var (x, covariance) = dense.Solve();
        void Same(Estimate expected, Estimate found)
        {
            Assert.Equal(expected.Value, found.Value, 0.01 * expected.StandardError);
            Assert.InRange(found.StandardError / expected.StandardError, 0.999, 1.001);
        }
        for (var v = 0; v < fit.Vehicles.Count; v++)
        {
            var (f, gain) = (fit.Vehicles[v], fit.Gains[0]);
            Same(dense.Unshrunk(x, covariance, v, 0), OnClassGain(f.SteeringPullNm!.Value, f.PullPerSineNm!.Value, gain.TorqueNmPerSine!.Value, f.PullMeanBank));
            Same(dense.Unshrunk(x, covariance, v, 1), OnClassGain(f.OffCentreDeg!.Value, f.OffCentrePerSineDeg!.Value, gain.AngleDegPerSine!.Value, f.OffCentreMeanBank));
            Same(new(x[3 * v + 2], Math.Sqrt(covariance[3 * v + 2, 3 * v + 2])), fit.Vehicles[v].BankReadingBias!.Value);
        }
        Estimate At(int i) => new(x[i], Math.Sqrt(covariance[i, i]));
        for (var c = 0; c < fit.Cells.Count; c++) Same(At(dense.CellAt(c)), fit.Cells[c].Bank);
        Same(At(dense.GainAt), fit.Gains[0].TorqueNmPerSine!.Value);
        Same(At(dense.GainAt + 1), fit.Gains[0].AngleDegPerSine!.Value);
        Same(At(dense.GainAt + 2), fit.Crowns[0].Bank);
    }
}
