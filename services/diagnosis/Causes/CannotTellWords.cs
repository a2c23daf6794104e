using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Causes;

/// <summary>What the data at hand cannot say, in plain words.</summary>
internal static class CannotTellWords
{
    /// <summary>Below this share of the column torque a caster split stays within the noise (hydraulic assist).</summary>
    private const double FaintAssistShare = 0.5;

    public static IReadOnlyList<CannotTell> Of(VehicleModel model, double misaligned)
    {
        var said = new List<CannotTell>();
        if (model.IsTrailer) said.Add(new("Anything from steering", "a trailer sends no steering signals", "tread surveys with edge steps or hand rubs on every tyre"));
        else Steering(model, said);
        Tread(model, said);
        if (misaligned is > 0.35 and < 0.65)
            said.Add(new("Whether the vehicle is out of alignment", "the evidence for and against is about even", "a check on the bench, or another tread survey after 5000 km"));
        return said;
    }

    private static void Steering(VehicleModel model, List<CannotTell> said)
    {
        var steering = model.Figures.Steering;
        if (steering?.SteeringPullNm is null)
            said.Add(new("A caster split, or any pull", steering is null ? "no steering signals came" : "no driver torque came with the steering signals", "driver torque, at 0.1 N·m or finer"));
        else
        {
            if (model.AssistShare < FaintAssistShare)
                said.Add(new("A small caster or camber split", "the assist takes most of the torque before it is measured", "assist torque in the same log, or caster measured on the bench"));
            said.Add(new("Caster split, camber split and conicity from one another", "all three pull steadily to one side", "swap the front tyres left to right: conicity changes sides, the angles do not"));
        }
        if (steering?.OffCentreDeg is null)
            said.Add(new("The direction of the rear axle from the steering wheel", "no steering-wheel angle came", "steering-wheel angle, at 0.1 deg or finer"));
        else
            said.Add(new("The angle sensor's zero from unequal front toe", "both turn the wheel alike and neither wears a tyre", "look at the wheel itself on a straight road, or the zero after service"));
    }

    private static void Tread(VehicleModel model, List<CannotTell> said)
    {
        var tyres = model.Figures.Tyres;
        var shaped = tyres.Where(t => t.EdgeSlopeMmPer1000Km is not null).Select(t => t.Position).ToHashSet();
        var missing = model.Positions.Where(p => !shaped.Contains(p)).ToArray();
        if (missing.Length == model.Positions.Count)
            said.Add(new("Toe, camber and axle skew from wear", "no tyre has depths of several grooves over a distance", "two surveys, every main groove from the outboard side in, with the distance"));
        else if (missing.Length > 0)
            said.Add(new($"The wear across {string.Join(", ", missing)}", "too few readings of several grooves", "every main groove of these tyres at the next survey"));
        if (tyres.Count > 0 && tyres.All(t => t.FeatherMm is null && t.RubsCatchingInward + t.RubsCatchingOutward + t.RubsCatchingNeither == 0))
            said.Add(new("Toe from camber or cornering", "nobody felt or measured the rib edges", "rub the hand across each tread, outward and inward"));
        if (tyres.Count > 0 && tyres.All(t => t.RateBorrowed || t.LogRateRatio is null))
            said.Add(new("Whether the tyres wear faster than the fleet's", "no wear rate of their own yet", "one more survey with its distance"));
        if (model.Figures.Route?.LeftTurnShare is null && model.Figures.Vehicle.Class == VehicleClass.Bus)
            said.Add(new("One-way turning from axle skew", "the usual route is not known", "the route, and which way round it runs"));
    }
}
