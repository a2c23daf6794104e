namespace WearWatch.Simulator;

/// <summary>One axle of a vehicle type. Loads are those of usual running.</summary>
/// <param name="PositionM">Distance behind the first axle (behind the kingpin for a trailer), m.</param>
/// <param name="LoadKn">Axle load, kN.</param>
/// <param name="StiffnessKnPerRad">Cornering stiffness of one tyre at that load, kN/rad.</param>
/// <param name="BaseRate">Wear without any misalignment, mean over the tread, mm per 1000 km.</param>
/// <param name="ServiceSlipDeg">RMS slip angle of turning and manoeuvring, deg.</param>
/// <param name="NewDepthMm">Tread depth when new, mm.</param>
public sealed record AxleType(
    double PositionM, double LoadKn, double StiffnessKnPerRad, double BaseRate, double ServiceSlipDeg, double NewDepthMm,
    string Suspension, string TyreSize, double TyrePriceEur, double PressureKpa, double TrackM,
    bool Steered = false, bool Driven = false, bool Lifting = false, bool Duals = false)
{
    public int TyresPerSide => Duals ? 2 : 1;
    /// <summary>Share of the distance that it runs on the road.</summary>
    public double DownShare => Lifting ? 0.6 : 1;
}

/// <summary>
/// An invented vehicle type. Figures are of the usual size for the class (gross mass, wheelbase, ratio from
/// memory); cornering stiffness: light tyres 0.165 of the load per degree, heavy 0.085 to 0.11 (from memory,
/// measured sets in Fancher et al., UMTRI-86-12, 1986); base wear rates: line-haul trucks 0.025 to 0.05, city
/// 0.08 to 0.10 mm per 1000 km (fleet trade press); car front 0.10 to 0.20, rear 0.06 to 0.12, van 0.12 to 0.25,
/// bus 0.08 to 0.15, trailer 0.03 to 0.08 (from memory); the base
/// rates below leave room for what the roads' crown adds.
/// </summary>
public sealed record VehicleType
{
    public required string Name { get; init; }
    public required VehicleClass Class { get; init; }
    public required AxleType[] Axles { get; init; }
    public required double GrossMassKg { get; init; }
    public required double KmPerWeek { get; init; }
    /// <summary>Steering-wheel angle over road-wheel angle on centre; 0 for a trailer.</summary>
    public double SteeringRatio { get; init; }
    public string Assist { get; init; } = "none";
    /// <summary>Litres, or kWh where electric, per 100 km.</summary>
    public double Consumption { get; init; }
    public bool Electric { get; init; }
    /// <summary>Mechanical trail, m: wheel radius × tan(caster).</summary>
    public double MechanicalTrailM { get; init; }
    /// <summary>Pneumatic trail, m: a third of half the contact length (brush model).</summary>
    public double PneumaticTrailM { get; init; }
    /// <summary>Lateral offset of the wheel centre from the steering axis at hub height, m (lever of caster split).</summary>
    public double HubOffsetM { get; init; }
    /// <summary>Scrub radius, m, + contact outboard of the axis.</summary>
    public double ScrubRadiusM { get; init; }
    /// <summary>Centre of gravity above the road, m.</summary>
    public double CentreHeightM { get; init; }
    /// <summary>Grooves gauged on each tyre.</summary>
    public int Grooves { get; init; }
    /// <summary>Extra wear of the outboard shoulders from body roll in curves, share.</summary>
    public double RollShare { get; init; }
    public double CruiseKmH { get; init; }

    public bool IsTrailer => Class == VehicleClass.Trailer;
    public double WheelbaseM => Axles[^1].PositionM - Axles[0].PositionM;
    public IEnumerable<int> FixedAxles => Enumerable.Range(0, Axles.Length).Where(a => !Axles[a].Steered);

    /// <summary>Alignment job price in the fleet's own bay, EUR; outside it is van 80 to 180, truck 200 to 450, trailer 150 to 350 (from memory).</summary>
    public double JobPriceEur => Class switch
    {
        VehicleClass.Car => 70,
        VehicleClass.Van => 90,
        VehicleClass.Trailer => 160,
        VehicleClass.Bus => 220,
        _ => 200 + 25 * (Axles.Length - 2),
    };
}

public static class VehicleTypes
{
    public static readonly VehicleType Car = new()
    {
        Name = "pool car",
        Class = VehicleClass.Car,
        GrossMassKg = 2050,
        KmPerWeek = 620,
        SteeringRatio = 15.5,
        Assist = "electric",
        Consumption = 5.8,
        MechanicalTrailM = 0.022,
        PneumaticTrailM = 0.025,
        HubOffsetM = 0.056,
        ScrubRadiusM = -0.008,
        CentreHeightM = 0.56,
        Grooves = 4,
        RollShare = 0.05,
        CruiseKmH = 95,
        Axles =
        [
            new(0, 9.2, 40, 0.12, 0.18, 8.0, "strut", "205/55 R16", 115, 250, 1.54, Steered: true, Driven: true),
            new(2.68, 7.8, 39, 0.066, 0.17, 8.0, "double_wishbone", "205/55 R16", 115, 240, 1.53),
        ],
    };

