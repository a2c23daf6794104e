using System.Runtime.Intrinsics;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Steering;

/// <summary>What one stream comes to.</summary>
public sealed record StreamReduction(IReadOnlyList<StraightRun> Runs, VehicleSteeringStudy Study);

/// <summary>From samples to straight runs: one pass to one-second block means, then gates, then robust means.</summary>
public static class RunReduction
{
    private const int LeastSlopeBlocks = 60; // from memory: a minute of straight road

    public static IReadOnlyList<StraightRun> Reduce(string vehicleId, string streamId, IReadOnlyList<(long Sequence, SteeringColumns Columns)> chunks, ReductionVehicle vehicle) =>
        ReduceStream(vehicleId, streamId, chunks, vehicle).Runs;

    /// <summary>
    /// Reduces one stream (one trip). Its chunks may come in any order; a repeated sequence counts once.
    /// <c>scalar</c> takes the scalar twin of the block pass, for tests and benchmarks.
    /// </summary>
    public static StreamReduction ReduceStream(string vehicleId, string streamId, IReadOnlyList<(long Sequence, SteeringColumns Columns)> chunks, ReductionVehicle vehicle, bool scalar = false)
    {
        var blocks = Blocks.Of(chunks, scalar);
        var faults = StreamFaults.Remove(blocks);
        var stream = GatedStream.Of(blocks);
        var signs = SignCheck.Of(stream);
        var compensation = blocks.Has(SteeringChannel.DriverTorque) && PullCompensation.Recognised(stream);
        var torque = faults.TorqueScaleChanges || signs.Torque == SignVerdict.Opposite ? null : TotalTorque(blocks, compensation);
        var reader = new RunReader(vehicleId, streamId, stream, vehicle, signs, torque, AngleSlope(stream, vehicle));
        // Turns tell of release and friction before the time after them is dropped.
        var turns = StreamStudy.TurnsOf(stream, vehicle, signs, reader, torque);
        if (compensation) PullCompensation.DropAfterTurns(stream);
        var runs = new List<StraightRun>();
        foreach (var (from, to) in Stretches(stream)) runs.Add(reader.Read(from, to));
        var study = StreamStudy.Of(vehicleId, stream, runs, faults, signs, compensation) with
        {
            KerbStrikes = KerbStrikes.Find(streamId, stream),
            Return = turns.Return,
            Understeer = turns.Understeer,
            OnCentre = turns.OnCentre,
            WheelHop = WheelHop.Of(Blocks.Ordered(chunks), runs),
        };
        return new(runs, study);
    }

    /// <summary>Driver plus assist where the stream has both; NaN where either is missing. The torsion bar alone under pull compensation tells nothing.</summary>
    private static float[]? TotalTorque(Blocks blocks, bool compensation)
    {
        if (!blocks.Has(SteeringChannel.DriverTorque)) return null;
        var total = blocks.Mean(SteeringChannel.DriverTorque).ToArray();
        if (!blocks.Has(SteeringChannel.AssistTorque)) return compensation ? null : total;
        var assist = blocks.Mean(SteeringChannel.AssistTorque);
        for (var i = 0; i < total.Length; i++) total[i] += assist[i];
        return total;
    }

    /// <summary>Stretches of one mode without a gap, cut evenly to at most 30 s, none shorter than 5 s.</summary>
    private static IEnumerable<(int From, int To)> Stretches(GatedStream stream)
    {
        var blocks = stream.Blocks;
        for (var from = 0; from < blocks.Count;)
        {
            var mode = stream.Mode(from);
            var to = from + 1;
            while (to < blocks.Count && blocks.Joined[to] && stream.Mode(to) == mode) to++;
            if (mode is not null)
            {
                var seconds = RunReader.Sum(blocks.Seconds, from, to);
                var parts = (int)Math.Ceiling(seconds / StraightGates.LongestRunS - 1e-6);
                if (seconds >= StraightGates.ShortestRunS - 1e-3)
                    for (var p = 0; p < parts; p++)
                        yield return (from + (int)((long)(to - from) * p / parts), from + (int)((long)(to - from) * (p + 1) / parts));
            }
            from = to;
        }
    }

