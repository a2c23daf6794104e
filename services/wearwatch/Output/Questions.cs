using System.Globalization;
using WearWatch.Contracts.V1;

namespace WearWatch.Output;

/// <summary>Remarks on a fact, and the questions among them with numbered answers.</summary>
internal static class Questions
{
    /// <summary>Answers of all questions of a fact, numbered from 1 in this order.</summary>
    public static IReadOnlyList<Choice> Numbered(IEnumerable<Remark> remarks) => [.. remarks.SelectMany(r => r.Choices)];

    public static void Write(TextWriter to, string id, IReadOnlyList<Remark> remarks)
    {
        var number = 0;
        foreach (var remark in remarks)
        {
            to.WriteLine($"  {(remark.Safety ? "UNSAFE: " : "")}{remark.Message}");
            foreach (var choice in remark.Choices)
                to.WriteLine(string.Create(CultureInfo.InvariantCulture, $"    {++number}  {choice.Words} ({Share(choice.Probability)})"));
        }
        if (number > 0) to.WriteLine($"    answer with: wearwatch answer {id} NUMBER");
    }

    private static string Share(double probability) =>
        probability < 0.01 ? "hardly" : probability > 0.99 ? "almost surely" : probability.ToString("0 %", CultureInfo.InvariantCulture);
}
