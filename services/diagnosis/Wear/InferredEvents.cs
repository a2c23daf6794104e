using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Puts a name to changes that nobody recorded: another tyre, one moved from elsewhere on the vehicle, or the same one turned on its rim.</summary>
internal sealed class InferredEvents(
    VehicleTread tread, IReadOnlyList<StoredSurvey> surveys, Position[] positions,
    Func<int, Position, TreadShape?> shape)
{
    public void Name(List<(Position Position, int Survey, double Probability)> cuts, List<InferredFitting> named)
    {
        foreach (var (position, survey, probability) in cuts.OrderBy(c => c.Survey).ThenBy(c => c.Position))
        {
            if (shape(survey, position) is not { } now) continue;
            var before = LastBefore(survey, position);
            var turned = before is { EdgeMm: { } was } && now.EdgeMm is { } edge && Near(now.MeanDepthMm.Value, before.MeanDepthMm.Value) && Math.Abs(was.Value) > 3 * was.StandardError && Near(edge.Value, -was.Value);
            Position? from = null;
            if (!turned)
                from = cuts.Where(c => c.Survey == survey && c.Position != position)
                    .Select(c => (c.Position, Shape: LastBefore(survey, c.Position)))
                    .Where(c => c.Shape is not null && Near(now.MeanDepthMm.Value, c.Shape.MeanDepthMm.Value))
                    .OrderBy(c => Math.Abs(now.MeanDepthMm.Value - c.Shape!.MeanDepthMm.Value)).Select(c => (Position?)c.Position).FirstOrDefault();
            var kind = turned ? InferredEvent.TurnedOnRim : from is not null ? InferredEvent.Moved : InferredEvent.Replaced;
            named.Add(new InferredFitting
            {
                VehicleId = tread.Vehicle.VehicleId,
                Position = position,
                Event = kind,
                FromPosition = from,
                After = surveys[Math.Max(0, survey - 1)].Survey.At,
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

    private TreadShape? LastBefore(int survey, Position position)
    {
        if (!positions.Contains(position)) return null;
        for (var s = survey - 1; s >= 0; s--)
            if (shape(s, position) is { } found) return found;
        return null;
    }

    /// <summary>Within gauge noise, a technician's bias and some wear, mm.</summary>
    private static bool Near(double a, double b) => Math.Abs(a - b) < 0.8;
}
