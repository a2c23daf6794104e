using System.Globalization;
using Google.Protobuf.WellKnownTypes;
using WearWatch.Contracts.V1;
using WearWatch.Diagnosis.Changes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;
using WearWatch.Diagnosis.Wear;
using Quantity = WearWatch.Contracts.V1.Quantity;
using Range = WearWatch.Contracts.V1.Range;
using Side = WearWatch.Contracts.V1.Side;

namespace WearWatch.Analysis;

/// <summary>Puts what the stages found into the contract's Diagnosis message. What is not known stays absent.</summary>
internal static class DiagnosisMessage
{
    public static Contracts.V1.Diagnosis Of(VehicleDiagnosis d)
    {
        var steering = d.Figures.Steering;
        var message = new Contracts.V1.Diagnosis
        {
            VehicleId = d.Figures.Vehicle.VehicleId,
            Depot = d.Figures.Depot.DepotId,
            AsOf = d.Figures.AsOf.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture),
            MisalignedProbability = d.Verdict.MisalignedProbability,
            CostOfWaitingPerWeek = Of(d.Cost.PerWeek, d.Cost.Currency),
            NetBenefit = Of(d.NetBenefit.Value, d.NetBenefit.Currency),
            SteeringPull = Of(steering?.SteeringPullNm, "N·m"),
            OffCentreAngle = Of(steering?.OffCentreDeg, "deg"),
            FleetFit = d.FleetFit,
            Method = Diagnosing.Method,
            StraightRuns = steering?.Runs ?? 0,
            StraightSeconds = steering?.Seconds ?? 0,
            VehicleClass = d.Figures.Vehicle.Class.ToString().ToLowerInvariant(),
            JobPrice = d.JobPrice,
            JobPriceSource = d.Cost.Assumed.Any(a => a.StartsWith("alignment", StringComparison.Ordinal)) ? "built-in" : "operator",
        };
        if (d.FactsThrough is { } through) message.FactsThrough = Timestamp.FromDateTimeOffset(through);
        message.Causes.Add(d.Verdict.Causes.Select(Of));
        message.Odds.Add(d.Verdict.Odds);
        if (d.Verdict.ByWitness is { } alone) (message.MisalignedByTread, message.MisalignedBySteering) = (alone.Tread, alone.Steering);
        message.Tyres.Add(d.Figures.Tyres.Select(t => TyreMessage.Of(t, d)));
        message.KmPerWeek = TyreMessage.Use(d.Use);
        message.CannotTell.Add(d.ChassisProblems.Concat(d.Verdict.CannotTell).Select(c => new CannotTell { What = c.What, Because = c.Because, WouldHelp = c.WouldHelp }));
        // Of a trailer it is said once that it sends no signals.
        if (d.Figures.Vehicle.Class != Diagnosis.Facts.VehicleClass.Trailer) message.CannotTell.Add((steering?.NotPossible ?? []).Union(d.Study?.NotPossible ?? []).Select(NotPossible));
        message.CannotTell.Add(d.Cost.Assumed.Select(a => new CannotTell { What = "the money exactly", Because = $"{a} was assumed", WouldHelp = "the operator's own figure" }));
        message.Changes.Add(d.Figures.Changes.Select(c => Of(c, ChangeLimits.IsPublished(d.Figures, c))));
        message.SurveyNotes.Add(d.Wear.Surveys.Where(s => s.Corrected || s.Weight < 0.9).Select(Of));
        message.SurveyNotes.Add(d.Answers.Select(a => new SurveyNote { SurveyId = a.SurveyId, Note = $"answered{(a.Who is { } who ? $" by {who}" : "")} on {a.At.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture)}: {string.Join(" ", a.Answers.Select(e => e.Answer))}" }));
        message.SurveyNotes.Add(d.Wear.Inferred.Select(i => new SurveyNote { Note = i.Sentence }));
        return message;
    }

    /// <summary>"steering pull: no driver torque; a driver torque channel would help" in its three parts.</summary>
    private static CannotTell NotPossible(string line)
    {
        var colon = line.IndexOf(':', StringComparison.Ordinal);
        var semicolon = line.IndexOf(';', StringComparison.Ordinal);
        return colon < 0 || semicolon < colon
            ? new CannotTell { What = line }
            : new CannotTell { What = line[..colon], Because = line[(colon + 1)..semicolon].Trim(), WouldHelp = line[(semicolon + 1)..].Replace("would help", "", StringComparison.Ordinal).Trim() };
    }

    private static Cause Of(Diagnosis.Causes.Cause c)
    {
        var cause = new Cause
        {
            Quantity = Of(c.Quantity),
            Side = Of(c.Side),
            Value = c.Value.Value,
            Low = c.Value.Low,
            High = c.Value.High,
            Unit = c.Quantity.Unit(),
            OutsideTolerance = c.OutsideTolerance,
            Probability = c.Probability,
        };
        if (c.Axle is { } axle) cause.Axle = axle;
        if (c.Since is { } since) cause.Since = new DateRange { Likely = Day(since.Likely), Earliest = Day(since.Earliest), Latest = Day(since.Latest) };
        return cause;

        static string Day(DateOnly? day) => day?.ToString("yyyy-MM-dd", System.Globalization.CultureInfo.InvariantCulture) ?? "";
    }

    private static Change Of(DatedChange c, bool published)
    {
        var change = new Change
        {
            Quantity = Snake(c.Quantity.ToString()),
            Form = Snake(c.Form.ToString()),
            From = Timestamp.FromDateTimeOffset(c.From),
            To = Timestamp.FromDateTimeOffset(c.To),
            Likely = Timestamp.FromDateTimeOffset(c.Likely),
            Size = Of(c.Size, c.Quantity switch { ChangeQuantity.SteeringPull => "N·m", ChangeQuantity.OffCentreAngle => "deg", _ => "1" }),
            Before = c.Before,
            After = c.After,
            TripsBefore = c.TripsBefore,
            TripsAfter = c.TripsAfter,
            Provisional = c.Provisional,
            Published = published,
        };
        if (c.Axle is { } axle) change.Axle = axle;
        change.Happened.Add(c.Happened.Select(e => new Contracts.V1.ChangeEvent { Kind = Snake(e.Kind.ToString()), At = Timestamp.FromDateTimeOffset(e.At), What = e.Words, RestsOn = e.Rests }));
        change.RestsOn.Add(c.Rests);
        return change;
    }

    /// <summary>SteeringPull as steering_pull.</summary>
    internal static string Snake(string name) =>
        string.Concat(name.Select((c, i) => char.IsUpper(c) && i > 0 ? $"_{char.ToLowerInvariant(c)}" : $"{char.ToLowerInvariant(c)}"));

    public static Contracts.V1.Finding Of(Diagnosis.Rules.Finding f, VehicleFigures figures)
    {
        var finding = new Contracts.V1.Finding
        {
            VehicleId = figures.Vehicle.VehicleId,
            Depot = figures.Depot.DepotId,
            Kind = Publication.Kind(f),
            Side = Of(f.Side),
            Sentence = f.Sentence,
            FirstCheck = f.FirstCheck,
            AlignmentMends = f.AlignmentMends,
            Caution = f.Caution ?? "",
            Strength = double.IsFinite(f.Strength) ? f.Strength : 1e6,
        };
        if (f.Axle is { } axle) finding.Axle = axle;
        finding.EvidenceFor.Add(f.EvidenceFor.Select(Of));
        finding.EvidenceAgainst.Add(f.EvidenceAgainst.Select(Of));
        finding.Confounders.Add(f.Confounders.Select(c => new Contracts.V1.Confounder { What = c.What, WouldTell = c.WouldTell }));
        finding.Causes.Add(f.Causes.Select(Of));
        return finding;
    }

    private static Contracts.V1.Evidence Of(Diagnosis.Rules.Evidence e)
    {
        var evidence = new Contracts.V1.Evidence { Statement = e.Statement };
        evidence.RestsOn.Add(e.Rests);
        return evidence;
    }

    private static SurveyNote Of(SurveyJudgement s) => new()
    {
        SurveyId = s.SurveyId,
        Note = s.Corrected
            ? string.Create(CultureInfo.InvariantCulture, $"{s.Used.Sentence} (probability {s.Explanations.FirstOrDefault(e => e.Explanation == s.Used)?.Weight ?? s.Weight:0.00}); {(s.Used.Kind == ExplanationKind.OtherVehicle ? "left out" : "read that way")}, the record itself is unchanged")
            : string.Create(CultureInfo.InvariantCulture, $"may not be as written (probability {s.Weight:0.00} that it is); counted less"),
    };

    private static Quantity Of(Diagnosis.Facts.Quantity quantity) => (Quantity)((int)quantity + 1);

    private static Side Of(Diagnosis.Facts.Side? side) => side switch { Diagnosis.Facts.Side.Left => Side.Left, Diagnosis.Facts.Side.Right => Side.Right, _ => Side.Unspecified };

    internal static Range? Of(Estimate? e, string unit) => e is { } known ? new Range { Value = known.Value, Low = known.Low, High = known.High, Unit = unit } : null;

    internal static Range Of(Interval i, string unit) => new() { Value = i.Value, Low = i.Low, High = i.High, Unit = unit };
}
