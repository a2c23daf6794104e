using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;
using WearWatch.Storage.Facts;

namespace WearWatch.Ingest;

/// <summary>Answers to the questions that a survey raised.</summary>
internal static class Answers
{
    public static void Check(Decision record, Problems p)
    {
        if (record.VehicleId is null) p.Refuse("missing", "decision.vehicle_id", "an answer names the vehicle of its survey");
        if (record.About is null) p.Refuse("missing", "decision.about", "an answer names the survey it is about");
        if (record.Answer is null) p.Refuse("missing", "decision.answer", "is required");
        else if (ExplanationText.ReadAll(record.Answer) is null) p.Refuse("answer_unknown", "decision.answer", $"'{record.Answer}' is none of the answers there are: {ExplanationText.Words}; with the position, groove or axles it is about");
    }

    public static void Judge(Decision record, FactContext context, Judgement judgement)
    {
        if (context.Known(new FactKey(judgement.Depot, record.About!)) is not { Kind: FactKind.Survey } survey || survey.VehicleId != record.VehicleId)
        {
            judgement.Refuse("unknown_fact", "decision.about", $"depot {judgement.Depot} has no survey {record.About} of vehicle {record.VehicleId}");
            return;
        }
        var answers = ExplanationText.ReadAll(record.Answer!)!;
        var there = context.Vehicle(record.VehicleId!, record.At)!.Positions().ToHashSet();
        foreach (var position in answers.SelectMany(a => new[] { a.Position, a.OtherPosition }).OfType<Position>().Where(p => !there.Contains(p)).Distinct())
            judgement.Refuse("unknown_position", "decision.answer", $"{record.VehicleId} has no tyre at {position}; it has {string.Join(", ", there)}");
        if (judgement.Refused || !survey.Held) return;
        var all = SurveyAnswers.Merge(context.Decisions(record.VehicleId!).Where(d => d.Body is { Kind: DecisionKind.Answered, Answer: not null } && d.Body.About == record.About)
            .Select(d => ExplanationText.ReadAll(d.Body.Answer!) ?? []).Append(answers));
        var open = survey.Remarks.Where(r => r.Choices is { Count: > 0 } choices && !all.Any(a => SurveyAnswers.Settles([.. choices.Select(c => ExplanationText.Read(c.Answer)).OfType<Explanation>()], a))).ToList();
        if (open.Count == 0) judgement.Releases = record.About;
        foreach (var question in open) judgement.Tell("still_open", "decision.answer", $"Still to be answered: {question.Message}", choices: question.Choices);
    }
}
