using System.Text;

namespace WearWatch.Simulator;

/// <summary>Rows of the import folder's plain files, as they come from one vehicle or from the fleet.</summary>
public sealed class Rows
{
    /// <summary>Every file written, in the order of the folder's description, with its columns.</summary>
    public static readonly (string File, string Columns)[] Files =
    [
        ("depots", "id,depot_id,name,traffic_side,jurisdiction,time_zone,currency"),
        ("vehicles", "id,vehicle_id,depot_id,class,from,fleet_number,registration,km_per_week,gross_mass_kg,wheelbase_m,steering_ratio,assist,consumption_per_100_km,electric,telematics_units,leaves_on,next_alignment_on"),
        ("axles", "vehicle_id,axle,suspension,steered,driven,lifting,duals,target_total_toe,target_camber,tolerance_total_toe,tolerance_camber,angle_unit,tyre_size,tyre_price,pressure_kpa,track_m"),
        ("couplings", "id,trailer_id,tractor_id,from,to"),
        ("tyres", "id,tyre_id,pattern,size,new_depth,depth_unit"),
        ("fittings", "id,vehicle_id,at,event,position,from_position,tyre_id,pattern,new_depth,distance,seasonal,winter"),
        ("surveys", "id,vehicle_id,at,technician,gauge,resolution,depth_unit,place,distance,distance_source,finished"),
        ("survey_tyres", "survey_id,position,pressure_kpa,pressure_warm,hand_rub,seen,not_reached"),
        ("readings", "survey_id,position,groove,depth,clock_deg,outboard_edge"),
        ("driver_reports", "id,vehicle_id,at,symptom,note"),
        ("workshop_records", "id,vehicle_id,at,sent_because,result,distance,cost,note"),
        ("workshop_angles", "record_id,quantity,axle,side,before,after,angle_unit,as_written"),
        ("routes", "id,vehicle_id,from,route,loop,left_turn_share,urban"),
        ("prices", "id,depot_id,kind,class,amount,currency,from"),
        ("settings", "id,depot_id,from,name,class,value"),
        ("steering_streams", "stream_id,vehicle_id,file,start,rate_hz"),
        ("steering_channels", "vehicle_id,channel,unit,resolution"),
    ];

    private readonly Dictionary<string, List<string>> _rows = [];

    /// <summary>Adds a row; fields in the order of the file's columns, null where not known.</summary>
    public void Add(string file, params ReadOnlySpan<object?> fields)
    {
        var line = new StringBuilder();
        for (var i = 0; i < fields.Length; i++)
        {
            if (i > 0) line.Append(',');
            line.Append(Text(fields[i]));
        }
        if (!_rows.TryGetValue(file, out var list)) _rows[file] = list = [];
        list.Add(line.ToString());
    }

    private static string Text(object? field) => field switch
    {
        null => "",
        bool flag => flag ? "true" : "false",
        double number => number.ToString("0.##########"),
        string text when text.AsSpan().IndexOfAny(",\"\n") >= 0 => $"\"{text.Replace("\"", "\"\"")}\"",
        _ => field.ToString() ?? "",
    };

    public int Count(string file) => _rows.TryGetValue(file, out var list) ? list.Count : 0;

    public void Take(Rows other)
    {
        foreach (var (file, lines) in other._rows)
        {
            if (!_rows.TryGetValue(file, out var list)) _rows[file] = list = [];
            list.AddRange(lines);
        }
    }

    public void Write(string folder)
    {
        foreach (var (file, columns) in Files)
        {
            if (!_rows.TryGetValue(file, out var lines)) continue;
            var text = new StringBuilder(columns).Append('\n');
            foreach (var line in lines) text.Append(line).Append('\n');
            File.WriteAllText(Path.Combine(folder, file + ".csv"), text.ToString(), new UTF8Encoding(false));
        }
    }
}
