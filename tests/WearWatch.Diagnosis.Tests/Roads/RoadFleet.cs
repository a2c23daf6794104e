using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Roads;

/// <summary>Vehicles with known pulls on roads with known banks, as runs.</summary>
internal sealed class RoadFleet
{
    private readonly Random _random;

    public int Vehicles { get; init; } = 12;
    public int Cells { get; init; } = 30;
    public int Trips { get; init; } = 6;
    public int RunsPerTrip { get; init; } = 12;
    /// <summary>Each vehicle on cells of its own.</summary>
    public bool Apart { get; init; }
    /// <summary>Above 1, the cells are split among so many depots, and one run in ten is on cells that all share.</summary>
    public int Depots { get; init; } = 1;
    public bool Position { get; init; } = true;
    public bool Acceleration { get; init; } = true;
    /// <summary>One standard deviation of the roads' mean bank, sine, from world to world.</summary>
    public double LevelSd { get; init; } = 0.005;
    /// <summary>One standard deviation of the vehicles' own gains, as a share.</summary>
    public double GainSd { get; init; }
    /// <summary>+1, or −1 for the mirror image of the whole fleet and its roads.</summary>
    public double Hand { get; init; } = 1;

    public List<StraightRun> Runs { get; } = [];
    public List<RoadVehicle> Fleet { get; } = [];
    public Dictionary<string, (double Pull, double OffCentre)> Truth { get; } = [];
    public Dictionary<string, (double Torque, double Angle)> Gains { get; } = [];

    public RoadFleet(int seed) => _random = new(seed);

    public RoadFleet Drive()
    {
        var level = 0.02 + LevelSd * Normal();
        var banks = Enumerable.Range(0, Apart ? Vehicles * Cells : Cells).Select(_ => level + 0.01 * Normal()).ToArray();
        for (var v = 0; v < Vehicles; v++) Drive(v, banks);
        return this;
    }

    private void Drive(int v, double[] banks)
    {
        var (id, pull, off, bias) = ($"v{v:00}", 0.5 * Normal(), 3 * Normal(), 0.02 * Normal());
        var (ownTorque, ownAngle) = GainSd > 0 ? (55 * (1 + GainSd * Normal()), 18 * (1 + GainSd * Normal())) : (55, 18);
        Gains[id] = (ownTorque, ownAngle);
        Truth[id] = (Hand * pull, Hand * off);
        Fleet.Add(new(id, VehicleClass.Van, Hand > 0 ? TrafficSide.Right : TrafficSide.Left, TorqueKind.Total));
        for (var t = 0; t < Trips; t++)
        {
            var (windTorque, windAngle, load) = (0.12 * Normal(), 0.3 * Normal(), 0.001 * Normal());
            for (var k = 0; k < RunsPerTrip; k++)
            {
                var cell = Depots > 1 ? DepotCell(v) : _random.Next(Cells) + (Apart ? v * Cells : 0);
                var b = banks[cell];
                Runs.Add(new()
                {
                    VehicleId = id,
                    StreamId = $"{id}-{t}",
                    Sequence = k,
                    Start = new DateTimeOffset(2026, 3, 2, 6, 0, 0, TimeSpan.Zero).AddDays(t).AddMinutes(k),
                    Seconds = 25,
                    Mode = RunMode.Coast,
                    SpeedKmH = 85,
                    TorqueIncludesAssist = true,
                    TorqueNm = Reading(pull + ownTorque * b + windTorque, 0.08, 0.08),
                    AngleDeg = Reading(off + ownAngle * b + windAngle, 0.3, 0.3),
                    BankReading = Acceleration ? Reading(1.07 * b + bias + load, 0.001, 0.002) : null,
                    RoadCell = Position ? $"cell{cell:000}" : null,
                });
            }
        }
    }

    private int DepotCell(int v)
    {
        var each = Cells / (Depots + 1);
        return _random.NextDouble() < 0.1 ? _random.Next(each) : each * (1 + v % Depots) + _random.Next(each);
    }

    /// <summary>A value with its stated error and with more beyond it that the run cannot know of.</summary>
    private Estimate Reading(double value, double stated, double beyond) =>
        new(Hand * (value + stated * Normal() + beyond * Normal()), stated);

    private double Normal() => Math.Sqrt(-2 * Math.Log(1 - _random.NextDouble())) * Math.Cos(2 * Math.PI * _random.NextDouble());
}
