using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Money;

/// <summary>Prices and use that the money stands on, with what had to be assumed.</summary>
public sealed record MoneyInputs
{
    /// <summary>ISO 4217.</summary>
    public required string Currency { get; init; }
    /// <summary>One alignment of this vehicle.</summary>
    public required double JobPrice { get; init; }
    /// <summary>Per litre, or per kWh for an electric vehicle.</summary>
    public required double EnergyPrice { get; init; }
    /// <summary>One tyre fitted, where the axle has no price of its own.</summary>
    public required double TyrePrice { get; init; }
    /// <summary>Depth at which the operator takes a tyre off, mm.</summary>
    public required double ChangeAtDepthMm { get; init; }
    /// <summary>km per week.</summary>
    public required double KmPerWeek { get; init; }
    /// <summary>Weeks over which a job must pay.</summary>
    public double HorizonWeeks { get; init; } = 52;
    /// <summary>Figures the operator did not give, in plain words.</summary>
    public IReadOnlyList<string> Assumed { get; init; } = [];

    private sealed record ClassDefaults(double Job, double Tyre, double ChangeAt, double Km);

    /// <summary>Job: middle of the trade's ranges (van 80 to 180, three-axle truck 200 to 450, trailer 150 to 350 EUR); the rest from memory.</summary>
    private static readonly Dictionary<VehicleClass, ClassDefaults> Defaults = new()
    {
        [VehicleClass.Car] = new(100, 100, 2.5, 500),
        [VehicleClass.Van] = new(130, 130, 2.5, 900),
        [VehicleClass.Truck] = new(325, 400, 4, 2200),
        [VehicleClass.Bus] = new(325, 400, 4, 1200),
        [VehicleClass.Trailer] = new(250, 350, 3, 2000),
    };

    private const double FuelPerLitre = 1.50, EnergyPerKWh = 0.30;

    /// <summary>Reads what the operator entered, the latest not after the day; the class default otherwise, and says so.</summary>
    /// <param name="vehicle">Vehicle.</param>
    /// <param name="depot">Its depot, for the currency.</param>
    /// <param name="prices">Dated prices; those in another currency than the depot's are passed over.</param>
    /// <param name="settings">Operator's settings of the depot.</param>
    /// <param name="asOf">Day of judgement.</param>
    public static MoneyInputs For(Vehicle vehicle, Depot depot, IReadOnlyList<Price> prices, IReadOnlyList<OperatorSetting> settings, DateOnly asOf)
    {
        var assumed = new List<string>();
        var usual = Defaults[vehicle.Class];
        double Take(double? given, double otherwise, string what, string unit)
        {
            if (given is { } value) return value;
            assumed.Add(string.Create(System.Globalization.CultureInfo.InvariantCulture, $"{what} {otherwise:0.##} {unit}, built-in figure for this class"));
            return otherwise;
        }
        double? Paid(PriceKind kind) => (double?)prices
            .Where(p => p.Kind == kind && p.From <= asOf && p.Currency == depot.Currency && (p.Class is null || p.Class == vehicle.Class))
            .OrderByDescending(p => p.Class is not null).ThenByDescending(p => p.From).FirstOrDefault()?.Amount;
        double? Set(SettingName name) => settings
            .Where(s => s.Name == name && s.From <= asOf && (s.Class is null || s.Class == vehicle.Class))
            .OrderByDescending(s => s.Class is not null).ThenByDescending(s => s.From).FirstOrDefault()?.Value;
        return new MoneyInputs
        {
            Currency = depot.Currency,
            JobPrice = Take(Paid(PriceKind.AlignmentJob), usual.Job, "alignment", depot.Currency),
            EnergyPrice = vehicle.Electric
                ? Take(Paid(PriceKind.Energy), EnergyPerKWh, "energy", $"{depot.Currency}/kWh")
                : Take(Paid(PriceKind.Fuel), FuelPerLitre, "fuel", $"{depot.Currency}/L"),
            TyrePrice = vehicle.Axles.All(a => a.TyrePrice is not null) ? 0 : Take(Paid(PriceKind.Tyre), usual.Tyre, "tyre", depot.Currency),
            ChangeAtDepthMm = Take(Set(SettingName.ChangeAtDepth), usual.ChangeAt, "change-at depth", "mm"),
            KmPerWeek = Take(vehicle.KmPerWeek, usual.Km, "distance", "km per week"),
            HorizonWeeks = Set(SettingName.HorizonWeeks) ?? 52,
            Assumed = assumed,
        };
    }

    /// <summary>Price of a tyre on a position.</summary>
    public double TyrePriceAt(Vehicle vehicle, Position position) => (double?)vehicle.AxleAt(position.Axle)?.TyrePrice ?? TyrePrice;

    /// <summary>Depth a tyre gives before it is taken off, mm; never less than 1.</summary>
    public double UsableDepthMm(TyreFigures? tyre, double classNewDepthMm) => Math.Max(1, (tyre?.NewDepthMm ?? classNewDepthMm) - ChangeAtDepthMm);
}
