using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Money;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Steering;
using WearWatch.Diagnosis.Tread;
using WearWatch.Diagnosis.Wear;
using WearWatch.Storage.Facts;

namespace WearWatch.Analysis;

/// <summary>Everything the stages found on one vehicle, before it is put into the contract's words.</summary>
internal sealed record VehicleDiagnosis
{
    public required VehicleFigures Figures { get; init; }
    /// <summary>Chassis data that contradict themselves, and what was taken instead.</summary>
    public IReadOnlyList<CannotTell> ChassisProblems { get; init; } = [];
    public required VehicleWearResult Wear { get; init; }
    public required Verdict Verdict { get; init; }
    public required CostOfWaiting Cost { get; init; }
    public required NetBenefit NetBenefit { get; init; }
    public required double JobPrice { get; init; }
    public required IReadOnlyList<Finding> Findings { get; init; }
    public required IReadOnlyList<UnsafeTyre> UnsafeTyres { get; init; }
    /// <summary>What its steering signals hold beyond the straight runs; null without signals, and for a day in the past.</summary>
    public VehicleSteeringStudy? Study { get; init; }
    /// <summary>What people have answered about its surveys.</summary>
    public IReadOnlyList<SurveyAnswered> Answers { get; init; } = [];
    /// <summary>How far it runs in a week, to turn distances into dates.</summary>
    public required VehicleUse Use { get; init; }
    /// <summary>Day and gauge step, mm, of each survey.</summary>
    public required IReadOnlyDictionary<string, (DateOnly On, double StepMm)> Surveys { get; init; }
    public required long FleetFit { get; init; }
    public DateTimeOffset? FactsThrough { get; init; }
}
