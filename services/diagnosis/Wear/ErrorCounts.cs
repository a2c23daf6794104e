using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// What the first reading of the fleet's histories found wrong, counted by its posterior weight in the surveys after each vehicle's
/// first, and the fleet's own <see cref="ErrorRates"/> from it. Surveys that someone confirmed are not in doubt and do not count.
/// </summary>
internal sealed class ErrorCounts
{
    /// <summary>Surveys with which the rates from memory count against those seen.</summary>
    private const double PriorSurveys = 300;

    /// <summary>A fleet's rate lies within these multiples of the one from memory: nothing becomes impossible, nor what is usual.</summary>
    private const double LeastShare = 0.1, MostShare = 5;

    /// <summary>One vehicle may state this share at most, or one case: a history that does not fit at all says little of the others.</summary>
    private const double MostOfOneVehicle = 0.2;

    private enum Error
    {
        SidesSwapped, AxleSidesSwapped, AxlesSwapped, PositionsExchanged, GroovesReversed, ThirtySecondsTakenForMm, MmTakenForThirtySeconds, OtherVehicle,
        TyresMoved, AxleChanged, TyreChanged, TyreMisread, GrooveMistyped, ReadOnWearBar,
    }

    private const int Kinds = (int)Error.ReadOnWearBar + 1;

    /// <param name="Found">Sum of posterior weights.</param>
    /// <param name="Of">Surveys, axles, tyres or grooves in which it could have been.</param>
    /// <param name="Surveys">Surveys these stand in.</param>
    private readonly record struct Count(double Found, double Of, double Surveys)
    {
        public static Count operator +(Count a, Count b) => new(a.Found + b.Found, a.Of + b.Of, a.Surveys + b.Surveys);
    }

    private readonly Count[] _counts = new Count[Kinds];
    private readonly Count[] _own = new Count[Kinds];

    public void Add(ErrorCounts other)
    {
        for (var k = 0; k < Kinds; k++) _counts[k] += other._counts[k];
    }

    public void Add(VehicleHistory history)
    {
        Array.Clear(_own);
        for (var s = 1; s < history.Surveys.Count; s++)
            if (!history.Surveys[s].Survey.Confirmed) Survey(history, s);
        Changes(history);
        for (var k = 0; k < Kinds; k++) _counts[k] += _own[k] with { Found = Math.Min(_own[k].Found, Math.Max(1, MostOfOneVehicle * _own[k].Of)) };
    }

    private void Survey(VehicleHistory history, int s)
    {
        var (survey, judged) = (history.Surveys[s].Survey, history.Judgements[s]);
        int tyres = 0, axles = 0, grooves = 0;
        foreach (var tyre in survey.Tyres)
        {
            if (tyre.Depths.Count == 0) continue;
            tyres++;
            axles |= 1 << tyre.Position.Axle;
            // A slip shows beside two other grooves or more.
            var across = 0;
            for (var j = 0; j < tyre.Depths.Count; j++) across = Math.Max(across, tyre.Depths[j].Groove);
            if (across >= 3) grooves += across;
        }
        if (tyres == 0) return;
        for (var e = Error.SidesSwapped; e <= Error.TyresMoved; e++)
        {
            var could = e switch
            {
                Error.ThirtySecondsTakenForMm => ExplanationPriors.StepFactor(ExplanationKind.ThirtySecondsTakenForMm, survey.ResolutionMm),
                Error.MmTakenForThirtySeconds => ExplanationPriors.StepFactor(ExplanationKind.MmTakenForThirtySeconds, survey.ResolutionMm),
                _ => 1,
            };
            _own[(int)e] += new Count(0, could, could);
        }
        _own[(int)Error.AxleChanged] += new Count(0, int.PopCount(axles), 1);
        _own[(int)Error.TyreChanged] += new Count(0, tyres, 1);
        // The last reading of a tyre cannot be told from a change.
        if (s < history.Surveys.Count - 1) _own[(int)Error.TyreMisread] += new Count(0, tyres, 1);
        // Where a whole survey was written wrong its grooves look so too, at the wrong places.
        var slips = judged is { Corrected: false, Weight: >= 1 };
        if (grooves > 0 && slips)
            for (var e = Error.GrooveMistyped; e <= Error.ReadOnWearBar; e++) _own[(int)e] += new Count(0, grooves, 1);
        for (var i = 0; i < judged.Explanations.Count; i++) Found(judged.Explanations[i]);
        for (var i = 0; i < judged.Odd.Count; i++)
            if (slips || judged.Odd[i].Explanation.Kind == ExplanationKind.TyreMisread) Found(judged.Odd[i]);
    }

