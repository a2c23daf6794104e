using WearWatch.Diagnosis.Changes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Steering;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>Everything both witnesses say of one vehicle: what the rules, the cause estimate and the money stand on.</summary>
public sealed record VehicleFigures
{
    public required Vehicle Vehicle { get; init; }
    public required Depot Depot { get; init; }
    public required DateOnly AsOf { get; init; }
    public IReadOnlyList<TyreFigures> Tyres { get; init; } = [];
    /// <summary>Wear of the places around every possible onset; null where only the figures of the present tyres are known.</summary>
    public VehicleWearHistory? Wear { get; init; }
    public SteeringFigures? Steering { get; init; }
    /// <summary>What the steering signals hold beyond the straight runs: turning, return to centre, wheel hop; null without signals.</summary>
    public VehicleSteeringStudy? Study { get; init; }
    public UsualRoute? Route { get; init; }
    public IReadOnlyList<DriverReport> DriverReports { get; init; } = [];
    public IReadOnlyList<WorkshopRecord> WorkshopRecords { get; init; } = [];
    /// <summary>Operator's tolerances in force, over the built-in ones.</summary>
    public IReadOnlyList<ToleranceFact> Tolerances { get; init; } = [];

    /// <summary>Changes of steering pull, off-centre angle and wear rate, in order of time; the small ones too.</summary>
    public IReadOnlyList<DatedChange> Changes { get; init; } = [];

    public TyreFigures? At(Position position) => Tyres.FirstOrDefault(t => t.Position == position);
}
