namespace WearWatch.Simulator;

/// <summary>What acts on one wheel besides its angles.</summary>
/// <param name="ConicityN">Force of construction towards the vehicle's left, N.</param>
/// <param name="StiffnessShare">Cornering stiffness over the usual one (pressure, wear).</param>
/// <param name="DragN">Rearward force of a dragging brake or a soft tyre, N.</param>
public readonly record struct WheelState(double ConicityN, double StiffnessShare, double DragN);

/// <summary>Steady straight running on one bank.</summary>
/// <param name="SteerDeg">Mean steer of the front wheels, deg, + left.</param>
/// <param name="CrabDeg">Heading against the direction of travel, deg, + left.</param>
/// <param name="HoldingTorqueNm">Torque at the steering wheel, before any assist, N·m, + left.</param>
/// <param name="SlipDeg">Slip angle of each wheel, in the order of its positions, deg, + left.</param>
public sealed record Straight(double SteerDeg, double CrabDeg, double HoldingTorqueNm, double[] SlipDeg);

/// <summary>
/// Side-force and yaw-moment balance of a two-track vehicle that runs straight on a banked road, small angles
/// (Gillespie, Fundamentals of Vehicle Dynamics, SAE 1992; tyres by the brush model, Pacejka, Tire and Vehicle
/// Dynamics, 3rd ed. 2012). A trailer is held at its kingpin and turns about it.
/// </summary>
public sealed class StraightRunning
{
    private const double Deg = Math.PI / 180;
    /// <summary>Camber stiffness over cornering stiffness, 0.05 to 0.10 for radial tyres (from memory).</summary>
    private const double CamberShare = 0.07;
    /// <summary>Arm by which conicity turns the wheel beyond its trail, m (no source; tyre moments measured with residual force).</summary>
    private const double ConicityArmM = 0.02;
    private const double Friction = 0.8;

    private readonly VehicleType _type;
    private readonly Position[] _positions;
    private readonly WheelState[] _wheels;
    private readonly double[] _stiffness, _load, _free;
    private readonly double _sinBank, _weight, _weightAt;

    /// <summary>A vehicle with its tyres on one bank, for any wheel angles.</summary>
    /// <param name="sinBank">Sine of the road's bank, + left side higher.</param>
    public StraightRunning(VehicleType type, Position[] positions, WheelState[] wheels, double sinBank)
    {
        (_type, _positions, _wheels, _sinBank) = (type, positions, wheels, sinBank);
        var n = positions.Length;
        (_stiffness, _free, _load) = (new double[n], new double[n], new double[n]);
        for (var i = 0; i < n; i++)
        {
            var p = positions[i];
            var axle = type.Axles[p.Axle];
            var still = axle.LoadKn * 500 / axle.TyresPerSide;
            // Left side higher: load moves to the right.
            _load[i] = still - p.Sign * axle.LoadKn * 1000 * type.CentreHeightM / axle.TrackM * sinBank / axle.TyresPerSide;
            _stiffness[i] = axle.StiffnessKnPerRad * 1000 * wheels[i].StiffnessShare * Math.Pow(_load[i] / still, 0.8);
        }
        foreach (var axle in type.Axles)
        {
            _weight += axle.LoadKn * 1000;
            _weightAt -= axle.LoadKn * 1000 * axle.PositionM;
        }
    }

    /// <param name="bench">Wheel angles as on the bench.</param>
    /// <param name="sinBank">Sine of the road's bank, + left side higher.</param>
    public static Straight Solve(VehicleType type, Position[] positions, Geometry bench, WheelState[] wheels, double sinBank)
    {
        var slip = new double[positions.Length];
        var (steer, crab, torque) = new StraightRunning(type, positions, wheels, sinBank).Solve(bench.Rolling(type), slip);
        return new(steer, crab, torque, slip);
    }

