namespace WearWatch.Diagnosis.Geometry;

/// <summary>Caster from the change of camber over a steering swing.</summary>
public static class CasterSwing
{
    /// <summary>Caster, deg: change of camber ÷ (2·sin of the swing).</summary>
    /// <param name="camberChangeDeg">Camber at one end of the swing less that at the other, deg.</param>
    /// <param name="swingDeg">Steer each way, deg, 10 to 25; 20 is customary.</param>
    /// <remarks>First-order kinematics of an inclined steering axis; valid for caster up to about 12°.</remarks>
    public static double CasterDeg(double camberChangeDeg, double swingDeg = 20) => camberChangeDeg / (2 * Math.Sin(Toe.Radians(swingDeg)));
}
