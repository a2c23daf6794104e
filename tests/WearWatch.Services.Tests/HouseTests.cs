using System.Xml.Linq;

namespace WearWatch.Services.Tests;

/// <summary>Who may use whom: the map of the house, held by a test.</summary>
public sealed class HouseTests
{
    private static readonly Dictionary<string, string[]> s_mayUse = new()
    {
        ["services/diagnosis"] = [],
        ["services/contracts"] = [],
        ["services/storage"] = ["diagnosis"],
        ["services/ingest"] = ["contracts", "diagnosis", "storage"],
        ["services/analysis"] = ["contracts", "diagnosis", "storage"],
        ["services/report"] = ["contracts", "diagnosis", "storage"],
        ["services/wearwatch"] = ["ingest", "analysis", "report"],
        ["tests/simulator"] = [],
    };

    [Fact]
    public void Every_project_uses_only_what_the_map_allows()
    {
        var root = Root();
        foreach (var (folder, allowed) in s_mayUse)
        {
            var project = Directory.GetFiles(Path.Combine(root, folder), "*.csproj").Single();
            var used = XDocument.Load(project).Descendants("ProjectReference").Select(r => Path.GetFileName(Path.GetDirectoryName(r.Attribute("Include")!.Value))!);
            Assert.All(used, u => Assert.Contains(u, allowed));
        }
    }

    [Fact]
    public void The_computation_knows_no_clock_no_files_and_no_log()
    {
        foreach (var file in Directory.EnumerateFiles(Path.Combine(Root(), "services", "diagnosis"), "*.cs", SearchOption.AllDirectories).Where(f => !f.Contains("/obj/") && !f.Contains("/bin/")))
        {
            var text = File.ReadAllText(file);
            foreach (var word in (string[])["DateTime.UtcNow", "DateTime.Now", "DateTimeOffset.UtcNow", "File.", "Console.", "ILogger", "Environment."])
                Assert.False(text.Contains(word, StringComparison.Ordinal), $"{file}: {word}");
        }
    }

    private static string Root()
    {
        var folder = AppContext.BaseDirectory;
        while (!File.Exists(Path.Combine(folder, "WearWatch.sln"))) folder = Path.GetDirectoryName(folder.TrimEnd('/'))!;
        return folder;
    }
}