    public static readonly VehicleType ElectricCar = Car with
    {
        Name = "electric pool car",
        GrossMassKg = 2350,
        Consumption = 17.5,
        Electric = true,
        Axles =
        [
            Car.Axles[0] with { LoadKn = 10.2, StiffnessKnPerRad = 45, BaseRate = 0.13, TyreSize = "215/55 R17", TyrePriceEur = 135 },
            Car.Axles[1] with { LoadKn = 9.6, StiffnessKnPerRad = 48, BaseRate = 0.078, TyreSize = "215/55 R17", TyrePriceEur = 135 },
        ],
    };

    public static readonly VehicleType Van = new()
    {
        Name = "delivery van",
        Class = VehicleClass.Van,
        GrossMassKg = 3500,
        KmPerWeek = 900,
        SteeringRatio = 16,
        Assist = "electric",
        Consumption = 9.8,
        MechanicalTrailM = 0.027,
        PneumaticTrailM = 0.025,
        HubOffsetM = 0.056,
        ScrubRadiusM = -0.01,
        CentreHeightM = 0.78,
        Grooves = 3,
        RollShare = 0.08,
        CruiseKmH = 90,
        Axles =
        [
            new(0, 16.2, 70, 0.145, 0.19, 8.8, "strut", "225/65 R16C", 155, 350, 1.73, Steered: true, Driven: true),
            new(3.6, 13.8, 68, 0.11, 0.18, 8.8, "beam_leaf", "225/65 R16C", 155, 380, 1.72),
        ],
    };

    public static readonly VehicleType HydraulicVan = Van with
    {
        Name = "older van",
        Assist = "hydraulic",
        Grooves = 4,
        Axles = [Van.Axles[0] with { Driven = false }, Van.Axles[1] with { Driven = true, BaseRate = 0.125 }],
    };

    public static readonly VehicleType Rigid = new()
    {
        Name = "two-axle rigid",
        Class = VehicleClass.Truck,
        GrossMassKg = 16000,
        KmPerWeek = 1350,
        SteeringRatio = 20,
        Assist = "hydraulic",
        Consumption = 23,
        MechanicalTrailM = 0.030,
        PneumaticTrailM = 0.036,
        HubOffsetM = 0.09,
        ScrubRadiusM = 0.068,
        CentreHeightM = 1.35,
        Grooves = 4,
        RollShare = 0.07,
        CruiseKmH = 80,
        Axles =
        [
            new(0, 52, 165, 0.070, 0.20, 15, "beam_leaf", "295/80 R22.5", 390, 800, 2.05, Steered: true),
            new(5.0, 88, 158, 0.064, 0.20, 20, "beam_air", "295/80 R22.5", 380, 780, 1.83, Driven: true, Duals: true),
        ],
    };

    public static readonly VehicleType TandemRigid = Rigid with
    {
        Name = "three-axle rigid, tandem drive",
        GrossMassKg = 26000,
        KmPerWeek = 1150,
        Consumption = 30,
        Grooves = 5,
        Axles =
        [
            new(0, 66, 190, 0.060, 0.20, 15, "beam_leaf", "315/80 R22.5", 430, 850, 2.05, Steered: true),
            new(4.2, 78, 128, 0.053, 0.20, 20, "beam_air", "315/80 R22.5", 410, 800, 1.83, Driven: true, Duals: true),
            new(5.55, 78, 128, 0.055, 0.20, 20, "beam_air", "315/80 R22.5", 410, 800, 1.83, Driven: true, Duals: true),
        ],
    };

    public static readonly VehicleType TwinSteer = Rigid with
    {
        Name = "four-axle rigid, two steered",
        GrossMassKg = 32000,
        KmPerWeek = 950,
        Consumption = 34,
        Axles =
        [
            new(0, 64, 185, 0.068, 0.21, 15, "beam_leaf", "315/80 R22.5", 430, 850, 2.05, Steered: true),
            new(1.9, 64, 185, 0.065, 0.20, 15, "beam_leaf", "315/80 R22.5", 430, 850, 2.05, Steered: true),
            new(5.3, 82, 132, 0.062, 0.21, 20, "beam_leaf", "315/80 R22.5", 410, 800, 1.83, Driven: true, Duals: true),
            new(6.65, 82, 132, 0.063, 0.22, 20, "beam_leaf", "315/80 R22.5", 410, 800, 1.83, Driven: true, Duals: true),
        ],
    };

