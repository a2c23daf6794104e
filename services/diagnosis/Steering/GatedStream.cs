using System.Runtime.InteropServices;

namespace WearWatch.Diagnosis.Steering;

/// <summary>Where the yaw sensor's zero was taken from.</summary>
public enum YawZero
{
    /// <summary>No yaw rate.</summary>
    None,
    /// <summary>The vehicle stood still.</summary>
    Standstill,
    /// <summary>It never stood: mean of its straight driving, taken to lead nowhere in the long run.</summary>
    StraightDriving,
    /// <summary>Too little of either: left as it is.</summary>
    NotTaken,
}

/// <summary>Blocks with what the gates say of each.</summary>
internal sealed class GatedStream
{
    private const int NoRun = -1;
    private const int LeastStraightBlocks = 60; // from memory: a minute of straight road

    private readonly int[] _mode;
    private readonly float[]? _yaw;
    private double _yawBias;
    private float _yawOff;

    private GatedStream(Blocks blocks)
    {
        Blocks = blocks;
        _mode = new int[blocks.Count];
        _yaw = blocks.Means(SteeringChannel.YawRate);
        Slope = SpeedSlope(blocks);
    }

    public Blocks Blocks { get; }
    /// <summary>Change of speed over two seconds to either side, m/s²; an accelerometer would feel the grade too.</summary>
    public float[] Slope { get; }
    public YawZero YawZero { get; private set; } = YawZero.None;
    /// <summary>deg/s.</summary>
    public double YawBiasDegS { get => _yawBias; private set => (_yawBias, _yawOff) = (value, (float)value); }
    public double LaneKeepingSeconds { get; private set; }

    public RunMode? Mode(int block) => _mode[block] == NoRun ? null : (RunMode)_mode[block];

    public void Drop(int block) => _mode[block] = NoRun;

    public float Yaw(int block) =>
        _yaw is null ? float.NaN : _yaw[block] - _yawOff;

    public static GatedStream Of(Blocks blocks)
    {
        var stream = new GatedStream(blocks);
        stream.TakeStandstillBias();
        stream.Gate();
        if (stream.YawZero == YawZero.NotTaken && stream.TakeStraightBias()) stream.Gate();
        return stream;
    }

    private void TakeStandstillBias()
    {
        if (!Blocks.Has(SteeringChannel.YawRate)) return;
        YawZero = YawZero.NotTaken;
        var still = new List<float>();
        if (!Blocks.Has(SteeringChannel.Speed)) return;
        var fastest = Blocks.Max(SteeringChannel.Speed);
        var yaw = Blocks.Mean(SteeringChannel.YawRate);
        for (var i = 0; i < Blocks.Count; i++)
            if (fastest[i] <= StraightGates.StandstillKmH && !float.IsNaN(yaw[i])) still.Add(yaw[i]);
        if (still.Count < StraightGates.StandstillBlocks) return;
        (YawZero, YawBiasDegS) = (YawZero.Standstill, RobustMean.Huber(CollectionsMarshal.AsSpan(still)));
    }

    private bool TakeStraightBias()
    {
        var yaw = Blocks.Mean(SteeringChannel.YawRate);
        var straight = new List<float>(Blocks.Count);
        for (var i = 0; i < Blocks.Count; i++)
            if (_mode[i] != NoRun && !float.IsNaN(yaw[i])) straight.Add(yaw[i]);
        if (straight.Count < LeastStraightBlocks) return false;
        (YawZero, YawBiasDegS) = (YawZero.StraightDriving, RobustMean.Huber(CollectionsMarshal.AsSpan(straight)));
        return true;
    }

