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
            FrozenS = streams.SelectMany(s => s.FrozenS).GroupBy(f => f.Key).OrderBy(g => g.Key).ToDictionary(g => g.Key, g => g.Select(f => f.Value).Order().Sum()),
            NotPossible = streams.SelectMany(s => s.NotPossible).Distinct().Order(StringComparer.Ordinal).ToArray(),
        };
    }

    private static double? Total(IEnumerable<double?> parts)
    {
        var known = parts.OfType<double>().Order().ToArray();
        return known.Length == 0 ? null : known.Sum();
    }
}
