using System.Globalization;

namespace WearWatch.Diagnosis.Tests.Statistics;

/// <summary>Published data sets that lie beside the tests, each with its source in its first line.</summary>
internal static class ReferenceData
{
    public static Dictionary<string, double[]> Read(string name)
    {
        var lines = File.ReadAllLines(Path.Combine(AppContext.BaseDirectory, "Statistics", name)).Where(l => l.Length > 0 && l[0] != '#').ToArray();
        var heads = lines[0].Split(',');
        var cells = lines.Skip(1).Select(l => l.Split(',').Select(c => double.Parse(c, CultureInfo.InvariantCulture)).ToArray()).ToArray();
        return heads.Select((h, i) => (h, cells.Select(c => c[i]).ToArray())).ToDictionary(p => p.h, p => p.Item2);
    }
}
