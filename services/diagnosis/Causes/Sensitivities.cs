using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Causes;

/// <summary>
/// What each quantity does to what can be observed, by class: the one table of the cause estimate's constants.
/// Torque figures are at the column before assist is taken into account, by the equations of Geometry from typical loads.
/// </summary>
/// <param name="CasterNmPerDeg">Holding torque per degree of caster split; Fz·q/ratio: van 9 kN, 56 mm, 16; truck 35 kN, 90 mm, 20.</param>
/// <param name="CamberNmPerDeg">Per degree of camber split; Cγ·(tm+tp)/ratio: van 6 kN/rad, 52 mm; truck 12.6 kN/rad, 80 mm.</param>
/// <param name="SideForceLeverM">(tm+tp)/ratio, m: torque per newton of side force on the steer tyres.</param>
/// <param name="BankNmPerDeg">Torque per degree of bank; van: 3500 kg, 55 % front, 52 mm, 16.</param>
/// <param name="BankWheelDegPerDeg">Steering-wheel angle per degree of bank: ratio × K.</param>
/// <param name="PressureNmPerShare">Torque per unit of relative pressure difference across the front axle; from memory.</param>
/// <param name="DragLeverM">Scrub radius/ratio, m: torque per newton of one-sided drag; from memory.</param>
/// <param name="ConicitySdN">Ordinary residual side force of the front tyres, N; reject bands near 100 N per car tyre, from memory.</param>
/// <param name="SteeringRatio">Used when the vehicle's own is not recorded; ranges of the trade, from memory.</param>
/// <param name="TyreStiffnessNPerRad">Cornering stiffness of one tyre; middle of the trade's usual ranges, from memory.</param>
/// <param name="FrontRate">Normal wear, front axle, mm per 1000 km; middle of the trade's usual ranges, from memory.</param>
/// <param name="RearRate">The same for other axles.</param>
/// <param name="RollShare">SD of outboard-shoulder wear common to both wheels of an axle from cornering and roll, share of the rate; from memory.</param>
/// <param name="NewDepthMm">New tread depth where the tyre's own is unknown; middle of the trade's usual ranges, from memory.</param>
public sealed record ClassSensitivities(
    double CasterNmPerDeg, double CamberNmPerDeg, double SideForceLeverM, double BankNmPerDeg, double BankWheelDegPerDeg,
    double PressureNmPerShare, double DragLeverM, double ConicitySdN, double SteeringRatio, double TyreStiffnessNPerRad,
    double FrontRate, double RearRate, double RollShare, double NewDepthMm);

/// <summary>Constants with their spread. "From memory" marks what no published figure was found for.</summary>
public static class Sensitivities
{
    /// <summary>RMS slip of ordinary service, deg, and the spread of its logarithm between vehicles; prior from memory.</summary>
    public const double ServiceSlipDeg = 0.25, ServiceSlipSpread = 0.30;

    /// <summary>
    /// Where the outermost grooves lie, share of the half width: what is read there is not yet the shoulder. Four grooves between five equal
    /// ribs give 0.6, narrow shoulder ribs up to 0.8 (from memory); the edge's spread covers both.
    /// </summary>
    private const double OuterGrooves = 0.7;

    /// <summary>Outermost less innermost groove over the mean, per unit of signed wear: 2/3 at the shoulders gives outer to inner 2 : 1 far out (from memory).</summary>
    public const double EdgeShare = OuterGrooves * 2.0 / 3, EdgeSpread = 0.35;

    /// <summary>Outermost less innermost groove over the mean, per degree of camber; 0.32 at the shoulders (from memory).</summary>
    public const double CamberEdgeShare = OuterGrooves * 0.32, CamberEdgeSpread = 0.45;

    /// <summary>Step of the rib edges at a slip of one service RMS, mm, and its spread (from memory).</summary>
    public const double FeatherMm = 0.40, FeatherSpread = 0.60;

    /// <summary>Spread of the torque gains and of the assist's share, as logarithm (from memory).</summary>
    public const double TorqueGainSpread = 0.30;

    /// <summary>Spread of the steering ratio: recorded, and taken from the class (from memory).</summary>
    public const double RatioSpreadKnown = 0.05, RatioSpreadClass = 0.15;

    /// <summary>
    /// Part of a trailer's skew that its tyres slip, and of a thrust angle that rear tyres scrub, with the spread of both
    /// logarithms. Axles that all point the same way make the vehicle run crabwise until no side force is left, so little
    /// of the angle is slip; what is left comes from turning (from memory).
    /// </summary>
    public const double TrailerSkewShare = 0.15, ThrustScrubShare = 0.10, ShareSpread = 0.45;

