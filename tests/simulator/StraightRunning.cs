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
public static class StraightRunning
{
    private const double Deg = Math.PI / 180;
    /// <summary>Camber stiffness over cornering stiffness, 0.05 to 0.10 for radial tyres (from memory).</summary>
    private const double CamberShare = 0.07;
    /// <summary>Arm by which conicity turns the wheel beyond its trail, m (no source; tyre moments measured with residual force).</summary>
    private const double ConicityArmM = 0.02;
    private const double Friction = 0.8;

    /// <param name="bench">Wheel angles as on the bench.</param>
    /// <param name="sinBank">Sine of the road's bank, + left side higher.</param>
    public static Straight Solve(VehicleType type, Position[] positions, Geometry bench, WheelState[] wheels, double sinBank)
    {
        var g = bench.Rolling(type);
        var n = positions.Length;
        var (stiffness, free, load) = (new double[n], new double[n], new double[n]);
        for (var i = 0; i < n; i++)
        {
            var p = positions[i];
            var axle = type.Axles[p.Axle];
            var still = axle.LoadKn * 500 / axle.TyresPerSide;
            // Left side higher: load moves to the right.
            load[i] = still - p.Sign * axle.LoadKn * 1000 * type.CentreHeightM / axle.TrackM * sinBank / axle.TyresPerSide;
            stiffness[i] = axle.StiffnessKnPerRad * 1000 * wheels[i].StiffnessShare * Math.Pow(load[i] / still, 0.8);
            free[i] = CamberShare * stiffness[i] * p.Sign * g.Camber(p.Axle, p.Left) * Deg + wheels[i].ConicityN;
        }
        var slip = new double[n];
        double steer = 0, crab = 0;
        for (var pass = 0; pass < 3; pass++)
        {
            (steer, crab) = Balance(type, positions, g, wheels, stiffness, free, slip, load, sinBank);
            for (var i = 0; i < n; i++)
            {
                var p = positions[i];
                slip[i] = crab + (type.Axles[p.Axle].Steered ? steer : 0) + g.WheelDirection(p.Axle, p.Left) * Deg;
            }
        }
        return new(steer / Deg, crab / Deg, type.IsTrailer ? 0 : Holding(type, positions, g, wheels, stiffness, free, slip, load),
            Array.ConvertAll(slip, s => s / Deg));
    }

    /// <summary>Secant stiffness of the brush model with a parabolic pressure: C (1 − x/3 + x²/27), x = C|α|/μFz.</summary>
    private static double Secant(double stiffness, double slip, double load)
    {
        var x = Math.Min(3, stiffness * Math.Abs(slip) / (Friction * load));
        return stiffness * (1 - x / 3 + x * x / 27);
    }

    private static (double Steer, double Crab) Balance(
        VehicleType type, Position[] positions, Geometry g, WheelState[] wheels,
        double[] stiffness, double[] free, double[] slip, double[] load, double sinBank)
    {
        double weight = 0, weightAt = 0;
        foreach (var axle in type.Axles)
        {
            weight += axle.LoadKn * 1000;
            weightAt -= axle.LoadKn * 1000 * axle.PositionM;
        }
        var centre = type.IsTrailer ? 0 : weightAt / weight;
        // The bank pulls to the right at the centre of gravity; a trailer's moments are taken about its kingpin.
        double force = weight * sinBank, moment = type.IsTrailer ? weightAt * sinBank : 0;
        double c = 0, cx = 0, cs = 0, csx = 0;
        for (var i = 0; i < positions.Length; i++)
        {
            var p = positions[i];
            var axle = type.Axles[p.Axle];
            var x = -axle.PositionM - centre;
            var k = Secant(stiffness[i], slip[i], load[i]);
            var side = k * g.WheelDirection(p.Axle, p.Left) * Deg + free[i];
            force -= side;
            moment -= side * x + p.Sign * axle.TrackM / 2 * wheels[i].DragN;
            c += k;
            cx += k * x;
            if (!axle.Steered) continue;
            cs += k;
            csx += k * x;
        }
        if (type.IsTrailer) return (0, moment / cx);
        var det = c * csx - cs * cx;
        return ((c * moment - cx * force) / det, (csx * force - cs * moment) / det);
    }

    private static double Holding(
        VehicleType type, Position[] positions, Geometry g, WheelState[] wheels,
        double[] stiffness, double[] free, double[] slip, double[] load)
    {
        double moment = 0, frontLoad = 0;
        for (var i = 0; i < positions.Length; i++)
        {
            var p = positions[i];
            if (!type.Axles[p.Axle].Steered) continue;
            var force = Secant(stiffness[i], slip[i], load[i]) * slip[i];
            moment += (force + free[i]) * type.MechanicalTrailM + force * type.PneumaticTrailM
                - wheels[i].ConicityN * ConicityArmM - p.Sign * wheels[i].DragN * type.ScrubRadiusM;
            if (p.Axle == 0) frontLoad += load[i] / 2;
        }
        // Caster split: the load of one wheel × lateral offset at hub height × split; pulls to the side with less caster.
        moment += frontLoad * type.HubOffsetM * g.CasterSplit * Deg;
        return moment / type.SteeringRatio;
    }
}
