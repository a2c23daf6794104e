using System.Globalization;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>Statements of evidence that several rules share, each with the ids it rests on.</summary>
internal static class Witnesses
{
    public static Evidence EdgeOf(Vehicle vehicle, TyreFigures tyre)
    {
        var slope = tyre.EdgeSlopeMmPer1000Km!.Value;
        var edge = slope.Value >= 0 ? "outboard" : "inboard";
        return new($"{TradeWords.Sentence(TradeWords.Tyre(vehicle, tyre.Position))}: {edge} shoulder faster than normal by {TradeWords.Full(slope * SignOf(slope.Value), 3, TradeWords.PerDistance)}", tyre.SurveyIds);
    }

    public static Evidence FeatherOf(Vehicle vehicle, TyreFigures tyre)
    {
        var step = FeatherReading.Of(tyre)!.Value;
        var edge = step.Value >= 0 ? "inboard" : "outboard";
        return new($"{TradeWords.Sentence(TradeWords.Tyre(vehicle, tyre.Position))}: rib edges sharp {edge} by {TradeWords.Full(step * SignOf(step.Value), 2, "mm")}{Rubs(tyre)}", tyre.SurveyIds);
    }

    private static string Rubs(TyreFigures tyre)
    {
        var all = tyre.RubsCatchingOutward + tyre.RubsCatchingInward + tyre.RubsCatchingNeither;
        return all == 0 ? "" : string.Create(CultureInfo.InvariantCulture,
            $"; hand rubs catching outward {tyre.RubsCatchingOutward}, inward {tyre.RubsCatchingInward}, neither {tyre.RubsCatchingNeither}");
    }

    /// <summary>Evidence from each wheel of a pair whose figure points the way asked for: both alike when mirrored, opposed by vehicle side.</summary>
    public static IEnumerable<Evidence> Wheels(Vehicle vehicle, WheelPair pair, Func<Vehicle, TyreFigures, Evidence> statement, double leftSign, double rightSign)
    {
        if (RuleLimits.Agrees(pair.LeftFigure, leftSign)) yield return statement(vehicle, pair.Left!);
        if (RuleLimits.Agrees(pair.RightFigure, rightSign)) yield return statement(vehicle, pair.Right!);
    }

    public static Evidence Pull(VehicleFigures figures, Estimate pull) =>
        new($"Steering pull to the {PullSide(pull.Value).Word()}, holding torque {TradeWords.Full(pull * SignOf(pull.Value), 2, "N·m")}", figures.Steering!.EvidenceRuns);

    public static Evidence OffCentre(VehicleFigures figures, Estimate angle) =>
        new($"Steering wheel {TradeWords.Full(angle * SignOf(angle.Value), 1, "deg")} to the {TradeWords.Direction(angle.Value)} when travelling straight", figures.Steering!.EvidenceRuns);

    /// <summary>Side the vehicle pulls to; the holding torque has the opposite sign (pulls right: positive torque).</summary>
    public static Side PullSide(double holdingTorqueNm) => holdingTorqueNm > 0 ? Side.Right : Side.Left;

    /// <summary>Drivers' reports of a symptom that are still fresh, as one statement.</summary>
    public static IEnumerable<Evidence> Reports(VehicleFigures figures, Symptom symptom, string words)
    {
        var reports = figures.DriverReports
            .Where(r => r.Symptom == symptom && AgeDays(figures, r.At) is >= 0 and var age && age <= RuleLimits.ReportDays.Value)
            .OrderBy(r => r.At).ToList();
        if (reports.Count > 0) yield return new($"Drivers reported it {Times(reports.Count)}: {words}", [.. reports.Select(r => $"report/{Stamp(r.At)}")]);
    }

    /// <summary>What the workshop last said, where it speaks for or against a matter of alignment.</summary>
    public static (IEnumerable<Evidence> For, IEnumerable<Evidence> Against) Workshop(VehicleFigures figures)
    {
        var last = figures.WorkshopRecords
            .Where(r => r.Result != WorkshopResult.Unknown && AgeDays(figures, r.At) is >= 0 and var age && age <= RuleLimits.WorkshopDays.Value)
            .MaxBy(r => r.At);
        if (last is null) return ([], []);
        var day = last.At.UtcDateTime.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture);
        IReadOnlyList<string> rests = [$"workshop/{Stamp(last.At)}"];
        return last.Result switch
        {
            WorkshopResult.InOrder => ([], [new($"The workshop found the alignment in order on {day}; what is on the tyres may be older", rests)]),
            WorkshopResult.Adjusted => ([], [new($"The workshop adjusted the alignment on {day}; what is on the tyres may be older", rests)]),
            WorkshopResult.CouldNotAdjust => ([new($"The workshop could not adjust it on {day}", rests)], []),
            _ => ([new($"The workshop asked for parts on {day}", rests)], []),
        };
    }

    /// <summary>Share of turning done to the left: as measured, else as the usual route is recorded.</summary>
    public static double? LeftTurnShare(VehicleFigures figures) => figures.Study?.Duty?.LeftShare ?? figures.Study?.LeftTurnShare ?? figures.Route?.LeftTurnShare;

    /// <summary>What the share of turning rests on.</summary>
    public static IReadOnlyList<string> TurningRests(VehicleFigures figures) =>
        figures.Study?.LeftTurnShare is not null ? Signals(figures) : [$"route/{figures.Route?.Route ?? figures.Vehicle.VehicleId}"];

    /// <summary>What a figure of the signals beyond single runs rests on.</summary>
    public static IReadOnlyList<string> Signals(VehicleFigures figures) =>
        figures.Steering?.EvidenceRuns is { Count: > 0 } runs ? runs : [$"streams/{figures.Vehicle.VehicleId}"];

    /// <summary>How a steady side force from the road or the route shows: +1 when it makes the driver steer left.</summary>
    public static double? OneWayTurning(VehicleFigures figures) => LeftTurnShare(figures) switch
    {
        { } share when share >= RuleLimits.OneWayTurning.Value => 1,
        { } share when share <= 1 - RuleLimits.OneWayTurning.Value => -1,
        _ => null,
    };

    public static double SignOf(double value) => value < 0 ? -1 : 1;

    private static double AgeDays(VehicleFigures figures, DateTimeOffset at) =>
        (figures.AsOf.ToDateTime(TimeOnly.MaxValue, DateTimeKind.Utc) - at.UtcDateTime).TotalDays;

    private static string Times(int count) => count == 1 ? "once" : string.Create(CultureInfo.InvariantCulture, $"{count} times");

    private static string Stamp(DateTimeOffset at) => at.UtcDateTime.ToString("yyyy-MM-ddTHH:mm:ssZ", CultureInfo.InvariantCulture);
}
