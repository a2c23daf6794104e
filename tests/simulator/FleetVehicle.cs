namespace WearWatch.Simulator;

/// <summary>Something on a sound vehicle that looks like misalignment and is not.</summary>
/// <param name="Kind">The diagnosis word where there is one (<c>conicity</c>, <c>pressure</c>, <c>crown</c>, <c>drag</c>,
/// <c>damper</c>, <c>duty</c>, <c>sensor_zero_or_front_toe_split</c>), else <c>torque_zero</c>, <c>roll</c>, <c>swapped_records</c>.</param>
public sealed record LookAlike(string Kind, double Size, string Unit, string Note);

/// <summary>A vehicle of the invented fleet: what it is, what is wrong with it, how it is used. Days count from the window's first day.</summary>
public sealed class FleetVehicle
{
    public required int Index { get; init; }
    public required string Id { get; init; }
    public required VehicleType Type { get; init; }
    public required Depot Depot { get; init; }
    public required Position[] Positions { get; init; }
    public required Geometry Sound { get; init; }
    /// <summary>Wheel angles after a repair inside the window; null where there was none.</summary>
    public Geometry? AfterRepair { get; init; }
    public Fault? Fault { get; init; }
    public required SteeringSensors Sensors { get; set; }
    public required Duty Duty { get; set; }
    /// <summary>Indices of its usual routes in its depot's network.</summary>
    public required int[] Routes { get; set; }
    /// <summary>(pressure − set) ÷ set, by position.</summary>
    public required double[] PressureShare { get; init; }
    /// <summary>Drag of the front brakes, left and right, N.</summary>
    public double[] DragN { get; } = new double[2];
    public List<LookAlike> LookAlikes { get; } = [];
    public required double KmPerWeek { get; init; }
    public required double OdometerKm { get; init; }
    /// <summary>Position whose tyre is being cupped by a worn damper; none where negative.</summary>
    public int CuppedPosition { get; set; } = -1;
    /// <summary>Records of this vehicle mix up left and right more than once.</summary>
    public bool RecordsSwapped { get; set; }
    /// <summary>Where the distance is read: odometer, hub_counter or none.</summary>
    public required string DistanceSource { get; init; }
    public required string RegistrationYear { get; init; }

    /// <summary>Wheel angles on a day.</summary>
    public Geometry GeometryAt(double day)
    {
        if (Fault is null) return Sound;
        if (day >= Fault.RepairDay) return AfterRepair ?? Sound;
        var share = Fault.Share(day);
        return share == 0 ? Sound : Sound.Plus(Fault.Change, share);
    }

    /// <summary>What acts on the wheels with the tyres they carry.</summary>
    public WheelState[] Wheels(Tyre[] tyres)
    {
        var wheels = new WheelState[Positions.Length];
        for (var i = 0; i < wheels.Length; i++)
        {
            var p = Positions[i];
            var worn = 1 - tyres[i].DepthMm.Average() / tyres[i].NewDepthMm;
            var soft = Math.Max(0, -PressureShare[i]);
            var brake = p.Axle == 0 && !Type.IsTrailer ? DragN[p.Left ? 0 : 1] : 0;
            // A worn tread is stiffer; a soft tyre is less stiff and rolls harder (from memory).
            wheels[i] = new(p.Sign * tyres[i].ConicityN, (1 + 0.12 * worn) * (1 - 0.6 * soft), brake + 0.008 * soft * 500 * Type.Axles[p.Axle].LoadKn);
        }
        return wheels;
    }

    /// <summary>Steady slip of each wheel, deg + left, on the mean bank of the vehicle's roads with its usual turning.</summary>
    public double[] MeanSlip(Geometry g, Tyre[] tyres)
    {
        var slip = StraightRunning.Solve(Type, Positions, g, Wheels(tyres), Duty.MeanBank).SlipDeg;
        for (var i = 0; i < slip.Length; i++)
            slip[i] += Duty.OneWayDeg * (Positions[i].Axle == 0 && !Type.IsTrailer ? 1 : 0.5);
        return slip;
    }
}
