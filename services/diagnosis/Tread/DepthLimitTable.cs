using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Tread;

/// <summary>How the law reads the depths of one tyre.</summary>
public enum BandJudgement
{
    /// <summary>No place in the main grooves of the central three quarters of the tread may be below the limit.</summary>
    LeastOfCentralThreeQuarters,
    /// <summary>Any main groove, at any place; in a continuous band of three quarters of the breadth.</summary>
    LeastOfThreeQuartersBand,
    /// <summary>At most one of four points round the tyre may be below the limit.</summary>
    AtMostOneOfFourPoints,
    /// <summary>No place in any main groove may be below the limit.</summary>
    LeastOfMainGrooves,
}

/// <summary>One line of the built-in table of legal limits.</summary>
internal sealed record DepthRule
{
    public required string Jurisdiction { get; init; }
    public IReadOnlyList<VehicleClass>? Classes { get; init; }
    /// <summary>Applies above this gross mass, kg.</summary>
    public double AboveKg { get; init; }
    /// <summary>Applies up to and including this gross mass, kg.</summary>
    public double UpToKg { get; init; } = double.PositiveInfinity;
    /// <summary>Only the steer axle of a motor vehicle (axle 1).</summary>
    public bool FrontOnly { get; init; }
    /// <summary>Only winter tyres.</summary>
    public bool WinterTyre { get; init; }
    /// <summary>Months and days between which the line applies, across the new year; absent for all year.</summary>
    public (int FromMonth, int FromDay, int ToMonth, int ToDay)? Season { get; init; }
    /// <summary>mm.</summary>
    public required double LimitMm { get; init; }
    public BandJudgement Judged { get; init; } = BandJudgement.LeastOfCentralThreeQuarters;
    /// <summary>In force from; where only the year is known, its first day.</summary>
    public required DateOnly From { get; init; }
    public required string Source { get; init; }
}

/// <summary>
/// Legal limits as they stood when checked on 2026-12-01. Current law comes first, and the operator may enter it over this
/// table. Dates of entry into force are from memory unless the source names them. The strictest line that fits applies.
/// </summary>
internal static class DepthLimitTable
{
    public static readonly DateOnly CheckedOn = new(2026, 12, 1);

    /// <summary>A 32nd of an inch, mm; exact.</summary>
    private const double ThirtySecond = 0.79375;

    private const double LightKg = 3500;

    private static readonly VehicleClass[] Light = [VehicleClass.Car, VehicleClass.Van];
    private static readonly VehicleClass[] Motor = [VehicleClass.Car, VehicleClass.Van, VehicleClass.Truck, VehicleClass.Bus];
    private static readonly VehicleClass[] HeavyMotor = [VehicleClass.Truck, VehicleClass.Bus];

    /// <summary>States of the European Union, where directive 89/459/EEC stands behind the national rule.</summary>
    public static readonly IReadOnlySet<string> EuropeanUnion = new HashSet<string>(
        ["AT", "BE", "BG", "CY", "CZ", "DE", "DK", "EE", "ES", "FI", "FR", "GR", "HR", "HU", "IE", "IT", "LT", "LU", "LV", "MT", "NL", "PL", "PT", "RO", "SE", "SI", "SK"]);

