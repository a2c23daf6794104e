using MathNet.Numerics.Distributions;
using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Geometry;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Causes;

/// <summary>Draws vehicles from the estimator's own prior and equations, nothing linearised: the ground truth for its calibration.</summary>
internal sealed class OwnDraws(int seed)
{
    private readonly Random _random = new(seed);

    public sealed record Drawn(VehicleFigures Figures, Story? Angle, double Magnitude, Story? Look);

    /// <param name="blank">Vehicle without figures.</param>
    /// <param name="torque">Whether it logs driver torque.</param>
    /// <param name="depths">Whether its tyres are measured at every groove.</param>
    public Drawn Next(VehicleFigures blank, bool torque, bool depths)
    {
        if (blank.Vehicle.Class != VehicleClass.Trailer) blank = blank.WithSteering(torque ? 0 : null, 0);
        var model = new VehicleModel(blank);
        var stories = Stories.Of(model, FaultPriors.Default);
        var angle = Pick([.. stories.Where(s => s.IsAngle)]);
        var look = Pick([.. stories.Where(s => !s.IsAngle)]);
        var state = model.Dimensions.Select(InOrder).ToArray();
        double Place(Story? story)
        {
            if (story is null) return 0;
            var cell = Choose(story.Cells);
            var magnitude = cell.Low + _random.NextDouble() * (cell.High - cell.Low);
            foreach (var (d, weight) in story.Moves) state[d] = magnitude * weight + (Math.Abs(weight) < 1 ? Math.Sqrt(0.5) * InOrder(model.Dimensions[d]) : 0);
            return magnitude;
        }
        var lookMagnitude = Place(look);
        var size = Place(angle);
        return new Drawn(Observe(blank, model, state, torque, depths, look, lookMagnitude), angle, size, look);
    }

    private VehicleFigures Observe(VehicleFigures blank, VehicleModel model, double[] state, bool torque, bool depths, Story? look, double lookMagnitude)
    {
        var (slipScale, edge, camberEdge) = (Math.Exp(-Sensitivities.ServiceSlipSpread * N()), Spread(Sensitivities.EdgeSpread), Spread(Sensitivities.CamberEdgeSpread));
        var (share, vehicleRate) = (Spread(Sensitivities.ShareSpread), Sensitivities.LogRateVehicle * N());
        var (rollFront, rollRear) = (model.Class.RollShare * N(), model.Class.RollShare * N());
        var figures = blank;
        if (depths)
            figures = figures with { Tyres = [.. figures.Vehicle.Positions().Select(Tyre)] };
        TyreFigures Tyre(Position p)
        {
            var i = model.Positions.ToList().IndexOf(p);
            double slip = 0, duty = 0, camber = 0;
            for (var d = 0; d < state.Length; d++)
            {
                slip += model.Slip[i, d] * state[d] * (model.ShareUncertain[d] ? share : 1);
                duty += model.Duty[i, d] * state[d];
                camber += model.Camber[i, d] * state[d];
            }
            slip *= slipScale;
            var crown = model.CrownSlip * (p.Side == Side.Right ? 1 : -1);
            duty += crown;
            var normal = 1 + crown * crown;
            var ratio = Math.Log(WearMultiplier.Of(slip + crown, 1) / normal) + vehicleRate + Sensitivities.LogRateRest * N() + 0.1 * N();
            var shape = Sensitivities.EdgeShare * edge * (WearMultiplier.Signed(slip + duty) - WearMultiplier.Signed(crown)) / normal + Sensitivities.CamberEdgeShare * camberEdge * camber
                + (p.Axle == 1 ? rollFront : rollRear) + Sensitivities.EdgeRest * N() + 0.1 * N();
            var wild = _random.NextDouble() < Sensitivities.WildShare;
            return CauseCases.Tyre(p, wild ? 0.2 * N() : 0.10 * shape, ratio) with
            {
                PressureShare = Soft(look, p) ? new Estimate(lookMagnitude + 0.04 * N(), 0.02) : new Estimate(0.04 * N(), 0.02),
                RubsCatchingOutward = Felt(slip + duty, 1),
                RubsCatchingInward = Felt(slip + duty, -1),
            };
        }
        if (model.IsTrailer) return figures;
        double pull = 0, wheel = 0, zero = 0;
        for (var d = 0; d < state.Length; d++)
        {
            pull += model.Torque[d] * state[d];
            if (model.Dimensions[d].Quantity == Quantity.SensorZeroOrFrontToeSplit) zero = state[d];
            else wheel += model.WheelAngle[d] * state[d];
        }
        pull = pull * Spread(Math.Sqrt(Math.Pow(Sensitivities.TorqueGainSpread, 2) + Math.Pow(model.AssistSpread, 2)))
            + (Sensitivities.TorqueRest * Math.Max(0.3, model.AssistShare) * N()) + 0.05 * N();
        wheel = zero + wheel * Spread(Sensitivities.RatioSpreadClass) + Sensitivities.WheelAngleRest * N() + 0.3 * N();
        return figures.WithSteering(torque ? pull : null, wheel);
    }

    private int _felt;

    /// <summary>One rub a tyre; called for outward first, then inward.</summary>
    private int Felt(double slip, int way)
    {
        if (way > 0)
        {
            var latent = slip + 0.35 * N();
            _felt = latent > 0.35 ? 1 : latent < -0.35 ? -1 : 0;
            if (_random.NextDouble() < 0.12) _felt = _random.Next(3) - 1;
        }
        return _felt == way ? 1 : 0;
    }

    private static bool Soft(Story? look, Position p) =>
        look is { Quantity: Quantity.Pressure } && look.Axle == p.Axle && (look.Side is null || look.Side == p.Side);

    private double InOrder(StateDimension dimension)
    {
        double x;
        do x = dimension.PriorSd * N(); while (dimension.Tolerance is { } tolerance && Math.Abs(x) > tolerance);
        return x;
    }

    private Story? Pick(Story[] stories)
    {
        var u = _random.NextDouble();
        foreach (var story in stories)
            if ((u -= story.Share) < 0) return story;
        return null;
    }

    private Cell Choose(IReadOnlyList<Cell> cells)
    {
        var u = _random.NextDouble();
        foreach (var cell in cells)
            if ((u -= cell.Share) < 0) return cell;
        return cells[^1];
    }

    private double Spread(double logSd) => Math.Exp(logSd * N());

    private double N() => Normal.Sample(_random, 0, 1);
}
