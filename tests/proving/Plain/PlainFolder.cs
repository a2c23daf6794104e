using System.Globalization;
using System.IO.Compression;
using nietras.SeparatedValues;

namespace WearWatch.Proving.Plain;

/// <summary>Reads an import folder and works out the plain figures of every vehicle. Knows neither the truth nor the product.</summary>
internal static class PlainFolder
{
    private const double MmPer32nd = 25.4 / 32;

    public static Dictionary<string, PlainVehicle> Read(string folder, DateOnly from, DateOnly end)
    {
        var surveys = Rows(folder, "surveys").GroupBy(s => s["vehicle_id"]).ToDictionary(g => g.Key, g => g.OrderBy(s => s["at"], StringComparer.Ordinal).ToList());
        var readings = Rows(folder, "readings").GroupBy(r => r["survey_id"]).ToDictionary(g => g.Key, g => g.ToList());
        var fittings = Rows(folder, "fittings").ToLookup(f => (f["vehicle_id"], f["position"]));
        var bench = Rows(folder, "workshop_records").ToLookup(w => w["vehicle_id"], w => DateOnly.FromDateTime(Time(w["at"])));
        var streams = Rows(folder, "steering_streams").ToLookup(s => s["vehicle_id"], s => Path.Combine(folder, s["file"]));
        var newton = Rows(folder, "steering_channels").Where(c => c["channel"] == "driver_torque" && c["unit"] == "N·m").Select(c => c["vehicle_id"]).ToHashSet();
        var road = Rows(folder, "steering_channels").Where(c => c["channel"] is "lateral_acceleration" or "latitude").Select(c => c["vehicle_id"]).ToHashSet();
        return Rows(folder, "vehicles").Select(v => v["vehicle_id"]).Distinct().ToDictionary(id => id, id =>
        {
            var own = surveys.GetValueOrDefault(id, []);
            var trips = streams[id].Select(Trip).ToList();
            return new PlainVehicle
            {
                AcrossTreadMm = own.LastOrDefault(s => s["finished"] != "false") is { } last ? Across(last, readings.GetValueOrDefault(last["id"], [])) : null,
                TorqueNm = newton.Contains(id) ? Mean(trips.Select(t => t.Torque)) : null,
                TorqueWithAssistNm = newton.Contains(id) ? Mean(trips.Select(t => t.Torque + t.Assist)) : null,
                AngleDeg = Mean(trips.Select(t => t.Angle)),
                DaysSinceAlignment = end.DayNumber - bench[id].DefaultIfEmpty(from.AddDays(-1)).Max().DayNumber,
                RoadLogged = road.Contains(id),
                Tyres = Tyres(id, own, readings, fittings),
            };
        });
    }

    private static double? Across(Dictionary<string, string> survey, List<Dictionary<string, string>> readings)
    {
        double? most = null;
        foreach (var tyre in readings.GroupBy(r => r["position"]))
        {
            var grooves = tyre.GroupBy(r => int.Parse(r["groove"], CultureInfo.InvariantCulture)).OrderBy(g => g.Key).Select(g => g.Average(r => Mm(survey, r))).ToList();
            if (grooves.Count > 1) most = Math.Max(most ?? 0, Math.Abs(grooves[0] - grooves[^1]));
        }
        return most;
    }

    private static List<PlainTyre> Tyres(string vehicle, List<Dictionary<string, string>> surveys, Dictionary<string, List<Dictionary<string, string>>> readings, ILookup<(string, string), Dictionary<string, string>> fittings)
    {
        var rows = surveys.Where(s => s["distance"].Length > 0).SelectMany(s => readings.GetValueOrDefault(s["id"], []).Select(r => (Survey: s, Reading: r)));
        var tyres = new List<PlainTyre>();
        foreach (var tyre in rows.GroupBy(r => r.Reading["position"]))
        {
            var since = fittings[(vehicle, tyre.Key)].Select(f => f["at"]).DefaultIfEmpty("").Max(StringComparer.Ordinal)!;
            var own = tyre.Where(r => string.CompareOrdinal(r.Survey["at"], since) > 0).ToList();
            if (own.Count == 0) continue;
            var lines = own.GroupBy(r => r.Reading["groove"])
                .Select(g => PlainLine.Fit([.. g.GroupBy(r => r.Survey["id"]).Select(s => (Number(s.First().Survey["distance"]), s.Average(r => Mm(r.Survey, r.Reading))))]))
                .OfType<PlainLine>().ToList();
            if (lines.Count > 0) tyres.Add(new(tyre.Key, own[^1].Survey["id"], lines));
        }
        return tyres;
    }

    /// <summary>Means of one trip over samples above 40 km/h with little yaw; NaN without the column or without such samples.</summary>
    private static (double Torque, double Assist, double Angle) Trip(string file)
    {
        using var reader = Sep.New(',').Reader().From(new GZipStream(File.OpenRead(file), CompressionMode.Decompress));
        int Column(string name) => reader.Header.TryIndexOf(name, out var at) ? at : -1;
        var (speed, yaw, torque, assist, angle) = (Column("speed"), Column("yaw_rate"), Column("driver_torque"), Column("assist_torque"), Column("steering_wheel_angle"));
        (double Sum, int Count) t = default, a = default, d = default;
        foreach (var row in reader)
        {
            if (!(Value(row, speed) >= 40) || (yaw >= 0 && !(Math.Abs(Value(row, yaw)) <= 1))) continue;
            Add(ref t, Value(row, torque));
            Add(ref a, Value(row, assist));
            Add(ref d, Value(row, angle));
        }
        double Of((double Sum, int Count) s) => s.Count > 0 ? s.Sum / s.Count : double.NaN;
        return (Of(t), assist >= 0 ? Of(a) : 0, Of(d));

        static void Add(ref (double Sum, int Count) sum, double value)
        {
            if (!double.IsNaN(value)) sum = (sum.Sum + value, sum.Count + 1);
        }
    }

    private static double Value(SepReader.Row row, int column) => column >= 0 && row[column].TryParse<double>(out var value) ? value : double.NaN;

    private static PlainMean? Mean(IEnumerable<double> trips)
    {
        var known = trips.Where(t => !double.IsNaN(t)).ToArray();
        if (known.Length < 2) return null;
        var mean = known.Average();
        return new(mean, Math.Sqrt(known.Sum(v => (v - mean) * (v - mean)) / (known.Length - 1) / known.Length), known.Length);
    }

    private static double Mm(Dictionary<string, string> survey, Dictionary<string, string> reading) => Number(reading["depth"]) * (survey["depth_unit"] == "1/32in" ? MmPer32nd : 1);

    private static double Number(string text) => double.Parse(text, CultureInfo.InvariantCulture);

    private static DateTime Time(string text) => DateTime.Parse(text, CultureInfo.InvariantCulture, DateTimeStyles.AdjustToUniversal);

    private static List<Dictionary<string, string>> Rows(string folder, string name)
    {
        var file = Path.Combine(folder, name + ".csv");
        if (!File.Exists(file)) return [];
        using var reader = Sep.New(',').Reader(o => o with { Unescape = true }).FromFile(file);
        var names = reader.Header.ColNames;
        var rows = new List<Dictionary<string, string>>();
        foreach (var row in reader)
        {
            var fields = new Dictionary<string, string>(names.Count);
            for (var i = 0; i < names.Count; i++) fields[names[i]] = row[i].ToString();
            rows.Add(fields);
        }
        return rows;
    }
}
