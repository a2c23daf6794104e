using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Money;

/// <summary>What aligning now is worth: cost of waiting over the horizon less the price of the job.</summary>
/// <param name="Value">Mean and 90 % interval, money.</param>
/// <param name="Weeks">Horizon that applies.</param>
/// <param name="Currency">ISO 4217.</param>
public sealed record NetBenefit(Interval Value, double Weeks, string Currency)
{
    public static NetBenefit Of(Vehicle vehicle, DateOnly asOf, CostOfWaiting cost, MoneyInputs inputs)
    {
        var weeks = WeeksToGo(vehicle, asOf, inputs.HorizonWeeks);
        double Net(double perWeek) => perWeek * weeks - inputs.JobPrice;
        return new NetBenefit(new Interval(Net(cost.PerWeek.Value), Net(cost.PerWeek.Low), Net(cost.PerWeek.High)), weeks, inputs.Currency);
    }

    /// <summary>Weeks to the end of the horizon, to the next planned alignment or to return or sale, whichever comes first; never below zero.</summary>
    public static double WeeksToGo(Vehicle vehicle, DateOnly asOf, double horizonWeeks)
    {
        double Until(DateOnly? day) => day is { } d ? Math.Max(0, (d.DayNumber - asOf.DayNumber) / 7.0) : double.PositiveInfinity;
        return Math.Min(horizonWeeks, Math.Min(Until(vehicle.LeavesOn), Until(vehicle.NextAlignmentOn)));
    }
}