    /// <summary>
    /// Angle per yaw rate where ratio or wheelbase is unknown, s: least squares over the straight blocks. Noise of the yaw rate
    /// makes it somewhat small, which leaves a little curvature in the angle.
    /// </summary>
    private static double? AngleSlope(GatedStream stream, ReductionVehicle vehicle)
    {
        if (vehicle is { WheelbaseM: not null, SteeringRatio: not null }) return null;
        var angle = stream.Blocks.Mean(SteeringChannel.SteeringWheelAngle);
        if (angle.IsEmpty) return null;
        var (n, sx, sy, sxx, sxy) = (0, 0.0, 0.0, 0.0, 0.0);
        for (var i = 0; i < stream.Blocks.Count; i++)
        {
            double x = stream.Yaw(i), y = angle[i];
            if (stream.Mode(i) is null || double.IsNaN(x) || double.IsNaN(y)) continue;
            n++;
            (sx, sy, sxx, sxy) = (sx + x, sy + y, sxx + x * x, sxy + x * y);
        }
        var spread = sxx - sx * sx / Math.Max(n, 1);
        return n < LeastSlopeBlocks || !(spread > 0) ? null : (sxy - sx * sy / n) / spread;
    }
}

/// <summary>Turns a stretch of blocks into a run.</summary>
internal sealed class RunReader(string vehicleId, string streamId, GatedStream stream, ReductionVehicle vehicle, SignCheck signs, float[]? torque, double? angleSlope)
{
    private readonly double[] _angle = Angles(stream, vehicle, angleSlope);
    private readonly double[] _bank = Banks(stream);
    private readonly double[]? _torque = torque is null ? null : Array.ConvertAll(torque, x => (double)x);

    public StraightRun Read(int from, int to)
    {
        var blocks = stream.Blocks;
        var middle = (from + to) / 2;
        var samples = 0;
        foreach (var n in blocks.Samples.AsSpan(from, to - from)) samples += n;
        return new()
        {
            VehicleId = vehicleId,
            StreamId = streamId,
            Sequence = blocks.Sequence[from],
            Start = new DateTimeOffset(blocks.StartTicks[from], TimeSpan.Zero),
            Seconds = Sum(blocks.Seconds, from, to),
            Mode = stream.Mode(from)!.Value,
            SpeedKmH = Average(blocks.Mean(SteeringChannel.Speed), from, to)!.Value,
            TorqueNm = _torque is null ? null : Robust(from, to, _torque, samples, TorqueResolution(), SteeringChannel.DriverTorque),
            TorqueIncludesAssist = blocks.Has(SteeringChannel.AssistTorque),
            // With signs that disagree the curvature would be doubled, not removed.
            AngleDeg = blocks.Has(SteeringChannel.SteeringWheelAngle) && signs.Angle != SignVerdict.Opposite
                ? Robust(from, to, _angle, samples, blocks.Resolution(SteeringChannel.SteeringWheelAngle), SteeringChannel.SteeringWheelAngle) : null,
            BankReading = blocks.Has(SteeringChannel.LateralAcceleration) && blocks.Has(SteeringChannel.YawRate) && signs.LateralAcceleration != SignVerdict.Opposite
                ? Robust(from, to, _bank, samples, blocks.Resolution(SteeringChannel.LateralAcceleration) / SteeringEquations.Gravity, SteeringChannel.LateralAcceleration) : null,
            YawRateDegS = blocks.Has(SteeringChannel.YawRate) ? Average(blocks.Mean(SteeringChannel.YawRate), from, to) - stream.YawBiasDegS : null,
            LoadKg = Average(blocks.Mean(SteeringChannel.Load), from, to),
            RoadCell = RoadCell.Of(Position(from, to, 1), Position(middle, to, 1), Position(to - 1, from - 1, -1)),
        };
    }

    private double TorqueResolution() => Math.Max(stream.Blocks.Resolution(SteeringChannel.DriverTorque), stream.Blocks.Resolution(SteeringChannel.AssistTorque));

    /// <summary>Wheel angle less what the road's curvature takes, deg.</summary>
    internal double StraightAngle(int i) => _angle[i];