    /// <summary>SD of an angle in order, as share of its tolerance.</summary>
    public const double InOrderSd = 0.45;

    /// <summary>What is left unexplained: torque N·m (times assist share), wheel angle deg, log rate per tyre and per vehicle, edge share, feather mm (from memory).</summary>
    public const double TorqueRest = 0.12, WheelAngleRest = 0.5, LogRateRest = 0.15, LogRateVehicle = 0.20, EdgeRest = 0.08, FeatherRest = 0.10;

    /// <summary>
    /// The same where a place's whole history is read and what surveys share is taken apart: log rate of a place, of both sides
    /// of an axle, of an axle that is lifted for a part of the distance; edge share of a place (from memory).
    /// </summary>
    public const double LogRatePlace = 0.08, LogRateAxle = 0.12, LogRateLifting = 0.30, EdgePlace = 0.05;

    /// <summary>SD of the angle sensor's zero on a vehicle not worth naming for it, deg at the wheel (from memory).</summary>
    public const double SensorZeroSdDeg = 1.3;

    /// <summary>
    /// Slip with which every tyre holds the vehicle on the usual crown, deg: cross-slope 2 % of its load over C/Fz, that
    /// is 6.1 deg per g on light tyres and 8.7 on heavy ones (Gillespie 1992 for the balance; 2 %: road design practice).
    /// </summary>
    public static double CrownSlipDeg(VehicleClass kind) => 0.02 * (kind is VehicleClass.Car or VehicleClass.Van ? 6.1 : 8.7);

    /// <summary>Spread of that slip from route to route, share of it: some run on one-plane and multi-lane roads, some on crowned ones alone (from memory).</summary>
    public const double CrownSlipSpread = 0.3;

    /// <summary>SD of one-way turning slip over RMS service slip: unknown, and per unit of (2·left share − 1) when the route tells it (from memory).</summary>
    public const double DutySd = 0.18, DutyPerShare = 0.8;

    /// <summary>Chance that one reading is wild: wrong wheel, wrong unit, wrong tyre (from memory, 1 to 3 %).</summary>
    public const double WildShare = 0.02;

    /// <summary>Chance that all that was read of a place tells of something else (another wheel throughout, a cupped tread), where its whole history is read; from memory.</summary>
    public const double WildPlaceShare = 0.005;

    private static readonly Dictionary<VehicleClass, ClassSensitivities> Table = new()
    {
        [VehicleClass.Car] = new(0.22, 0.20, 0.045 / 16, 0.50, 0.35, 1.0, 0.015 / 16, 20, 16, 55e3, 0.15, 0.09, 0.06, 8),
        [VehicleClass.Van] = new(0.55, 0.34, 0.052 / 16, 1.07, 0.35, 1.5, 0.020 / 16, 30, 16, 80e3, 0.18, 0.18, 0.08, 9),
        [VehicleClass.Truck] = new(2.75, 0.88, 0.080 / 20, 4.0, 0.60, 5.0, 0.060 / 20, 70, 20, 170e3, 0.07, 0.06, 0.08, 16),
        [VehicleClass.Bus] = new(2.75, 0.88, 0.080 / 20, 4.0, 0.60, 5.0, 0.060 / 20, 70, 20, 170e3, 0.11, 0.11, 0.15, 15),
        [VehicleClass.Trailer] = new(0, 0, 0, 0, 0, 0, 0, 0, 1, 160e3, 0.055, 0.055, 0.06, 13),
    };

    public static ClassSensitivities Of(VehicleClass kind) => Table[kind];

    /// <summary>Share of the column torque that the logged torque shows, with the spread of its logarithm (from memory: hydraulic assist leaves a fifth to a tenth).</summary>
    public static (double Share, double Spread) AssistShare(SteeringAssist assist, bool torqueIncludesAssist) => assist switch
    {
        SteeringAssist.None => (1, 0),
        SteeringAssist.Electric => torqueIncludesAssist ? (1, 0) : (0.3, 0.5),
        SteeringAssist.Hydraulic or SteeringAssist.ElectroHydraulic => torqueIncludesAssist ? (1, 0.1) : (0.15, 0.35),
        _ => torqueIncludesAssist ? (1, 0.1) : (0.4, 0.6),
    };
}
