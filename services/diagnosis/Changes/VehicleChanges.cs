using WearWatch.Diagnosis.Roads;

namespace WearWatch.Diagnosis.Changes;

/// <summary>Changes of one vehicle as a fleet fit saw them, and where its series stood then.</summary>
/// <param name="VehicleId">The vehicle.</param>
/// <param name="Torque">What its torque was taken for.</param>
/// <param name="ReadingZero">Zero of its bank reading against the cells, sine; null where not known.</param>
/// <param name="Changes">Steering pull and off-centre angle, in order of time.</param>
/// <param name="Now">Levels that the running charts go on from.</param>
public sealed record VehicleChanges(string VehicleId, TorqueKind Torque, double? ReadingZero, IReadOnlyList<DatedChange> Changes, IReadOnlyList<RunningLevel> Now);