    /// <summary>Wheel angle of every block less what the road's curvature takes, deg; empty where no block can be straight.</summary>
    private static double[] Angles(GatedStream stream, ReductionVehicle vehicle, double? angleSlope)
    {
        var angle = stream.Blocks.Mean(SteeringChannel.SteeringWheelAngle);
        var speed = stream.Blocks.Mean(SteeringChannel.Speed);
        if (angle.IsEmpty || speed.IsEmpty) return [];
        var straight = GC.AllocateUninitializedArray<double>(angle.Length);
        var byGeometry = vehicle is { WheelbaseM: not null, SteeringRatio: not null };
        var (wheelbase, ratio, slope) = (vehicle.WheelbaseM ?? 0, vehicle.SteeringRatio ?? 0, angleSlope ?? 0);
        for (var i = 0; i < straight.Length; i++)
        {
            double yaw = stream.Yaw(i);
            straight[i] = double.IsNaN(yaw) ? stream.YawZero == YawZero.None ? angle[i] : double.NaN
                : angle[i] - (byGeometry ? SteeringEquations.CurvatureAngle(ratio, wheelbase, speed[i] / 3.6, yaw, vehicle.UndersteerRadPerG) : slope * yaw);
        }
        return straight;
    }

    /// <summary>Sine of the bank under every block, the sensor's bias in it; empty without the channels.</summary>
    private static double[] Banks(GatedStream stream)
    {
        var lateral = stream.Blocks.Mean(SteeringChannel.LateralAcceleration);
        var speed = stream.Blocks.Mean(SteeringChannel.Speed);
        if (lateral.IsEmpty || speed.IsEmpty) return [];
        var bank = GC.AllocateUninitializedArray<double>(lateral.Length);
        for (var i = 0; i < bank.Length; i++) bank[i] = SteeringEquations.SineOfBank(lateral[i], speed[i] / 3.6, stream.Yaw(i) * Math.PI / 180);
        return bank;
    }

    private Estimate? Robust(int from, int to, double[] values, int samples, double resolution, SteeringChannel channel)
    {
        var range = Range(stream.Blocks.Min(channel)[from..to], stream.Blocks.Max(channel)[from..to]);
        var coarse = channel switch
        {
            SteeringChannel.DriverTorque => StraightGates.CoarseTorqueNm,
            SteeringChannel.SteeringWheelAngle => StraightGates.CoarseAngleDeg,
            _ => double.PositiveInfinity,
        };
        // The rounding error of an unmoved coarse step is the same in run after run: averaging over runs would hide it.
        if (resolution >= coarse && range <= 2 * resolution) return null;
        return RobustMean.Of(values.AsSpan(from, to - from), resolution, range, samples);
    }

    /// <summary>Largest less least sample; NaN where a block has none.</summary>
    private static double Range(ReadOnlySpan<float> least, ReadOnlySpan<float> most)
    {
        var (lo, hi) = (Vector256.Create(float.PositiveInfinity), Vector256.Create(float.NegativeInfinity));
        var at = 0;
        for (; at + 8 <= least.Length; at += 8)
        {
            lo = Vector256.Min(lo, Vector256.Create<float>(least[at..]));
            hi = Vector256.Max(hi, Vector256.Create<float>(most[at..]));
        }
        var (low, high) = (float.PositiveInfinity, float.NegativeInfinity);
        for (var lane = 0; lane < 8; lane++) (low, high) = (Math.Min(low, lo[lane]), Math.Max(high, hi[lane]));
        for (; at < least.Length; at++) (low, high) = (Math.Min(low, least[at]), Math.Max(high, most[at]));
        return (double)high - low;
    }

    private (double, double) Position(int from, int end, int step)
    {
        for (var i = from; i != end; i += step)
            if (double.IsFinite(stream.Blocks.Latitude[i]) && double.IsFinite(stream.Blocks.Longitude[i])) return (stream.Blocks.Latitude[i], stream.Blocks.Longitude[i]);
        return (double.NaN, double.NaN);
    }

    internal static double Sum(ReadOnlySpan<float> values, int from, int to)
    {
        var sum = 0.0;
        foreach (var x in values[from..to]) sum += x;
        return sum;
    }

    private static double? Average(ReadOnlySpan<float> values, int from, int to)
    {
        if (values.IsEmpty) return null;
        var (sum, n) = (0.0, 0);
        foreach (var x in values[from..to]) if (!float.IsNaN(x)) (sum, n) = (sum + x, n + 1);
        return n == 0 ? null : sum / n;
    }
}