    /// <summary>Straight running with given wheel angles.</summary>
    /// <param name="g">Wheel angles as they are when rolling under load.</param>
    /// <param name="slipDeg">Takes the slip of each wheel, deg, + left.</param>
    /// <returns>Mean steer and crab, deg, and holding torque, N·m, all + left.</returns>
    public (double SteerDeg, double CrabDeg, double TorqueNm) Solve(Geometry g, Span<double> slipDeg)
    {
        for (var i = 0; i < _positions.Length; i++)
        {
            var p = _positions[i];
            _free[i] = CamberShare * _stiffness[i] * p.Sign * g.Camber(p.Axle, p.Left) * Deg + _wheels[i].ConicityN;
        }
        slipDeg.Clear();
        double steer = 0, crab = 0;
        for (var pass = 0; pass < 3; pass++)
        {
            (steer, crab) = Balance(g, slipDeg);
            for (var i = 0; i < _positions.Length; i++)
            {
                var p = _positions[i];
                slipDeg[i] = crab + (_type.Axles[p.Axle].Steered ? steer : 0) + g.WheelDirection(p.Axle, p.Left) * Deg;
            }
        }
        var torque = _type.IsTrailer ? 0 : Holding(g, slipDeg);
        for (var i = 0; i < slipDeg.Length; i++) slipDeg[i] /= Deg;
        return (steer / Deg, crab / Deg, torque);
    }

    /// <summary>Secant stiffness of the brush model with a parabolic pressure: C (1 − x/3 + x²/27), x = C|α|/μFz.</summary>
    private static double Secant(double stiffness, double slip, double load)
    {
        var x = Math.Min(3, stiffness * Math.Abs(slip) / (Friction * load));
        return stiffness * (1 - x / 3 + x * x / 27);
    }

    private (double Steer, double Crab) Balance(Geometry g, ReadOnlySpan<double> slip)
    {
        var centre = _type.IsTrailer ? 0 : _weightAt / _weight;
        // The bank pulls to the right at the centre of gravity; a trailer's moments are taken about its kingpin.
        double force = _weight * _sinBank, moment = _type.IsTrailer ? _weightAt * _sinBank : 0;
        double c = 0, cx = 0, cs = 0, csx = 0;
        for (var i = 0; i < _positions.Length; i++)
        {
            var p = _positions[i];
            var axle = _type.Axles[p.Axle];
            var x = -axle.PositionM - centre;
            var k = Secant(_stiffness[i], slip[i], _load[i]);
            var side = k * g.WheelDirection(p.Axle, p.Left) * Deg + _free[i];
            force -= side;
            moment -= side * x + p.Sign * axle.TrackM / 2 * _wheels[i].DragN;
            c += k;
            cx += k * x;
            if (!axle.Steered) continue;
            cs += k;
            csx += k * x;
        }
        if (_type.IsTrailer) return (0, moment / cx);
        var det = c * csx - cs * cx;
        return ((c * moment - cx * force) / det, (csx * force - cs * moment) / det);
    }

    private double Holding(Geometry g, ReadOnlySpan<double> slip)
    {
        double moment = 0, frontLoad = 0;
        for (var i = 0; i < _positions.Length; i++)
        {
            var p = _positions[i];
            if (!_type.Axles[p.Axle].Steered) continue;
            var force = Secant(_stiffness[i], slip[i], _load[i]) * slip[i];
            moment += (force + _free[i]) * _type.MechanicalTrailM + force * _type.PneumaticTrailM
                - _wheels[i].ConicityN * ConicityArmM - p.Sign * _wheels[i].DragN * _type.ScrubRadiusM;
            if (p.Axle == 0) frontLoad += _load[i] / 2;
        }
        // Caster split: the load of one wheel × lateral offset at hub height × split; pulls to the side with less caster.
        moment += frontLoad * _type.HubOffsetM * g.CasterSplit * Deg;
        return moment / _type.SteeringRatio;
    }
}
