using System.Globalization;
using System.Net;
using System.Net.Sockets;
using System.Security.Cryptography;
using Npgsql;

namespace WearWatch.Storage.Cluster;

/// <summary>
/// A PostgreSQL cluster of our own in a data folder, reachable over loopback only. It outlives the process that
/// started it unless it is stopped; whoever comes next joins it, also after a crash.
/// </summary>
public sealed class LocalCluster : IAsyncDisposable
{
    private const int StartTimeoutSeconds = 60;

    private readonly ServerBinaries _binaries;
    private readonly string _data;
    private readonly string _log;
    private readonly string _password;

    private LocalCluster(ServerBinaries binaries, string home, string password, int port, bool startedHere)
    {
        (_binaries, _password, Port, StartedHere) = (binaries, password, port, startedHere);
        (_data, _log) = (DataOf(home), LogOf(home));
    }

    public int Port { get; }

    /// <summary>Whether this process started the server; false where it was running already.</summary>
    public bool StartedHere { get; }

    /// <summary>Superuser of this cluster; the services take their own roles.</summary>
    public string ConnectionString => Connection(Port, _password, "wearwatch");

    /// <summary>Starts the cluster of a folder, creating it first where there is none, or joins the running one.</summary>
    /// <param name="folder">Data folder; the server's log and password lie in it too.</param>
    /// <param name="durable">False only for tests: a power cut may then lose what was committed.</param>
    /// <param name="progress">Told about what takes long, such as installing PostgreSQL.</param>
    /// <param name="cancel">Ends the waiting; a cluster half made is made anew next time.</param>
    /// <exception cref="InvalidOperationException">PostgreSQL cannot be found, installed or started; the message says why and what to do.</exception>
    public static async Task<LocalCluster> Start(string folder, bool durable = true, Action<string>? progress = null, CancellationToken cancel = default)
    {
        Directory.CreateDirectory(folder);
        // Two commands started at once on one folder: the second waits and then joins.
        await using var turn = await FolderLock.Take(Path.Combine(folder, "cluster.lock"), cancel);
        var binaries = await ServerBinaries.Find(folder, progress, cancel);
        var home = await binaries.Home(folder, cancel);
        if (!File.Exists(Path.Combine(DataOf(home), "PG_VERSION"))) await Create(binaries, home, durable, progress, cancel);
        var password = (await File.ReadAllTextAsync(PasswordOf(home), cancel)).Trim();

        if (Running(DataOf(home)) is { } running && await Answers(running, password, cancel)) return await Ready(new(binaries, home, password, running, false), cancel);
        ForgetDeadServer(DataOf(home));
        var port = FreePort(home);
        await Launch(binaries, home, port, durable, cancel);
        return await Ready(new(binaries, home, password, port, true), cancel);
    }

    /// <summary>Stops the server; sessions are ended, what was committed is on disk.</summary>
    public async Task Stop(CancellationToken cancel = default)
    {
        NpgsqlConnection.ClearAllPools();
        var (code, output) = await _binaries.Run("pg_ctl", ["-D", _data, "-s", "-w", "-m", "fast", "stop"], cancel);
        if (code != 0 && IsRunning()) throw new InvalidOperationException($"PostgreSQL in {_data} did not stop: {output}");
    }

    public bool IsRunning() => Running(_data) is not null;

    /// <summary>Stops the server where this process started it.</summary>
    public async ValueTask DisposeAsync()
    {
        if (StartedHere) await Stop();
    }

    private static string DataOf(string home) => Path.Combine(home, "data");

    private static string LogOf(string home) => Path.Combine(home, "postgresql.log");

    private static string PasswordOf(string home) => Path.Combine(home, "password");

    private static string Connection(int port, string password, string database) => new NpgsqlConnectionStringBuilder
    {
        Host = "127.0.0.1",
        Port = port,
        Username = "wearwatch",
        Password = password,
        Database = database,
        Timeout = 10,
    }.ConnectionString;

