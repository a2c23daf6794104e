using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

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
    public int Vehicles { get; init; }
    /// <summary>Fittings with a rate of their own.</summary>
    public int FittingsWithRate { get; init; }

    /// <summary>Fits the fleet as known on a day.</summary>
    public static FleetWear Fit(IReadOnlyList<VehicleTread> fleet, DateOnly asOf) => FleetWearFit.Of(fleet, asOf);

    /// <summary>Normal wear of a kind of position; the built-in table where the fleet has none.</summary>
    public NormalWear For(VehicleClass vehicleClass, AxleRole role, Dual dual) =>
        Normals.FirstOrDefault(n => n.Class == vehicleClass && n.Role == role && n.Dual == dual) ?? NormalWear.BuiltIn(vehicleClass, role, dual);

    public NormalWear For(Vehicle vehicle, Position position) => For(vehicle.Class, WearPrior.RoleOf(vehicle, position.Axle), position.Dual);

    /// <summary>How much too deep a survey reads, mm: its technician's and its gauge's bias; an unknown hand has the prior's width.</summary>
    public Estimate BiasOf(TreadSurvey survey)
    {
        var technician = Technicians.FirstOrDefault(t => t.Reader == survey.Technician)?.BiasMm ?? new(0, GaugeNoise.TechnicianSdMm);
        var gauge = Gauges.FirstOrDefault(g => g.Reader == survey.Gauge)?.BiasMm ?? new(0, survey.Gauge is null ? 0 : GaugeNoise.GaugeSdMm);
        return technician + gauge;
    }
}
