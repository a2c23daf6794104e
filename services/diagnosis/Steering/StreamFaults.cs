namespace WearWatch.Diagnosis.Steering;

/// <summary>What was wrong with the rows of a stream: left out or mended, and counted. Adds up over streams.</summary>
public sealed record StreamFaults
{
    public StreamClock Clock { get; init; } = new();
    /// <summary>Seconds in which each channel stood frozen while the vehicle moved; left out.</summary>
    public IReadOnlyDictionary<SteeringChannel, double> FrozenS { get; init; } = new Dictionary<SteeringChannel, double>();
    /// <summary>Seconds in which each channel stood at its end; left out.</summary>
    public IReadOnlyDictionary<SteeringChannel, double> SaturatedS { get; init; } = new Dictionary<SteeringChannel, double>();
    /// <summary>Times the wheel angle wrapped at a full turn; put together again.</summary>
    public int AngleWraps { get; init; }
    /// <summary>Driving with a position held from before, s; the position is left out.</summary>
    public double HeldPositionS { get; init; }
    /// <summary>The torque's scale changes without a word; none of the stream's torque is read.</summary>
    public bool TorqueScaleChanges { get; init; }

    internal static StreamFaults Remove(Blocks blocks) => new()
    {
        Clock = blocks.Chunks,
        TorqueScaleChanges = SignalFaults.ScaleChanges(blocks),
        SaturatedS = SignalFaults.BlankSaturated(blocks),
        FrozenS = SignalFaults.BlankFrozen(blocks),
        AngleWraps = SignalFaults.Unwrap(blocks),
        HeldPositionS = SignalFaults.BlankHeldPositions(blocks),
    };

    internal static StreamFaults Sum(IReadOnlyCollection<StreamFaults> faults) => new()
    {
        Clock = StreamClock.Sum(faults.Select(f => f.Clock).OrderBy(c => c.RepeatedS).ThenBy(c => c.MissingS)),
        FrozenS = Seconds(faults.SelectMany(f => f.FrozenS)),
        SaturatedS = Seconds(faults.SelectMany(f => f.SaturatedS)),
        AngleWraps = faults.Sum(f => f.AngleWraps),
        HeldPositionS = faults.Select(f => f.HeldPositionS).Order().Sum(),
        TorqueScaleChanges = faults.Any(f => f.TorqueScaleChanges),
    };

    private static Dictionary<SteeringChannel, double> Seconds(IEnumerable<KeyValuePair<SteeringChannel, double>> parts) =>
        parts.GroupBy(f => f.Key).OrderBy(g => g.Key).ToDictionary(g => g.Key, g => g.Select(f => f.Value).Order().Sum());

    /// <summary>In words, a line a fault; "what: because; what would help".</summary>
    internal IEnumerable<string> Sentences()
    {
        if (Clock.Backwards > 0) yield return $"rows at {Seconds(Clock.RepeatedS)} s of repeated time: the clock went back ({Clock.Backwards}×) and what came again was left out; a clock that only runs forward would help";
        if (Clock.Jumps > 0) yield return $"dates of the stream: the clock jumped more than a day ahead ({Clock.Jumps}×); a clock set before driving would help";
        if (Clock.MissingS > 0) yield return $"{Seconds(Clock.MissingS)} s of driving: no rows came ({Clock.Gaps} gaps); a link that sends again would help";
        if (Clock.RateChanges > 0) yield return $"figures that need one rate: the rate changed ({Clock.RateChanges}×), each part was reduced at its own; one rate would help";
        if (Clock.TorqueUnitChanges > 0) yield return $"torque of part of the stream: its declared unit changed ({Clock.TorqueUnitChanges}×) and only N·m was read; one unit would help";
        if (TorqueScaleChanges) yield return "steering pull: the torque's numbers change their scale in the middle of a stream, and which part is in N·m cannot be known; the operator's word on its unit would help";
        foreach (var (channel, seconds) in FrozenS.OrderBy(f => f.Key)) yield return $"{Words(channel)} of {Seconds(seconds)} s of driving: it stood frozen and was left out there; a sensor that is alive would help";
        foreach (var (channel, seconds) in SaturatedS.OrderBy(f => f.Key)) yield return $"{Words(channel)} of {Seconds(seconds)} s: it stood at the end of its range and was left out there; a wider range would help";
        if (AngleWraps > 0) yield return $"wheel angle of the seconds in which it wrapped: it jumps by a full turn ({AngleWraps}×) and was put together again; an angle over several turns would help";
        if (HeldPositionS > 0) yield return $"road of {Seconds(HeldPositionS)} s of driving: the position was held from an earlier fix and left out; a fix every second would help";
    }

    /// <summary>DriverTorque as "driver torque".</summary>
    private static string Words(SteeringChannel channel) =>
        string.Concat(channel.ToString().Select((c, i) => char.IsUpper(c) && i > 0 ? $" {char.ToLowerInvariant(c)}" : $"{char.ToLowerInvariant(c)}"));

    private static string Seconds(double value) => Math.Round(value).ToString(System.Globalization.CultureInfo.InvariantCulture);
}