    public static readonly IReadOnlyList<DepthRule> Rules =
    [
        new() { Jurisdiction = "US", Classes = HeavyMotor, FrontOnly = true, LimitMm = 4 * ThirtySecond, Judged = BandJudgement.LeastOfMainGrooves, From = new(1979, 1, 1), Source = "49 CFR 393.75(b): 4/32 inch on the front wheels of a bus, truck or tractor" },
        new() { Jurisdiction = "US", Classes = [VehicleClass.Van], AboveKg = 4536, FrontOnly = true, LimitMm = 4 * ThirtySecond, Judged = BandJudgement.LeastOfMainGrooves, From = new(1979, 1, 1), Source = "49 CFR 393.75(b): 4/32 inch on the front wheels of a commercial motor vehicle above 10 000 lb" },
        new() { Jurisdiction = "US", LimitMm = 2 * ThirtySecond, Judged = BandJudgement.LeastOfMainGrooves, From = new(1979, 1, 1), Source = "49 CFR 393.75(c), and most states for light vehicles: 2/32 inch" },

        new() { Jurisdiction = "EU", Classes = Light, LimitMm = 1.6, From = new(1992, 1, 1), Source = "89/459/EEC (M1, N1, O1, O2): 1.6 mm in the main grooves, central three quarters" },
        new() { Jurisdiction = "EU", Classes = [VehicleClass.Trailer], UpToKg = LightKg, LimitMm = 1.6, From = new(1992, 1, 1), Source = "89/459/EEC (M1, N1, O1, O2): 1.6 mm in the main grooves, central three quarters" },

        new() { Jurisdiction = "GB", UpToKg = LightKg, LimitMm = 1.6, Judged = BandJudgement.LeastOfThreeQuartersBand, From = new(1992, 1, 1), Source = "Construction and Use Regulations, reg. 27, up to 3500 kg: 1.6 mm, central three quarters, whole circumference" },
        new() { Jurisdiction = "GB", AboveKg = LightKg, LimitMm = 1.0, Judged = BandJudgement.LeastOfThreeQuartersBand, From = new(1992, 1, 1), Source = "Construction and Use Regulations, reg. 27, above 3500 kg: 1.0 mm over three quarters of the breadth" },

        new() { Jurisdiction = "DE", LimitMm = 1.6, From = new(1992, 1, 1), Source = "StVZO § 36(2): 1.6 mm in the main grooves, middle three quarters" },

        new() { Jurisdiction = "AT", UpToKg = LightKg, LimitMm = 1.6, From = new(1992, 1, 1), Source = "KDV § 4(4), up to 3.5 t: 1.6 mm" },
        new() { Jurisdiction = "AT", AboveKg = LightKg, LimitMm = 2.0, From = new(1992, 1, 1), Source = "KDV § 4(4), above 3.5 t: 2.0 mm" },
        new() { Jurisdiction = "AT", Classes = Light, UpToKg = LightKg, WinterTyre = true, Season = (11, 1, 4, 15), LimitMm = 4.0, From = new(2008, 1, 1), Source = "KDV § 4: 4 mm for a winter tyre to count as one (1 November to 15 April)" },

        new() { Jurisdiction = "FR", Classes = Light, LimitMm = 1.6, From = new(1992, 1, 1), Source = "French order on tyres (M1, N1, O1, O2): 1.6 mm" },
        new() { Jurisdiction = "FR", Classes = [VehicleClass.Trailer], UpToKg = LightKg, LimitMm = 1.6, From = new(1992, 1, 1), Source = "French order on tyres (M1, N1, O1, O2): 1.6 mm" },
        new() { Jurisdiction = "FR", Classes = [VehicleClass.Truck, VehicleClass.Bus], LimitMm = 1.0, Judged = BandJudgement.AtMostOneOfFourPoints, From = new(1992, 1, 1), Source = "French order on tyres, heavy vehicles: of four points round the tyre at most one below 1.0 mm" },
        new() { Jurisdiction = "FR", Classes = [VehicleClass.Trailer], AboveKg = LightKg, LimitMm = 1.0, Judged = BandJudgement.AtMostOneOfFourPoints, From = new(1992, 1, 1), Source = "French order on tyres, heavy vehicles: of four points round the tyre at most one below 1.0 mm" },

        new() { Jurisdiction = "AU", LimitMm = 1.5, Judged = BandJudgement.LeastOfThreeQuartersBand, From = new(1999, 1, 1), Source = "Australian vehicle standards: 1.5 mm in a band of three quarters of the width, whole circumference" },
        new() { Jurisdiction = "NZ", LimitMm = 1.5, Judged = BandJudgement.LeastOfThreeQuartersBand, From = new(1999, 1, 1), Source = "New Zealand vehicle rules: 1.5 mm (from memory)" },
        new() { Jurisdiction = "IN", LimitMm = 1.6, From = new(1992, 1, 1), Source = "Indian CMVR, rule 94: 1.6 mm" },

        new() { Jurisdiction = "SE", LimitMm = 1.6, From = new(1992, 1, 1), Source = "Swedish tyre rules: 1.6 mm" },
        new() { Jurisdiction = "SE", Classes = Motor, UpToKg = LightKg, Season = (12, 1, 3, 31), LimitMm = 3.0, From = new(1999, 1, 1), Source = "Swedish winter rule up to 3.5 t: 3 mm (1 December to 31 March)" },
        new() { Jurisdiction = "SE", Classes = Motor, AboveKg = LightKg, Season = (12, 1, 3, 31), LimitMm = 5.0, From = new(2013, 1, 1), Source = "Swedish winter rule above 3.5 t, not trailers: 5 mm (1 December to 31 March)" },

        new() { Jurisdiction = "NO", LimitMm = 1.6, From = new(1992, 1, 1), Source = "Norwegian vehicle rules: 1.6 mm" },
        new() { Jurisdiction = "NO", Classes = Motor, UpToKg = LightKg, Season = (11, 1, 4, 15), LimitMm = 3.0, From = new(1999, 1, 1), Source = "Norwegian winter rule up to 3.5 t: 3 mm (1 November to mid April, from memory)" },
        new() { Jurisdiction = "NO", AboveKg = LightKg, Season = (11, 1, 4, 15), LimitMm = 5.0, From = new(2015, 1, 1), Source = "Norwegian winter rule above 3.5 t: 5 mm (1 November to mid April)" },
    ];
}
