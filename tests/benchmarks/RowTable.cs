using Npgsql;
using NpgsqlTypes;

namespace WearWatch.Benchmarks;

/// <summary>The obvious way to store samples: one row each in a table without index, copied in binary, one commit a drive.</summary>
internal static class RowTable
{
    public const string Create = """
        CREATE TABLE public.row_sample (
          stream integer, at timestamptz, speed_km_h real, steering_wheel_angle_deg real, driver_torque_nm real, yaw_rate_deg_per_s real,
          lateral_acceleration_m_per_s2 real, longitudinal_acceleration_m_per_s2 real, latitude_deg double precision, longitude_deg double precision)
        """;

    /// <summary>Runs until the rows are committed; the values are written without awaiting each, which would cost more than the rows.</summary>
    public static void Copy(string connectionString, int stream, DoorDrive drive, int samples)
    {
        using var connection = new NpgsqlConnection(connectionString);
        connection.Open();
        using var copy = connection.BeginBinaryImport("COPY public.row_sample FROM STDIN (FORMAT binary)");
        for (var i = 0; i < samples; i++)
        {
            copy.StartRow();
            copy.Write(stream, NpgsqlDbType.Integer);
            copy.Write(DoorDrive.Start.UtcDateTime.AddSeconds(i / DoorDrive.RateHz), NpgsqlDbType.TimestampTz);
            foreach (var column in drive.Values) copy.Write(column[i], NpgsqlDbType.Real);
            foreach (var column in drive.Position) copy.Write(column[i], NpgsqlDbType.Double);
        }
        var rows = copy.Complete();
        if (rows != (ulong)samples) throw new InvalidOperationException($"{rows} of {samples} rows were copied");
    }
}
