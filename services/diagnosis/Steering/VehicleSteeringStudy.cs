namespace WearWatch.Diagnosis.Steering;

/// <summary>What the steering signals of one vehicle hold beyond its straight runs. Adds up over streams.</summary>
public sealed record VehicleSteeringStudy
{
    /// <summary>Width of a class of the angle histogram, deg.</summary>
    public const int HistogramStepDeg = 10;

    /// <summary>Classes from −180 to 180 deg; what lies beyond is in the outermost ones.</summary>
    public const int HistogramClasses = 36;

    public required string VehicleId { get; init; }
    /// <summary>s.</summary>
    public required double SecondsRecorded { get; init; }
    /// <summary>Straight driving that became runs, s.</summary>
    public required double SecondsStraight { get; init; }
    /// <summary>Straight driving left out because lane keeping steered, s.</summary>
    public required double SecondsLaneKeeping { get; init; }
    /// <summary>Distance run, km; null without the channel.</summary>
    public double? DistanceKm { get; init; }
    /// <summary>Seconds at each steering-wheel angle while moving, from −180 deg up in steps of 10 deg.</summary>
    public required IReadOnlyList<double> AngleHistogramS { get; init; }
    /// <summary>Turned to the left while moving, deg: ∫ r dt over positive yaw rate. Null without yaw rate.</summary>
    public double? TurnedLeftDeg { get; init; }
    /// <summary>Turned to the right while moving, deg, positive.</summary>
    public double? TurnedRightDeg { get; init; }
    public required YawZero YawZero { get; init; }
    /// <summary>Covariance sums of angle with yaw rate while turning: positive when their signs agree as ISO 8855 wants. deg·deg/s·s.</summary>
    public required double AngleAgainstYaw { get; init; }
    public required bool PullCompensation { get; init; }
    public required IReadOnlyList<SteeringChannel> ChannelsPresent { get; init; }
    /// <summary>Seconds in which each channel stood frozen while the vehicle moved.</summary>
    public required IReadOnlyDictionary<SteeringChannel, double> FrozenS { get; init; }
    /// <summary>Driving, s.</summary>
    public double SecondsMoving { get; init; }
    /// <summary>Turning left against right; null without yaw rate or speed.</summary>
    public TurnDuty? Duty { get; init; }
    /// <summary>Signs of the signals against the yaw rate.</summary>
    public SignCheck Signs { get; init; } = new(SignVerdict.NotTold, SignVerdict.NotTold, SignVerdict.NotTold);
    /// <summary>What was wrong with the rows.</summary>
    public StreamFaults Faults { get; init; } = new();
    /// <summary>Jolts that may have been a kerb, in order of time.</summary>
    public IReadOnlyList<KerbStrikeCandidate> KerbStrikes { get; init; } = [];
    /// <summary>Return to centre after turns; null where none ended in straight driving.</summary>
    public ReturnToCentre? Return { get; init; }
    /// <summary>Understeer gradient left and right; null without ratio, wheelbase or steady turns.</summary>
    public UndersteerReading? Understeer { get; init; }
    /// <summary>On-centre figures; null without a weave-like stretch.</summary>
    public OnCentre? OnCentre { get; init; }
    /// <summary>Energy in the band of wheel hop; null below 40 Hz.</summary>
    public WheelHop? WheelHop { get; init; }
    /// <summary>What could not be known, and which channel would make it so.</summary>
    public required IReadOnlyList<string> NotPossible { get; init; }

    /// <summary>Share of turning done to the left, 0 to 1; null below 90 deg turned.</summary>
    public double? LeftTurnShare =>
        TurnedLeftDeg + TurnedRightDeg is { } turned and >= 90 ? TurnedLeftDeg / turned : null;

    /// <summary>One vehicle's streams put together; the order does not matter.</summary>
    /// <exception cref="InvalidOperationException">There are none.</exception>
    public static VehicleSteeringStudy Of(IReadOnlyCollection<VehicleSteeringStudy> streams)
    {
        var first = streams.First();
        return first with
        {
            SecondsRecorded = streams.Select(s => s.SecondsRecorded).Order().Sum(),
            SecondsStraight = streams.Select(s => s.SecondsStraight).Order().Sum(),
            SecondsLaneKeeping = streams.Select(s => s.SecondsLaneKeeping).Order().Sum(),
            DistanceKm = Total(streams.Select(s => s.DistanceKm)),
            AngleHistogramS = Enumerable.Range(0, HistogramClasses).Select(k => streams.Select(s => s.AngleHistogramS[k]).Order().Sum()).ToArray(),
            TurnedLeftDeg = Total(streams.Select(s => s.TurnedLeftDeg)),
            TurnedRightDeg = Total(streams.Select(s => s.TurnedRightDeg)),
            YawZero = streams.Max(s => s.YawZero),
            AngleAgainstYaw = streams.Select(s => s.AngleAgainstYaw).Order().Sum(),
            PullCompensation = streams.Any(s => s.PullCompensation),
            ChannelsPresent = streams.SelectMany(s => s.ChannelsPresent).Distinct().Order().ToArray(),
            SecondsMoving = streams.Select(s => s.SecondsMoving).Order().Sum(),
            Duty = TurnDuty.Sum(streams.Select(s => s.Duty)),
            Signs = SignCheck.Join(streams.Select(s => s.Signs)),
            Faults = StreamFaults.Sum([.. streams.Select(s => s.Faults)]),
            KerbStrikes = [.. streams.SelectMany(s => s.KerbStrikes).OrderBy(k => k.At).ThenBy(k => k.Rests, StringComparer.Ordinal)],
            Return = ReturnToCentre.Join(streams.Select(s => s.Return)),
            Understeer = UndersteerReading.Join(streams.Select(s => s.Understeer)),
            OnCentre = OnCentre.Join(streams.Select(s => s.OnCentre)),
            WheelHop = WheelHop.Join(streams.Select(s => s.WheelHop)),
            FrozenS = streams.SelectMany(s => s.FrozenS).GroupBy(f => f.Key).OrderBy(g => g.Key).ToDictionary(g => g.Key, g => g.Select(f => f.Value).Order().Sum()),
            NotPossible = NotPossibleOf(streams),
        };
    }

    /// <summary>
    /// What one trip lacked another may have had: a line stays where half of the streams say it, that there was no straight running where
    /// none had any, and what a vehicle is wired or programmed to do where any stream shows it. Faults are told once, in sum.
    /// </summary>
    private static string[] NotPossibleOf(IReadOnlyCollection<VehicleSteeringStudy> streams)
    {
        var said = streams.SelectMany(s => s.NotPossible.Except(s.Faults.Sentences())).GroupBy(line => line);
        var ran = streams.Any(s => s.SecondsStraight > 0);
        bool Stays(string line, int times) =>
            line.StartsWith(StreamStudy.SignsWords, StringComparison.Ordinal) || line.Contains(StreamStudy.CompensationWords, StringComparison.Ordinal)
            || (line.StartsWith(StreamStudy.StraightWords, StringComparison.Ordinal) ? !ran : 2 * times >= streams.Count);
        return [.. said.Where(g => Stays(g.Key, g.Count())).Select(g => g.Key).Order(StringComparer.Ordinal), .. StreamFaults.Sum([.. streams.Select(s => s.Faults)]).Sentences()];
    }

    private static double? Total(IEnumerable<double?> parts)
    {
        var known = parts.OfType<double>().Order().ToArray();
        return known.Length == 0 ? null : known.Sum();
    }
}
