using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Benchmarks;

/// <summary>
/// A fleet of depots: each vehicle drives its depot's cells and, one run in five, the motorways that all share. Every run has torque,
/// angle and bank reading; one in fifty is a gross error. Eight groups of class and torque kind.
/// </summary>
internal sealed class RoadsFleet
{
    private const int VehiclesPerDepot = 100, RunsPerTrip = 20;
    private const double OnMotorway = 0.2, MotorwayShare = 0.1, Gross = 0.02;
    private static readonly VehicleClass[] Classes = [VehicleClass.Van, VehicleClass.Truck, VehicleClass.Bus, VehicleClass.Car];

    private readonly Random _random = new(1);
    private (double Torque, double Angle, double Bank) _wind; // of the present trip
    private readonly double[] _banks;
    private readonly string[] _names;
    private readonly (double Pull, double Off, double Bias)[] _own;

    public RoadsFleet(int vehicles, int runsEach, int cells)
    {
        _banks = Enumerable.Range(0, cells).Select(_ => 0.022 + 0.01 * Normal(_random)).ToArray();
        _names = Enumerable.Range(0, cells).Select(c => $"cell-{c:000000}-n").ToArray();
        _own = Enumerable.Range(0, vehicles).Select(_ => (0.5 * Normal(_random), 3 * Normal(_random), 0.02 * Normal(_random))).ToArray();
        Vehicles = Enumerable.Range(0, vehicles).Select(v => new RoadVehicle($"v{v:00000}", Classes[v % 4], TrafficSide.Right, v % 8 < 6 ? TorqueKind.Total : TorqueKind.TorsionBar)).ToArray();
        Runs = new(vehicles * runsEach);
        for (var v = 0; v < vehicles; v++) for (var k = 0; k < runsEach; k++) Runs.Add(Drive(v, k / RunsPerTrip, k));
        Pull = Vehicles.Select((v, i) => (v.VehicleId, _own[i].Pull)).ToDictionary(x => x.VehicleId, x => x.Pull);
    }

    public RoadRuns Runs { get; }
    public RoadVehicle[] Vehicles { get; }
    public Dictionary<string, double> Pull { get; }

    /// <summary>New runs of the first vehicles, a trip each.</summary>
    public RoadRuns Day(int vehicles, int runsEach)
    {
        var day = new RoadRuns(vehicles * runsEach);
        for (var v = 0; v < vehicles; v++) for (var k = 0; k < runsEach; k++) day.Add(Drive(v, 1000, k));
        return day;
    }

    /// <summary>Rows, columns and values of one witness on the same kind of roads.</summary>
    public static (int[] Row, int[] Column, float[] Values) Plain(int vehicles, int runsEach, int cells)
    {
        var random = new Random(2);
        var banks = Enumerable.Range(0, cells).Select(_ => Normal(random)).ToArray();
        var (row, column, values) = (new int[vehicles * runsEach], new int[vehicles * runsEach], new float[vehicles * runsEach]);
        for (var v = 0; v < vehicles; v++)
        {
            var own = Normal(random);
            for (var k = 0; k < runsEach; k++)
            {
                var i = v * runsEach + k;
                (row[i], column[i]) = (v, Cell(random, v, vehicles, cells));
                values[i] = (float)(own + banks[column[i]] + Normal(random));
            }
        }
        return (row, column, values);
    }

    private StraightRun Drive(int v, int trip, int k)
    {
        if (k % RunsPerTrip == 0) _wind = (0.1 * Normal(_random), 0.3 * Normal(_random), 0.001 * Normal(_random));
        var cell = Cell(_random, v, Vehicles.Length, _banks.Length);
        var (bank, (pull, off, bias), car) = (_banks[cell], _own[v], Vehicles[v]);
        var (torqueGain, angleGain) = (0.9 * RoadPriors.TorqueGain(car.Class, car.Torque), 1.1 * RoadPriors.AngleGain(car.Class));
        var gross = _random.NextDouble() < Gross ? 8 : 1;
        return new()
        {
            VehicleId = car.VehicleId,
            StreamId = $"{v}-{trip}",
            Sequence = k,
            Start = DateTimeOffset.UnixEpoch.AddDays(trip).AddMinutes(k),
            Seconds = 25,
            Mode = RunMode.Coast,
            SpeedKmH = 85,
            TorqueIncludesAssist = car.Torque == TorqueKind.Total,
            TorqueNm = new(pull + torqueGain * bank + gross * 0.15 * Normal(_random) + _wind.Torque, 0.1),
            AngleDeg = new(off + angleGain * bank + gross * 0.5 * Normal(_random) + _wind.Angle, 0.3),
            BankReading = new(1.07 * bank + bias + 0.002 * Normal(_random) + _wind.Bank, 0.001),
            RoadCell = _names[cell],
        };
    }

    private static int Cell(Random random, int v, int vehicles, int cells)
    {
        var motorway = (int)(MotorwayShare * cells);
        if (random.NextDouble() < OnMotorway) return random.Next(motorway);
        var depots = Math.Max(1, vehicles / VehiclesPerDepot);
        var local = (cells - motorway) / depots;
        return motorway + v / VehiclesPerDepot % depots * local + random.Next(local);
    }

    private static double Normal(Random random) => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());
}
