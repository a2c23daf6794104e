using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Changes;

/// <summary>What was recorded of a vehicle that may change how it runs, in words.</summary>
public static class ChangeEvents
{
    /// <param name="vehicle">Tells which axles steer.</param>
    /// <param name="fittings">With their ids.</param>
    /// <param name="workshop">With their ids.</param>
    /// <param name="strikes">Jolts found in the steering signals.</param>
    /// <returns>In order of time; work on several wheels of one kind on one day is one event.</returns>
    public static IReadOnlyList<ChangeEvent> Of(Vehicle vehicle, IEnumerable<(string Id, FittingRecord Body)> fittings, IEnumerable<(string Id, WorkshopRecord Body)> workshop, IEnumerable<KerbStrikeCandidate>? strikes = null)
    {
        bool Steers(FittingRecord f) => vehicle.AxleAt(f.Position.Axle)?.Steered ?? f.Position.Axle == 1;
        var tyres = fittings.Where(f => f.Body.Event is not (FittingEvent.Removed or FittingEvent.Regrooved))
            .GroupBy(f => (Day(f.Body.At), Steers(f.Body)))
            .Select(g =>
            {
                var places = g.Select(f => f.Body.Position).Distinct().Order().ToArray();
                var done = g.Select(f => Word(f.Body.Event)).Distinct().Order(StringComparer.Ordinal);
                return new ChangeEvent(g.Key.Item2 ? EventKind.SteerTyres : EventKind.OtherTyres, g.Min(f => f.Body.At),
                    $"tyres {string.Join(" and ", done)} at {string.Join(", ", places)}", g.OrderBy(f => f.Id, StringComparer.Ordinal).First().Id, TimeKnown: false);
            });
        var visits = workshop.Select(w => new ChangeEvent(EventKind.Workshop, w.Body.At, Words(w.Body.Result), w.Id, TimeKnown: false));
        var jolts = (strikes ?? []).Select(k => new ChangeEvent(EventKind.KerbStrike, k.At, "jolt as from a kerb or a hole", k.Rests));
        return [.. tyres.Concat(visits).Concat(jolts).OrderBy(e => e.At).ThenBy(e => e.Kind).ThenBy(e => e.Rests, StringComparer.Ordinal)];
    }

    private static DateTime Day(DateTimeOffset at) => at.UtcDateTime.Date;

    private static string Word(FittingEvent e) => e switch { FittingEvent.Moved => "moved", FittingEvent.TurnedOnRim => "turned on the rim", _ => "fitted" };

    private static string Words(WorkshopResult result) => result switch
    {
        WorkshopResult.InOrder => "workshop visit, found in order",
        WorkshopResult.Adjusted => "workshop visit, adjusted",
        WorkshopResult.CouldNotAdjust => "workshop visit, could not adjust",
        WorkshopResult.PartsNeeded => "workshop visit, parts needed",
        _ => "workshop visit",
    };
}
