using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Bias of one survey's depths, mm.</summary>
/// <param name="Mm">How much too deep it reads.</param>
/// <param name="OwnSd">Error of that against the fleet's other readers.</param>
/// <param name="CommonSd">Error that all readers may share.</param>
public readonly record struct ReadingBias(double Mm, double OwnSd, double CommonSd)
{
    /// <summary>Error of both parts.</summary>
    public double Sd => Math.Sqrt(OwnSd * OwnSd + CommonSd * CommonSd);
}

/// <summary>
/// What the whole fleet says of normal wear, of its technicians and gauges, and of the noise of its readings. Immutable
/// and the same whatever the order of vehicles and surveys.
/// </summary>
public sealed record FleetWear
{
    public required DateOnly AsOf { get; init; }
    public IReadOnlyList<NormalWear> Normals { get; init; } = [];
    public IReadOnlyList<ReaderBias> Technicians { get; init; } = [];
    public IReadOnlyList<ReaderBias> Gauges { get; init; } = [];
    public NoiseFigures Noise { get; init; } = new();
    /// <summary>Technicians and gauges as a study of their own.</summary>
    public ReaderStudy Readers { get; init; } = new();
    /// <summary>How often surveys of this fleet go wrong and tyres change without a record.</summary>
    public ErrorRates Errors { get; init; } = ErrorRates.FromMemory;
    public int Vehicles { get; init; }
    /// <summary>Fittings with a rate of their own.</summary>
    public int FittingsWithRate { get; init; }

    /// <summary>Fits the fleet as known on a day.</summary>
    public static FleetWear Fit(IReadOnlyList<VehicleTread> fleet, DateOnly asOf) => FleetWearFit.Of(fleet, asOf);

    /// <summary>Normal wear of a kind of position; the built-in table where the fleet has none.</summary>
    public NormalWear For(VehicleClass vehicleClass, AxleRole role, Dual dual) =>
        Normals.FirstOrDefault(n => n.Class == vehicleClass && n.Role == role && n.Dual == dual) ?? NormalWear.BuiltIn(vehicleClass, role, dual);

    public NormalWear For(Vehicle vehicle, Position position) => For(vehicle.Class, WearPrior.RoleOf(vehicle, position.Axle), position.Dual);

    /// <summary>How much too deep a survey reads: its technician's and its gauge's bias; an unknown hand has the prior's width.</summary>
    public ReadingBias BiasOf(TreadSurvey survey)
    {
        var technician = Technicians.FirstOrDefault(t => t.Reader == survey.Technician);
        var gauge = Gauges.FirstOrDefault(g => g.Reader == survey.Gauge);
        var unknown = (technician is null ? Square(Readers.TechnicianSpreadMm?.Value ?? GaugeNoise.TechnicianSdMm) : 0)
            + (gauge is null && survey.Gauge is not null ? Square(Readers.GaugeSpreadMm?.Value ?? GaugeNoise.GaugeSdMm) : 0);
        var own = unknown + Square(technician?.AgainstOthersSdMm ?? 0) + Square(gauge?.AgainstOthersSdMm ?? 0);
        var whole = unknown + Square(technician?.BiasMm.StandardError ?? 0) + Square(gauge?.BiasMm.StandardError ?? 0);
        return new((technician?.BiasMm.Value ?? 0) + (gauge?.BiasMm.Value ?? 0), Math.Sqrt(own), Math.Sqrt(Math.Max(0, whole - own)));
    }

    private static double Square(double x) => x * x;
}