    private void Found(WeighedExplanation weighed)
    {
        Error? error = weighed.Explanation.Kind switch
        {
            ExplanationKind.SidesSwapped => Error.SidesSwapped,
            ExplanationKind.AxleSidesSwapped => Error.AxleSidesSwapped,
            ExplanationKind.AxlesSwapped => Error.AxlesSwapped,
            ExplanationKind.PositionsExchanged => Error.PositionsExchanged,
            ExplanationKind.GroovesReversed => Error.GroovesReversed,
            ExplanationKind.ThirtySecondsTakenForMm => Error.ThirtySecondsTakenForMm,
            ExplanationKind.MmTakenForThirtySeconds => Error.MmTakenForThirtySeconds,
            ExplanationKind.OtherVehicle => Error.OtherVehicle,
            ExplanationKind.TyreMisread => Error.TyreMisread,
            ExplanationKind.GrooveMistyped => Error.GrooveMistyped,
            ExplanationKind.ReadOnWearBar => Error.ReadOnWearBar,
            _ => null,
        };
        if (error is { } e) Found(e, weighed.Weight);
    }

    private void Found(Error error, double weight) => _own[(int)error] += new Count(weight, 0, 0);

    /// <summary>Unrecorded changes: tyres that changed places at one survey are one move, all tyres of an axle one change of the axle.</summary>
    private void Changes(VehicleHistory history)
    {
        if (history.Inferred.Count == 0) return;
        foreach (var moves in history.Inferred.Where(i => i.Event == InferredEvent.Moved).GroupBy(i => i.Before)) Found(Error.TyresMoved, moves.Max(i => i.Probability));
        foreach (var axle in history.Inferred.Where(i => i.Event != InferredEvent.Moved).GroupBy(i => (i.Before, i.Position.Axle)))
        {
            if (axle.Count() == history.Tread.Vehicle.Positions().Count(p => p.Axle == axle.Key.Axle)) Found(Error.AxleChanged, axle.Average(i => i.Probability));
            else Found(Error.TyreChanged, axle.Sum(i => i.Probability));
        }
    }

    /// <summary>The fleet's rates: mean of a Beta law that begins at the rate from memory, kept within its bounds.</summary>
    public ErrorRates Rates()
    {
        var memory = ErrorRates.FromMemory;
        return new ErrorRates
        {
            SidesSwapped = Rate(Error.SidesSwapped, memory.SidesSwapped),
            AxleSidesSwapped = Rate(Error.AxleSidesSwapped, memory.AxleSidesSwapped),
            AxlesSwapped = Rate(Error.AxlesSwapped, memory.AxlesSwapped),
            PositionsExchanged = Rate(Error.PositionsExchanged, memory.PositionsExchanged),
            GroovesReversed = Rate(Error.GroovesReversed, memory.GroovesReversed),
            ThirtySecondsTakenForMm = Rate(Error.ThirtySecondsTakenForMm, memory.ThirtySecondsTakenForMm),
            MmTakenForThirtySeconds = Rate(Error.MmTakenForThirtySeconds, memory.MmTakenForThirtySeconds),
            OtherVehicle = Rate(Error.OtherVehicle, memory.OtherVehicle),
            TyresMoved = Rate(Error.TyresMoved, memory.TyresMoved),
            AxleChanged = Rate(Error.AxleChanged, memory.AxleChanged),
            TyreChanged = Rate(Error.TyreChanged, memory.TyreChanged),
            TyreMisread = Rate(Error.TyreMisread, memory.TyreMisread),
            GrooveMistyped = Rate(Error.GrooveMistyped, memory.GrooveMistyped),
            ReadOnWearBar = Rate(Error.ReadOnWearBar, memory.ReadOnWearBar),
        };
    }

    private double Rate(Error error, double memory)
    {
        var count = _counts[(int)error];
        if (!(count.Of > 0)) return memory;
        var rate = (PriorSurveys * memory + count.Surveys * count.Found / count.Of) / (PriorSurveys + count.Surveys);
        return Math.Clamp(rate, LeastShare * memory, MostShare * memory);
    }
}
