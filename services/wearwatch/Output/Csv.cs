using System.Globalization;
using WearWatch.Import;

namespace WearWatch.Output;

/// <summary>The worklist as CSV: one row a vehicle, units in the column names, empty where not known.</summary>
internal static class Csv
{
    public static void Worklist(TextWriter writer, WorklistPages list)
    {
        writer.WriteLine("rank,vehicle_id,class,depot,as_of,misaligned_probability,cost_of_waiting_per_week,cost_low,cost_high,net_benefit,net_low,net_high,currency,listed_because,first_cause,why,first_check");
        foreach (var row in list.Vehicles)
        {
            var cause = row.Causes.FirstOrDefault();
            writer.WriteLine(string.Join(',', Text(row.Rank), Text(row.VehicleId), Text(row.VehicleClass), Text(row.Depot), Text(row.AsOf), Text(Math.Round(row.MisalignedProbability, 4)),
                Money(row.CostOfWaitingPerWeek?.Value), Money(row.CostOfWaitingPerWeek?.Low), Money(row.CostOfWaitingPerWeek?.High),
                Money(row.NetBenefit?.Value), Money(row.NetBenefit?.Low), Money(row.NetBenefit?.High), Text(row.NetBenefit?.Unit ?? ""),
                Text(EnumWords.Word(row.ListedBecause)), Text(cause is null ? "" : EnumWords.Word(cause.Quantity)), Text(row.Why), Text(row.FirstCheck)));
        }
    }

    private static string Money(double? value) => value is null ? "" : Math.Round(value.Value, 2).ToString(CultureInfo.InvariantCulture);

    private static string Text(object value)
    {
        var text = Convert.ToString(value, CultureInfo.InvariantCulture)!;
        return text.AsSpan().ContainsAny(",\"\n") ? $"\"{text.Replace("\"", "\"\"")}\"" : text;
    }
}