    private void Gate()
    {
        Array.Fill(_mode, NoRun);
        LaneKeepingSeconds = 0;
        if (!Blocks.Has(SteeringChannel.Speed)) return;
        var (hasYaw, hasAngle) = (Blocks.Has(SteeringChannel.YawRate), Blocks.Has(SteeringChannel.SteeringWheelAngle));
        if (!hasYaw && !hasAngle) return;
        var side = Blocks.Mean(hasYaw ? SteeringChannel.YawRate : SteeringChannel.SteeringWheelAngle);
        var middle = hasYaw ? (float)YawBiasDegS : MedianAngleMoving();
        var bound = hasYaw ? StraightGates.YawRateDegS : StraightGates.AngleFromMedianDeg;
        var least = Blocks.Min(SteeringChannel.SteeringWheelAngle);
        var most = Blocks.Max(SteeringChannel.SteeringWheelAngle);
        var speed = Blocks.Mean(SteeringChannel.Speed);
        var brake = Blocks.Max(SteeringChannel.Brake);
        var drive = Blocks.Mean(SteeringChannel.DriveTorque);
        var lane = Blocks.Max(SteeringChannel.LaneKeeping);
        var driven = DriveThreshold();
        var (seconds, slope) = (Blocks.Seconds, Slope);
        for (var i = 0; i < side.Length; i++)
        {
            if (!(Math.Abs(side[i] - middle) < bound)) continue;
            if (hasAngle && most[i] - least[i] > StraightGates.SteeringRateDegS * seconds[i]) continue;
            var mode = LongitudinalMode(speed[i], slope[i], !brake.IsEmpty && brake[i] > 0, !drive.IsEmpty && drive[i] > driven);
            if (mode == NoRun) continue;
            if (!lane.IsEmpty && lane[i] > 0) LaneKeepingSeconds += seconds[i];
            else _mode[i] = mode;
        }
    }

    private static int LongitudinalMode(float speed, float slope, bool braking, bool driven)
    {
        if (braking)
            return speed > StraightGates.BrakingSpeedKmH && Math.Abs(slope) <= StraightGates.BrakeAcceleration ? (int)RunMode.Brake : NoRun;
        if (!(speed > StraightGates.SpeedKmH)) return NoRun;
        if (slope > StraightGates.SteadyAcceleration) return slope <= StraightGates.DriveAcceleration ? (int)RunMode.Drive : NoRun;
        if (!(slope >= -StraightGates.SteadyAcceleration)) return NoRun;
        return driven ? (int)RunMode.Drive : (int)RunMode.Coast;
    }

    private float DriveThreshold()
    {
        var most = 0f;
        foreach (var torque in Blocks.Mean(SteeringChannel.DriveTorque)) if (torque > most) most = torque;
        return most > 0 ? StraightGates.DriveTorqueShare * most : float.PositiveInfinity;
    }

    private float MedianAngleMoving()
    {
        var speed = Blocks.Mean(SteeringChannel.Speed);
        var angle = Blocks.Mean(SteeringChannel.SteeringWheelAngle);
        var moving = new List<double>();
        for (var i = 0; i < Blocks.Count; i++)
            if (speed[i] > StraightGates.SpeedKmH && !float.IsNaN(angle[i])) moving.Add(angle[i]);
        moving.Sort();
        return (float)RobustMean.Median(moving.ToArray());
    }

    private static float[] SpeedSlope(Blocks blocks)
    {
        var slope = new float[blocks.Count];
        if (!blocks.Has(SteeringChannel.Speed)) return slope;
        var speed = blocks.Mean(SteeringChannel.Speed);
        var (joined, ticks) = (blocks.Joined, blocks.StartTicks);
        for (var i = 0; i < slope.Length; i++)
        {
            var (from, to) = (i, i);
            while (from > i - 2 && from > 0 && joined[from]) from--;
            while (to < i + 2 && to + 1 < slope.Length && joined[to + 1]) to++;
            var seconds = (ticks[to] - ticks[from]) / (double)TimeSpan.TicksPerSecond;
            slope[i] = seconds > 0 ? (float)((speed[to] - speed[from]) / 3.6 / seconds) : 0;
        }
        return slope;
    }
}
