using System.Globalization;
using WearWatch.Diagnosis.Changes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Rules;

/// <summary>
/// Steering pull, off-centre angle or an axle's wear rate did not stay as it was: when, by how much, and what was recorded then. One
/// finding a quantity; the latest sudden change speaks, the others stand in its evidence.
/// </summary>
public static class ChangeRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures) =>
        figures.Changes.Where(c => ChangeLimits.IsPublished(figures, c))
            .GroupBy(c => (c.Quantity, c.Axle)).OrderBy(g => g.Key.Quantity).ThenBy(g => g.Key.Axle)
            .Select(g => Of(figures, [.. g.OrderBy(c => c.Form).ThenByDescending(c => c.Likely).ThenByDescending(c => Math.Abs(c.Size.Value))]));

    private static Finding Of(VehicleFigures figures, IReadOnlyList<DatedChange> changes)
    {
        var latest = changes[0];
        var why = Nearest(latest);
        return new()
        {
            Kind = latest.Quantity switch { ChangeQuantity.SteeringPull => FindingKind.SteeringPullChange, ChangeQuantity.OffCentreAngle => FindingKind.OffCentreChange, _ => FindingKind.WearRateChange },
            Axle = latest.Axle ?? figures.Vehicle.SteerAxle()?.Number,
            Side = latest.Quantity switch
            {
                ChangeQuantity.SteeringPull => Witnesses.PullSide(latest.Size.Value),
                ChangeQuantity.OffCentreAngle => latest.Size.Value > 0 ? Side.Left : Side.Right,
                _ => null,
            },
            Sentence = $"{Told(latest)}; {Recorded(latest)}.",
            EvidenceFor = [.. changes.SelectMany(Evidence)],
            Confounders = Confounders(latest),
            Causes = Causes(figures, latest, why),
            FirstCheck = FirstCheck.For(Check(latest, why)),
            AlignmentMends = Mends(latest, why),
            Caution = latest.Quantity == ChangeQuantity.WearRate || why == EventKind.KerbStrike ? Cautions.UnderVehicle : Cautions.LiveSteering,
            Strength = RuleLimits.Strength(latest.Size),
        };
    }

    /// <summary>"The steering wheel's place when travelling straight changed suddenly by ... between ... and ..."</summary>
    private static string Told(DatedChange c)
    {
        var (what, size) = c.Quantity switch
        {
            ChangeQuantity.SteeringPull => ("The steering pull", $"{TradeWords.Full(Size(c), 2, "N·m")} to the {Witnesses.PullSide(c.Size.Value).Word()}"),
            ChangeQuantity.OffCentreAngle => ("The steering wheel's place when travelling straight", $"{TradeWords.Full(Size(c), 1, "deg")} to the {TradeWords.Direction(c.Size.Value)}"),
            _ => ($"The wear of axle {(c.Axle ?? 0).ToString(CultureInfo.InvariantCulture)}", $"{TradeWords.Full(Size(c) * 100, 0, "% of the normal rate")} {(c.Size.Value > 0 ? "upward" : "downward")}"),
        };
        var how = c.Form == ChangeForm.Drift ? "drifted" : c.Provisional ? "changed suddenly (provisional until the next fleet fit)" : "changed suddenly";
        return $"{what} {how} by {size}, {When(c)}";
    }

    private static Estimate Size(DatedChange c) => c.Size * Witnesses.SignOf(c.Size.Value);

    /// <summary>"on 2026-09-07", or "between 2026-08-20 and 2026-08-27 (90 %)".</summary>
    private static string When(DatedChange c)
    {
        var (from, to) = (Day(c.From), Day(c.To));
        if (c.Form == ChangeForm.Drift) return $"from {from} to {to}";
        return from == to ? $"on {from} (90 %)" : $"between {from} and {to} (90 %)";
    }

    private static string Recorded(DatedChange c) => c.Form == ChangeForm.Drift ? "a drift has no single cause in the records"
        : c.Happened.Count == 0 ? "nothing was recorded then"
        : $"recorded then: {string.Join("; ", c.Happened.Take(3).Select(e => $"{e.Words} ({Day(e.At)})"))}";

    private static IEnumerable<Evidence> Evidence(DatedChange c)
    {
        yield return new(string.Create(CultureInfo.InvariantCulture, $"{Told(c)}; {c.TripsBefore} {Units(c)} before, {c.TripsAfter} after"), c.Rests);
        foreach (var e in c.Happened.Take(3)) yield return new($"Recorded then: {e.Words} ({Day(e.At)})", [e.Rests]);
    }

    private static string Units(DatedChange c) => c.Quantity == ChangeQuantity.WearRate ? "survey intervals" : "trips";

    /// <summary>What weighs most of that which happened then: a blow, then the workshop's hands, then tyres.</summary>
    private static EventKind? Nearest(DatedChange c)
    {
        static int Rank(EventKind kind) => kind switch { EventKind.KerbStrike => 0, EventKind.Workshop => 1, EventKind.SteerTyres => 2, _ => 3 };
        return c.Happened.Count == 0 ? null : c.Happened.MinBy(e => Rank(e.Kind))!.Kind;
    }

    private static CheckFor Check(DatedChange c, EventKind? why) => c.Quantity == ChangeQuantity.WearRate ? CheckFor.WearChange : why switch
    {
        EventKind.Workshop => CheckFor.ChangeAtWorkshop,
        EventKind.SteerTyres or EventKind.OtherTyres => CheckFor.ChangeAtTyres,
        _ => c.Form == ChangeForm.Drift ? CheckFor.SteeringDrift : CheckFor.ChangeWithoutRecord,
    };

    /// <summary>
    /// A step at a change of tyres goes with the tyres; one at a workshop visit that brought the vehicle nearer to straight needs no more
    /// work; the others are bent, worn or displaced parts, after which an alignment is due.
    /// </summary>
    private static bool Mends(DatedChange c, EventKind? why) => why switch
    {
        EventKind.SteerTyres or EventKind.OtherTyres => false,
        EventKind.Workshop => c.Quantity != ChangeQuantity.WearRate && Math.Abs(c.After) > Math.Abs(c.Before),
        _ => c.Quantity != ChangeQuantity.WearRate || c.Size.Value > 0,
    };

    private static IReadOnlyList<Quantity> Causes(VehicleFigures figures, DatedChange c, EventKind? why) => (c.Quantity, why) switch
    {
        (ChangeQuantity.WearRate, _) => [figures.Vehicle.ToeOf(c.Axle ?? 1), Quantity.Pressure, Quantity.Duty],
        (_, EventKind.SteerTyres or EventKind.OtherTyres) => [Quantity.Conicity, Quantity.Pressure],
        (ChangeQuantity.SteeringPull, _) => [Quantity.CamberSplit, Quantity.CasterSplit, Quantity.Drag],
        _ => [Quantity.SensorZeroOrFrontToeSplit, Quantity.Thrust],
    };

    private static IReadOnlyList<Confounder> Confounders(DatedChange c) => c.Quantity switch
    {
        ChangeQuantity.WearRate => [new("Another load, route or driver since then", "What the vehicle did before and after"), new("Another hand or gauge at the surveys", "One more survey by the same hand")],
        ChangeQuantity.SteeringPull => [new("Another set of tyres that nobody recorded", "The tyre numbers"), new("The zero of the torque sensor was set anew", "The workshop's record; no tyre shows wear")],
        _ => [new("The zero of the angle sensor was set anew, or the battery was off", "The workshop's record; no tyre shows wear"), new("Another set of tyres that nobody recorded", "The tyre numbers")],
    };

    private static string Day(DateTimeOffset at) => at.UtcDateTime.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture);
}