    private static async Task Create(ServerBinaries binaries, string home, bool durable, Action<string>? progress, CancellationToken cancel)
    {
        progress?.Invoke("creating the database cluster");
        if (Directory.Exists(DataOf(home))) Directory.Delete(DataOf(home), recursive: true); // a first start that was cut off
        await File.WriteAllTextAsync(PasswordOf(home), Convert.ToHexString(RandomNumberGenerator.GetBytes(24)), cancel);
        if (!OperatingSystem.IsWindows()) File.SetUnixFileMode(PasswordOf(home), UnixFileMode.UserRead | UnixFileMode.UserWrite);
        await binaries.Own(PasswordOf(home), cancel);
        string[] arguments = ["-D", DataOf(home), "-U", "wearwatch", "--auth=scram-sha-256", $"--pwfile={PasswordOf(home)}", "-E", "UTF8", "--locale=C"];
        var (code, output) = await binaries.Run("initdb", durable ? arguments : [.. arguments, "--no-sync"], cancel);
        if (code != 0) throw new InvalidOperationException($"initdb failed in {home}: {output}");
    }

    private static async Task Launch(ServerBinaries binaries, string home, int port, bool durable, CancellationToken cancel)
    {
        var options = string.Create(CultureInfo.InvariantCulture,
            $"-c listen_addresses=127.0.0.1 -c port={port} -c unix_socket_directories='' -c max_connections=100{(durable ? "" : " -c fsync=off -c synchronous_commit=off")}");
        var (code, output) = await binaries.Run("pg_ctl",
            ["-D", DataOf(home), "-s", "-w", "-t", $"{StartTimeoutSeconds}", "-l", LogOf(home), "-o", options, "start"], cancel);
        if (code != 0) throw new InvalidOperationException($"PostgreSQL did not start in {home}: {output}{Environment.NewLine}{LastLines(LogOf(home))}");
    }

    /// <summary>Creates our database in a new cluster.</summary>
    private static async Task<LocalCluster> Ready(LocalCluster cluster, CancellationToken cancel)
    {
        await using var connection = new NpgsqlConnection(Connection(cluster.Port, cluster._password, "postgres") + ";Pooling=false");
        await connection.OpenAsync(cancel);
        await using var exists = new NpgsqlCommand("SELECT EXISTS (SELECT FROM pg_database WHERE datname = 'wearwatch')", connection);
        if (await exists.ExecuteScalarAsync(cancel) is true) return cluster;
        await using var create = new NpgsqlCommand("CREATE DATABASE wearwatch", connection);
        await create.ExecuteNonQueryAsync(cancel);
        return cluster;
    }

    /// <summary>Port of the server that runs in a data folder; null where none does.</summary>
    private static int? Running(string data)
    {
        var lines = PidFile(data);
        return lines.Length >= 4 && int.TryParse(lines[0], out var pid) && IsServer(pid) && int.TryParse(lines[3], out var port) ? port : null;
    }

    /// <summary>After a crash the file with the server's process id stays; the id may belong to anyone by now.</summary>
    private static void ForgetDeadServer(string data)
    {
        var lines = PidFile(data);
        if (lines.Length > 0 && !(int.TryParse(lines[0], out var pid) && IsServer(pid))) File.Delete(Path.Combine(data, "postmaster.pid"));
    }

    private static string[] PidFile(string data)
    {
        var path = Path.Combine(data, "postmaster.pid");
        return File.Exists(path) ? File.ReadAllLines(path) : [];
    }

    private static bool IsServer(int pid)
    {
        try
        {
            return File.ReadAllText($"/proc/{pid}/comm").StartsWith("postgres", StringComparison.Ordinal);
        }
        catch (IOException)
        {
            return false;
        }
    }

    private static async Task<bool> Answers(int port, string password, CancellationToken cancel)
    {
        try
        {
            await using var connection = new NpgsqlConnection(Connection(port, password, "postgres") + ";Pooling=false");
            await connection.OpenAsync(cancel);
            return true;
        }
        catch (NpgsqlException)
        {
            return false;
        }
    }

    /// <summary>The port used last, while it is free; otherwise a new one, kept for the next start.</summary>
    private static int FreePort(string home)
    {
        var file = Path.Combine(home, "port");
        if (File.Exists(file) && int.TryParse(File.ReadAllText(file), out var last) && IsFree(last)) return last;
        using var listener = new TcpListener(IPAddress.Loopback, 0);
        listener.Start();
        var port = ((IPEndPoint)listener.LocalEndpoint).Port;
        File.WriteAllText(file, port.ToString(CultureInfo.InvariantCulture));
        return port;
    }

    private static bool IsFree(int port)
    {
        try
        {
            using var listener = new TcpListener(IPAddress.Loopback, port);
            listener.Start();
            return true;
        }
        catch (SocketException)
        {
            return false;
        }
    }

    private static string LastLines(string log) => File.Exists(log) ? string.Join(Environment.NewLine, File.ReadLines(log).TakeLast(5)) : "";
}
