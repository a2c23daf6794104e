using System.Globalization;

namespace WearWatch.Output;

/// <summary>Depths no finer than the gauge that read them: whole counts beside a tenth of a mm where it shows 1/32 inch.</summary>
internal static class Depths
{
    /// <summary>1/32 inch, mm; exact.</summary>
    private const double ThirtySecondMm = 0.79375;

    public static bool IsInches(double stepMm) => stepMm > 0.15 && Math.Abs(stepMm / ThirtySecondMm - Math.Round(stepMm / ThirtySecondMm)) < 0.01;

    /// <summary><c>7.3</c>, <c>8</c> of a gauge with whole mm, <c>10/32</c> of one that shows 1/32 inch.</summary>
    public static string Gauge(double depthMm, double stepMm)
    {
        if (IsInches(stepMm)) return string.Create(CultureInfo.InvariantCulture, $"{depthMm / ThirtySecondMm:0}/32");
        // A mean of several places may lie between two steps of a coarse gauge; of a fine one it says no more than a tenth.
        return depthMm.ToString(stepMm is > 0 and < 0.095 ? "0.00" : stepMm >= 0.95 ? "0" : "0.0", CultureInfo.InvariantCulture);
    }

    /// <summary>The same in mm always: <c>7.9 mm</c>, of an inch gauge <c>10/32 in (7.9 mm)</c>.</summary>
    public static string WithUnit(double depthMm, double stepMm) => IsInches(stepMm)
        ? string.Create(CultureInfo.InvariantCulture, $"{Gauge(depthMm, stepMm)} in ({depthMm:0.0} mm)")
        : $"{Gauge(depthMm, stepMm)} mm";
}
