namespace WearWatch.Diagnosis.Steering;

/// <summary>Fills a vehicle's study from one gated stream.</summary>
internal static class StreamStudy
{
    private const float MovingKmH = 5; // from memory

    public static VehicleSteeringStudy Of(string vehicleId, GatedStream stream, IReadOnlyList<StraightRun> runs, IReadOnlyDictionary<SteeringChannel, double> frozen, bool compensation)
    {
        var blocks = stream.Blocks;
        var speed = blocks.Mean(SteeringChannel.Speed);
        var angle = blocks.Mean(SteeringChannel.SteeringWheelAngle);
        var histogram = new double[VehicleSteeringStudy.HistogramClasses];
        var (recorded, left, right, together) = (0.0, 0.0, 0.0, 0.0);
        for (var i = 0; i < blocks.Count; i++)
        {
            recorded += blocks.Seconds[i];
            if (speed.IsEmpty || !(speed[i] > MovingKmH)) continue;
            var yaw = stream.Yaw(i);
            if (yaw > 0) left += yaw * blocks.Seconds[i];
            if (yaw < 0) right -= yaw * blocks.Seconds[i];
            if (angle.IsEmpty || float.IsNaN(angle[i])) continue;
            if (Math.Abs(yaw) > StraightGates.TurnDegS) together += yaw * angle[i] * blocks.Seconds[i];
            var k = (int)Math.Floor(angle[i] / VehicleSteeringStudy.HistogramStepDeg) + histogram.Length / 2;
            histogram[Math.Clamp(k, 0, histogram.Length - 1)] += blocks.Seconds[i];
        }
        var hasYaw = blocks.Has(SteeringChannel.YawRate);
        return new()
        {
            VehicleId = vehicleId,
            SecondsRecorded = recorded,
            SecondsStraight = runs.Sum(r => r.Seconds),
            SecondsLaneKeeping = stream.LaneKeepingSeconds,
            DistanceKm = blocks.DistanceKm,
            AngleHistogramS = histogram,
            TurnedLeftDeg = hasYaw ? left : null,
            TurnedRightDeg = hasYaw ? right : null,
            YawZero = stream.YawZero,
            AngleAgainstYaw = together,
            PullCompensation = compensation,
            ChannelsPresent = Enum.GetValues<SteeringChannel>().Where(c => Present(blocks, c)).ToArray(),
            FrozenS = frozen,
            NotPossible = NotPossible(stream, runs, frozen, compensation, together).ToArray(),
        };
    }

    private static string Invariant(double value) => value.ToString("0.###", System.Globalization.CultureInfo.InvariantCulture);

    private static bool Present(Blocks blocks, SteeringChannel channel) => channel switch
    {
        SteeringChannel.Latitude => blocks.Latitude.Any(double.IsFinite),
        SteeringChannel.Longitude => blocks.Longitude.Any(double.IsFinite),
        SteeringChannel.Distance => blocks.DistanceKm is not null,
        _ => blocks.Has(channel),
    };

    private static IEnumerable<string> NotPossible(GatedStream stream, IReadOnlyList<StraightRun> runs, IReadOnlyDictionary<SteeringChannel, double> frozen, bool compensation, double together)
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
        if (!blocks.Latitude.Any(double.IsFinite)) yield return "roads shared with other vehicles: no position; latitude and longitude would help";
        foreach (var (channel, seconds) in frozen.OrderBy(f => f.Key)) yield return $"{channel} stood frozen for {Invariant(Math.Round(seconds))} s of driving and was left out there";
        if (together < 0) yield return "signs: steering-wheel angle and yaw rate have opposite signs; one of the two is not positive to the left";
        if (runs.Count > 0) yield break;
        yield return stream.LaneKeepingSeconds > 0
            ? "straight running: lane keeping steered during nearly all of it; driving with it off would help"
            : "straight running: no steady straight stretch of 5 s above 50 km/h; a faster route would help";
    }
}
