using WearWatch.Contracts.V1;

namespace WearWatch.Ingest;

/// <summary>Units at the door: what is stored is mm, km and degrees.</summary>
internal static class Measures
{
    /// <summary>International mile, exact.</summary>
    public const double KmPerMile = 1.609344;
    /// <summary>25.4 mm ÷ 32, exact.</summary>
    public const double MmPer32ndInch = 0.79375;

    /// <summary>mm per unit; null where the unit is missing or unknown.</summary>
    public static double? Mm(DepthUnit unit) => unit switch
    {
        DepthUnit.Mm => 1,
        DepthUnit.ThirtySecondsInch => MmPer32ndInch,
        _ => null,
    };

    /// <summary>km per unit.</summary>
    public static double? Km(DistanceUnit unit) => unit switch
    {
        DistanceUnit.Km => 1,
        DistanceUnit.Miles => KmPerMile,
        _ => null,
    };

    /// <summary>deg per unit.</summary>
    public static double? Deg(AngleUnit unit) => unit switch
    {
        AngleUnit.Degrees => 1,
        AngleUnit.Minutes => 1.0 / 60,
        _ => null,
    };
}