    public static readonly VehicleType Tractor = Rigid with
    {
        Name = "two-axle tractor",
        GrossMassKg = 18000,
        KmPerWeek = 2400,
        SteeringRatio = 19,
        Consumption = 29,
        CentreHeightM = 1.2,
        Grooves = 5,
        RollShare = 0.05,
        CruiseKmH = 85,
        Axles =
        [
            new(0, 68, 190, 0.028, 0.15, 15, "beam_leaf", "315/70 R22.5", 440, 900, 2.05, Steered: true),
            new(3.7, 96, 150, 0.027, 0.15, 19, "beam_air", "315/70 R22.5", 420, 800, 1.83, Driven: true, Duals: true),
        ],
    };

    public static readonly VehicleType LiftTractor = Tractor with
    {
        Name = "three-axle tractor, lifting axle",
        GrossMassKg = 26000,
        KmPerWeek = 2300,
        Consumption = 31,
        Axles =
        [
            Tractor.Axles[0],
            new(2.75, 60, 165, 0.032, 0.16, 14, "beam_air", "315/70 R22.5", 430, 850, 2.02, Lifting: true),
            new(4.05, 92, 148, 0.027, 0.15, 19, "beam_air", "315/70 R22.5", 420, 800, 1.83, Driven: true, Duals: true),
        ],
    };

    public static readonly VehicleType Bus = new()
    {
        Name = "town bus",
        Class = VehicleClass.Bus,
        GrossMassKg = 18500,
        KmPerWeek = 1180,
        SteeringRatio = 20.5,
        Assist = "hydraulic",
        Consumption = 36,
        MechanicalTrailM = 0.030,
        PneumaticTrailM = 0.034,
        HubOffsetM = 0.085,
        ScrubRadiusM = 0.06,
        CentreHeightM = 1.15,
        Grooves = 4,
        RollShare = 0.12,
        CruiseKmH = 68,
        Axles =
        [
            new(0, 58, 172, 0.078, 0.27, 16, "double_wishbone", "275/70 R22.5", 410, 850, 2.08, Steered: true),
            new(5.9, 98, 165, 0.072, 0.25, 17, "beam_air", "275/70 R22.5", 400, 820, 1.82, Driven: true, Duals: true),
        ],
    };

    public static readonly VehicleType ElectricBus = Bus with
    {
        Name = "electric town bus",
        GrossMassKg = 19500,
        Assist = "electro_hydraulic",
        Consumption = 118,
        Electric = true,
        Axles = [Bus.Axles[0] with { LoadKn = 66, StiffnessKnPerRad = 190, BaseRate = 0.080 }, Bus.Axles[1] with { LoadKn = 108, BaseRate = 0.074 }],
    };

    public static readonly VehicleType TriAxleTrailer = new()
    {
        Name = "tri-axle semi-trailer",
        Class = VehicleClass.Trailer,
        GrossMassKg = 36000,
        KmPerWeek = 2100,
        CentreHeightM = 1.6,
        Grooves = 4,
        RollShare = 0.04,
        Axles =
        [
            new(6.4, 66, 190, 0.032, 0.16, 13, "trailing_arm", "385/65 R22.5", 410, 900, 2.04),
            new(7.71, 66, 190, 0.027, 0.15, 13, "trailing_arm", "385/65 R22.5", 410, 900, 2.04),
            new(9.02, 66, 190, 0.033, 0.16, 13, "trailing_arm", "385/65 R22.5", 410, 900, 2.04),
        ],
    };

    public static readonly VehicleType LiftTrailer = TriAxleTrailer with
    {
        Name = "tri-axle semi-trailer, first axle lifting",
        Axles = [TriAxleTrailer.Axles[0] with { Lifting = true, BaseRate = 0.031 }, TriAxleTrailer.Axles[1], TriAxleTrailer.Axles[2]],
    };

    public static readonly VehicleType TwinTrailer = TriAxleTrailer with
    {
        Name = "twin-axle semi-trailer",
        GrossMassKg = 28000,
        KmPerWeek = 1700,
        Grooves = 5,
        Axles =
        [
            new(6.2, 76, 125, 0.033, 0.16, 14, "beam_leaf", "275/70 R22.5", 350, 850, 1.84, Duals: true),
            new(7.55, 76, 125, 0.034, 0.16, 14, "beam_leaf", "275/70 R22.5", 350, 850, 1.84, Duals: true),
        ],
    };

    /// <summary>The fleet's mix, repeated: of sixteen, two cars, four vans, four trucks, two buses, four trailers.</summary>
    public static readonly VehicleType[][] Mix =
    [
        [Van], [TriAxleTrailer], [Tractor, LiftTractor], [Bus], [Car, ElectricCar], [Van, HydraulicVan], [TriAxleTrailer, LiftTrailer], [Rigid, TandemRigid],
        [Van], [TwinTrailer, TriAxleTrailer], [LiftTractor, Tractor], [Bus, ElectricBus], [Car], [Van], [TriAxleTrailer], [Rigid, TwinSteer],
    ];
}
