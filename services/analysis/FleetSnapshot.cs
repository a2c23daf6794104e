using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Changes;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Unusual;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Analysis;

/// <summary>
/// What only the whole fleet can tell: normal wear and technicians' bias, roads with every vehicle's steering figures,
/// and what is usual for a class. Immutable once stored; a diagnosis names the one it stands on.
/// </summary>
internal sealed record FleetSnapshot
{
    public required DateOnly AsOf { get; init; }
    public required FleetWear Wear { get; init; }
    public required RoadFit Roads { get; init; }
    public required UnusualFit Unusual { get; init; }
    /// <summary>Error rates of the hands that rub the treads; null where too few tyres were rubbed twice.</summary>
    public ObserverAgreement? Rubs { get; init; }
    /// <summary>How common faults are in this fleet.</summary>
    public FaultRates Faults { get; init; } = FaultRates.None;
    /// <summary>Changes of steering pull and off-centre angle, by vehicle.</summary>
    public IReadOnlyList<VehicleChanges> Changes { get; init; } = [];
}
