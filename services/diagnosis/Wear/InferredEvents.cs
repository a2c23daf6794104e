using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Puts a name to changes that nobody recorded: another tyre, one moved from elsewhere on the vehicle, or the same one turned on its rim.</summary>
internal sealed class InferredEvents(
    VehicleTread tread, IReadOnlyList<StoredSurvey> surveys, Position[] positions,
    Func<int, Position, TreadShape?> shape, Func<int, int, Position, double> usualWearMm)
{
    public void Name(List<(Position Position, int Survey, double Probability)> cuts, List<InferredFitting> named)
    {
        foreach (var (position, survey, probability) in cuts.OrderBy(c => c.Survey).ThenBy(c => c.Position))
        {
            if (shape(survey, position) is not { } now) continue;
            var before = LastBefore(survey, position);
            var turned = before?.Shape is { EdgeMm: { } was } && now.EdgeMm is { } edge && Near(now, before.Value, survey, position) && Math.Abs(was.Value) > 3 * was.StandardError && Math.Abs(edge.Value + was.Value) < 0.8;
            Position? from = null;
            if (!turned)
                from = cuts.Where(c => c.Survey == survey && c.Position != position)
                    .Select(c => (c.Position, Last: LastBefore(survey, c.Position)))
                    .Where(c => c.Last is { } last && Near(now, last, survey, position))
                    .OrderBy(c => Math.Abs(now.MeanDepthMm.Value - c.Last!.Value.Shape.MeanDepthMm.Value)).ThenBy(c => c.Position).Select(c => (Position?)c.Position).FirstOrDefault();
            var kind = turned ? InferredEvent.TurnedOnRim : from is not null ? InferredEvent.Moved : InferredEvent.Replaced;
            named.Add(new InferredFitting
            {
                VehicleId = tread.Vehicle.VehicleId,
                Position = position,
                Event = kind,
                FromPosition = from,
                After = surveys[before?.Survey ?? Math.Max(0, survey - 1)].Survey.At,
                Before = surveys[survey].Survey.At,
                Probability = probability,
                Sentence = kind switch
                {
                    InferredEvent.TurnedOnRim => $"The tyre at {position} seems to have been turned on its rim without a record.",
                    InferredEvent.Moved => $"The tyre at {position} seems to have come from {from} without a record.",
                    _ => $"The tyre at {position} seems to have been changed without a record.",
                },
            });
        }
    }

    private (TreadShape Shape, int Survey)? LastBefore(int survey, Position position)
    {
        if (!positions.Contains(position)) return null;
        for (var s = survey - 1; s >= 0; s--)
            if (shape(s, position) is { } found) return (found, s);
        return null;
    }

    /// <summary>Could be that tyre: worn since by something between nothing and twice the usual, within gauge noise and a technician's bias.</summary>
    private bool Near(TreadShape now, (TreadShape Shape, int Survey) before, int survey, Position position)
    {
        var usual = usualWearMm(before.Survey, survey, position);
        return Math.Abs(before.Shape.MeanDepthMm.Value - now.MeanDepthMm.Value - usual) < 0.7 + usual;
    }
}
