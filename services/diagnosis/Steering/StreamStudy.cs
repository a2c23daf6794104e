namespace WearWatch.Diagnosis.Steering;

/// <summary>Fills a vehicle's study from one gated stream.</summary>
internal static class StreamStudy
{
    internal const float MovingKmH = 5; // from memory

    /// <summary>Straight driving as a share of driving from which on a route counts as one with straights (from memory).</summary>
    private const double LeastStraightShare = 0.03;

    private const double EnoughDrivingS = 600;

    /// <summary>How the lines begin, or what they hold, that are put together differently over streams.</summary>
    internal const string SignsWords = "signs:", CompensationWords = "pull compensation", StraightWords = "straight running:";

    internal readonly record struct Turns(ReturnToCentre? Return, UndersteerReading? Understeer, OnCentre? OnCentre);

    public static Turns TurnsOf(GatedStream stream, ReductionVehicle vehicle, SignCheck signs, RunReader reader, float[]? torque) =>
        signs.Angle == SignVerdict.Opposite ? default : new(ReturnToCentre.Of(stream, reader.StraightAngle, torque), UndersteerReading.Of(stream, vehicle), OnCentre.Of(stream, torque));

    public static VehicleSteeringStudy Of(string vehicleId, GatedStream stream, IReadOnlyList<StraightRun> runs, StreamFaults faults, SignCheck signs, bool compensation)
    {
        var blocks = stream.Blocks;
        var speed = blocks.Mean(SteeringChannel.Speed);
        var angle = blocks.Mean(SteeringChannel.SteeringWheelAngle);
        var seconds = blocks.Seconds.AsSpan();
        var histogram = new double[VehicleSteeringStudy.HistogramClasses];
        var (recorded, moving, together) = (0.0, 0.0, 0.0);
        for (var i = 0; i < seconds.Length; i++)
        {
            recorded += seconds[i];
            if (speed.IsEmpty || !(speed[i] > MovingKmH)) continue;
            moving += seconds[i];
            if (angle.IsEmpty || float.IsNaN(angle[i])) continue;
            var yaw = stream.Yaw(i);
            if (Math.Abs(yaw) > StraightGates.TurnDegS) together += yaw * angle[i] * seconds[i];
            var k = (int)Math.Floor(angle[i] / VehicleSteeringStudy.HistogramStepDeg) + histogram.Length / 2;
            histogram[Math.Clamp(k, 0, histogram.Length - 1)] += seconds[i];
        }
        var duty = TurnDuty.Of(stream);
        return new()
        {
            VehicleId = vehicleId,
            SecondsRecorded = recorded,
            SecondsMoving = moving,
            SecondsStraight = runs.Sum(r => r.Seconds),
            SecondsLaneKeeping = stream.LaneKeepingSeconds,
            DistanceKm = blocks.DistanceKm,
            AngleHistogramS = histogram,
            Duty = duty,
            TurnedLeftDeg = duty?.LeftDeg,
            TurnedRightDeg = duty?.RightDeg,
            YawZero = stream.YawZero,
            AngleAgainstYaw = together,
            Signs = signs,
            PullCompensation = compensation,
            ChannelsPresent = Enum.GetValues<SteeringChannel>().Where(c => Present(blocks, c)).ToArray(),
            Faults = faults,
            FrozenS = faults.FrozenS,
            NotPossible = [.. NotPossible(stream, runs, compensation, moving), .. SignSentences(signs), .. faults.Sentences()],
        };
    }

    private static IEnumerable<string> SignSentences(SignCheck signs)
    {
        if (signs.Angle == SignVerdict.Opposite) yield return "signs: steering-wheel angle and yaw rate have opposite signs, so no off-centre angle was read; both positive to the left would help";
        if (signs.Torque == SignVerdict.Opposite) yield return "signs: driver torque and yaw rate have opposite signs, so no steering pull was read; both positive to the left would help";
        if (signs.LateralAcceleration == SignVerdict.Opposite) yield return "signs: lateral acceleration and yaw rate have opposite signs, so no bank was read; both positive to the left would help";
    }

    private static string Invariant(double value) => value.ToString("0.###", System.Globalization.CultureInfo.InvariantCulture);

    private static bool AnyFinite(double[] values)
    {
        foreach (var x in values) if (double.IsFinite(x)) return true;
        return false;
    }

    private static bool Present(Blocks blocks, SteeringChannel channel) => channel switch
    {
        SteeringChannel.Latitude => AnyFinite(blocks.Latitude),
        SteeringChannel.Longitude => AnyFinite(blocks.Longitude),
        SteeringChannel.Distance => blocks.DistanceKm is not null,
        _ => blocks.Has(channel),
    };

    private static IEnumerable<string> NotPossible(GatedStream stream, IReadOnlyList<StraightRun> runs, bool compensation, double moving)
    {
        var blocks = stream.Blocks;
        if (blocks.TorqueUnitUnknown) yield return "steering pull: the torque's unit is raw or unknown; the operator's word on its unit would help";
        else if (!blocks.Has(SteeringChannel.DriverTorque)) yield return "steering pull: no driver torque; a driver torque channel in N·m would help";
        else if (compensation && !blocks.Has(SteeringChannel.AssistTorque)) yield return "steering pull: pull compensation takes it off the driver's torque; the assist torque would help";
        if (!blocks.Has(SteeringChannel.SteeringWheelAngle)) yield return "off-centre angle: no steering-wheel angle; a steering-wheel angle channel would help";
        if (blocks.Resolution(SteeringChannel.DriverTorque) is var step and >= StraightGates.CoarseTorqueNm)
            yield return $"steering pull: torque comes in steps of {Invariant(step)} N·m, too coarse where its own noise does not move it; steps of 0.1 N·m or finer would help";
        if (blocks.Resolution(SteeringChannel.SteeringWheelAngle) is var turn and >= StraightGates.CoarseAngleDeg)
            yield return $"off-centre angle: angle comes in steps of {Invariant(turn)} deg, too coarse where its own noise does not move it; steps of 0.1 deg or finer would help";
        if (!blocks.Has(SteeringChannel.YawRate)) yield return "curvature and bank: no yaw rate; a yaw rate channel would help";
        else if (stream.YawZero == YawZero.NotTaken) yield return "zero of the yaw rate: the vehicle neither stood for 5 s nor drove straight for 60 s; a log from key-on would help";
        if (!blocks.Has(SteeringChannel.LateralAcceleration)) yield return "own bank reading: no lateral acceleration; a lateral acceleration channel would help";
        if (!AnyFinite(blocks.Latitude)) yield return "roads shared with other vehicles: no position; latitude and longitude would help";
        var straight = runs.Sum(r => r.Seconds);
        if (runs.Count > 0)
        {
            if (moving >= EnoughDrivingS && straight < LeastStraightShare * moving)
                yield return "the road's share and the route's apart: hardly any of the driving is fast and straight, and what is lies in the same few places; another route now and then would help";
            yield break;
        }
        if (!blocks.Has(SteeringChannel.Speed)) yield return "straight running: no speed; a speed channel would help";
        else if (moving <= 0) yield return "straight running: the vehicle stood all the time; a log of driving would help";
        else if (stream.LaneKeepingSeconds > 0) yield return "straight running: lane keeping steered during nearly all of it; driving with it off would help";
        else if (!blocks.Has(SteeringChannel.YawRate) && !blocks.Has(SteeringChannel.SteeringWheelAngle)) yield return "straight running: neither yaw rate nor steering-wheel angle tells where the road is straight; a yaw rate channel would help";
        else yield return "straight running: no steady straight stretch of 5 s above 50 km/h; a faster route would help";
    }
}
