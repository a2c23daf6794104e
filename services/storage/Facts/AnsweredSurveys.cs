using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Storage.Facts;

/// <summary>What was answered about one survey.</summary>
/// <param name="SurveyId">The survey's fact.</param>
/// <param name="Answers">What counts of all that was answered.</param>
/// <param name="Who">Who answered last, where known.</param>
/// <param name="At">When.</param>
public sealed record SurveyAnswered(string SurveyId, IReadOnlyList<Explanation> Answers, string? Who, DateTimeOffset At);

/// <summary>A vehicle's surveys and fittings read as people have answered the questions about them.</summary>
internal sealed record AnsweredSurveys(IReadOnlyList<Dated<TreadSurvey>> Surveys, IReadOnlyList<Dated<TreadSurvey>> Held, IReadOnlyList<Dated<FittingRecord>> Fittings, IReadOnlyList<SurveyAnswered> Answers)
{
    /// <param name="surveys">Those that hold, by time.</param>
    /// <param name="held">Those that wait, by time.</param>
    /// <param name="fittings">As recorded, by time.</param>
    /// <param name="decisions">On the vehicle, by time.</param>
    public static AnsweredSurveys Of(IReadOnlyList<Dated<TreadSurvey>> surveys, IReadOnlyList<Dated<TreadSurvey>> held, IReadOnlyList<Dated<FittingRecord>> fittings, IReadOnlyList<Dated<Decision>> decisions)
    {
        var answers = decisions.Where(d => d.Body is { Kind: DecisionKind.Answered, About: not null, Answer: not null })
            .Select(d => (Decision: d, Explanations: ExplanationText.ReadAll(d.Body.Answer!))).Where(d => d.Explanations is not null).GroupBy(d => d.Decision.Body.About!)
            .Select(g => new SurveyAnswered(g.Key, SurveyAnswers.Merge(g.Select(d => d.Explanations!)), g.Last().Decision.Body.Who, g.Last().Decision.At)).ToDictionary(a => a.SurveyId);
        if (answers.Count == 0) return new(surveys, held, fittings, []);
        List<SurveyAnswered> used = [];
        var done = new List<Dated<FittingRecord>>(fittings);
        List<FittingRecord> recorded = [.. fittings.Select(f => f.Body)];
        DateTimeOffset? previous = null;
        foreach (var survey in surveys.Concat(held).OrderBy(s => s.At))
        {
            if (answers.GetValueOrDefault(survey.FactId) is { } answered)
            {
                used.Add(answered);
                done.AddRange(SurveyAnswers.Fittings(survey.Body, answered.Answers, previous, recorded).Select(f => new Dated<FittingRecord>(survey.FactId, f.At, f)));
            }
            previous = survey.At;
        }
        return new([.. surveys.SelectMany(Read)], [.. held.SelectMany(Read)], [.. done.OrderBy(f => f.At)], used);

        IEnumerable<Dated<TreadSurvey>> Read(Dated<TreadSurvey> survey)
        {
            var read = answers.TryGetValue(survey.FactId, out var answered) ? SurveyAnswers.Read(survey.Body, answered.Answers) : survey.Body;
            if (read is not null) yield return survey with { Body = read };
        }
    }
}
