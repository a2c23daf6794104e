using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Normal wear of one kind of position in this fleet.</summary>
public sealed record NormalWear
{
    public required VehicleClass Class { get; init; }
    public required AxleRole Role { get; init; }
    public required Dual Dual { get; init; }
    /// <summary>Middle of ln(mm per 1000 km) over sound tyres, with its standard error.</summary>
    public required Estimate LogRate { get; init; }
    /// <summary>Standard deviation of ln(rate) between sound tyres.</summary>
    public required double LogRateBetweenSd { get; init; }
    /// <summary>Edge slope (outboard less inboard loss) per mm of mean wear.</summary>
    public required Estimate EdgePerMm { get; init; }
    public required double EdgeBetweenSd { get; init; }
    /// <summary>Edge slope per mm of mean wear that the crowned road gives: added on the side to which the road falls, taken off on the other.</summary>
    public required Estimate LeanPerMm { get; init; }
    /// <summary>Step of the rib edges that the crowned road gives, mm, signed in the same way.</summary>
    public required Estimate LeanFeatherMm { get; init; }
    /// <summary>Shoulder part (shoulders less centre) per mm of mean wear.</summary>
    public required Estimate ShoulderPerMm { get; init; }
    public required double ShoulderBetweenSd { get; init; }
    /// <summary>Vehicles with a rate of their own behind it.</summary>
    public required int Vehicles { get; init; }
    /// <summary>In words: this fleet, its nearest kin, or the built-in table.</summary>
    public required string RestsOn { get; init; }

    /// <summary>+1 on the side to which the road usually falls (traffic's own side), −1 on the other.</summary>
    public static int FallSign(Position position, TrafficSide traffic) => (position.Side == Side.Right) == (traffic == TrafficSide.Right) ? 1 : -1;

    /// <summary>Edge slope per mm of mean wear at a position, the crown's part included.</summary>
    public Estimate EdgePerMmAt(Position position, TrafficSide traffic) => EdgePerMm + LeanPerMm * FallSign(position, traffic);

    /// <summary>mm per 1000 km.</summary>
    public double RateMmPer1000Km => Math.Exp(LogRate.Value);

    /// <summary>What is believed before the fleet has shown anything.</summary>
    public static NormalWear BuiltIn(VehicleClass vehicleClass, AxleRole role, Dual dual)
    {
        var prior = WearPrior.For(vehicleClass, role);
        return new NormalWear
        {
            Class = vehicleClass,
            Role = role,
            Dual = dual,
            LogRate = new(Math.Log(prior.RateMmPer1000Km), prior.LogSd),
            LogRateBetweenSd = WearPrior.BetweenLogSd,
            EdgePerMm = WearPrior.EdgePerMm,
            EdgeBetweenSd = 0.1,
            LeanPerMm = new(0.25, 0.15),
            LeanFeatherMm = new(0.1, 0.1),
            ShoulderPerMm = WearPrior.ShoulderPerMm,
            ShoulderBetweenSd = 0.1,
            Vehicles = 0,
            RestsOn = "the built-in table",
        };
    }
}
