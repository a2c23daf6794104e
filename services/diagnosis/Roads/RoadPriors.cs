using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Roads;

/// <summary>What is known of roads and vehicles before any run, in one place. Bank as the sine of its angle.</summary>
public static class RoadPriors
{
    /// <summary>Usual fall of the road to the side traffic keeps to: 2 %, surveys 1.5 to 3 % (AASHTO; FHWA toll-plaza survey).</summary>
    public const double Crown = 0.02;
    /// <summary>
    /// One standard deviation of what a fleet's roads usually fall by. The surveys' half per cent is that of crowned roads; one-plane roads and
    /// far lanes draw the mean of what is driven towards zero, so a fleet's own bank readings must be able to overrule it.
    /// </summary>
    public const double CrownError = 0.01;
    /// <summary>One standard deviation of a cell's bank about the usual crown (design §6.5).</summary>
    public const double CellWidth = 0.01;
    /// <summary>One standard deviation of a whole road network's mean bank about the usual crown (from memory).</summary>
    public const double NetworkError = 0.005;
    /// <summary>One standard deviation of the mean bank of one vehicle's usual roads about its network's: a handful of roads, some of which fall one way (from memory).</summary>
    public const double VehicleRoads = 0.008;
    /// <summary>One standard deviation of the mean bank of the roads that so many vehicles share about the usual crown: the fewer they are, the further these roads may be from what is usual.</summary>
    public static double LevelError(int vehicles) => Math.Sqrt(NetworkError * NetworkError + VehicleRoads * VehicleRoads / Math.Max(1, vehicles));

    /// <summary>Zero of a lateral accelerometer, over g, before its spread is estimated: 0.2 m/s² (from memory).</summary>
    public const double AccelerometerBias = 0.02;
    /// <summary>Relative standard deviation of a class's gain about its starting value: hardly known.</summary>
    public const double GainSpread = 0.75;
    /// <summary>Relative standard deviation of the vehicles' own gains about their class's, before it is estimated: tyres, pressure and load move the understeer gradient by as much (from memory).</summary>
    public const double OwnGainSpread = 0.3;
    /// <summary>Share of the torque a driver holds himself where the assist is not logged (from memory).</summary>
    public const double TorsionBarShare = 0.4;

    /// <summary>Sine of the usual bank: right-hand traffic has its left side higher.</summary>
    public static double SignedCrown(TrafficSide side) => side == TrafficSide.Right ? Crown : -Crown;

    /// <summary>Torque at the column per sine of bank, N·m: 3500 kg on 2 % take 1.23 N·m with 55 % in front, trail 52 mm, ratio 16; the others scaled by front axle load, trail and ratio (from memory).</summary>
    public static double TorqueGain(VehicleClass vehicleClass, TorqueKind kind)
    {
        var total = vehicleClass switch { VehicleClass.Car => 30.0, VehicleClass.Van => 61, VehicleClass.Truck => 200, VehicleClass.Bus => 180, _ => 61 };
        return kind == TorqueKind.TorsionBar ? TorsionBarShare * total : total;
    }

    /// <summary>Steering-wheel angle per sine of bank, deg: ratio × understeer gradient in deg per g; 16 × 1.257° for a van, the others from memory.</summary>
    public static double AngleGain(VehicleClass vehicleClass) =>
        vehicleClass switch { VehicleClass.Car => 30, VehicleClass.Truck => 40, VehicleClass.Bus => 40, _ => 20 };

    /// <summary>Spread of steering pulls in a class, N·m, before it is estimated (from memory).</summary>
    public static double PullSpread(VehicleClass vehicleClass) => vehicleClass is VehicleClass.Truck or VehicleClass.Bus ? 1.0 : 0.5;

    /// <summary>Spread of off-centre angles in a class, deg, before it is estimated (from memory).</summary>
    public const double OffCentreSpread = 3;

    /// <summary>Spread left to a vehicle whose alignment was found in order, N·m and deg (from memory).</summary>
    public const double AnchoredPull = 0.1, AnchoredOffCentre = 0.5;

    /// <summary>Prior runs behind each variance estimate: how many observations it takes to move it.</summary>
    public const double PriorCount = 4;

    /// <summary>Run-to-run and trip-to-trip standard deviation before they are estimated: torque N·m, angle deg, bank reading (from memory).</summary>
    public static (double Run, double Trip) Noise(Witness witness) => witness switch
    {
        Witness.Torque => (0.1, 0.1),
        Witness.Angle => (0.4, 0.3),
        _ => (0.002, 0.001),
    };

    /// <summary>What a figure's wandering adds to its variance in a day before it is estimated: 0.03 N·m and 0.1 deg in a month (from memory).</summary>
    public static double WalkPerDay(Witness witness) => witness == Witness.Torque ? 0.03 * 0.03 / 30 : 0.1 * 0.1 / 30;
}
