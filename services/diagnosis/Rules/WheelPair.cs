using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Rules;

/// <summary>How the two wheels of an axle compare.</summary>
public enum PairPattern
{
    None,
    /// <summary>Both outboard or both inboard.</summary>
    Mirrored,
    /// <summary>One outboard and the other inboard: the same side of the vehicle.</summary>
    SameVehicleSide,
    /// <summary>One wheel and not, or not measured, its mate.</summary>
    OneWheel,
}

/// <summary>
/// One signed figure of both wheels of an axle, positive outboard (edge slope) or toe-in (feather). As left and right
/// wheels are mirror images, half the sum is what both share (toe, camber) and half of right less left is the
/// direction the axle seems to point in, positive to the left, as in τ = (tR − tL) ÷ 2.
/// The limit is in the unit of the figure.
/// </summary>
public sealed record WheelPair(int Axle, Dual Dual, TyreFigures? Left, TyreFigures? Right, Estimate? LeftFigure, Estimate? RightFigure, double Limit)
{
    public static WheelPair Of(VehicleFigures figures, int axle, Dual dual, Func<TyreFigures, Estimate?> figure, Func<TyreFigures?, double> limit)
    {
        var left = figures.At(new Position(axle, Side.Left, dual));
        var right = figures.At(new Position(axle, Side.Right, dual));
        return new(axle, dual, left, right, left is null ? null : figure(left), right is null ? null : figure(right), (limit(left) + limit(right)) / 2);
    }

    /// <summary>Edge slope of an axle's wheels, mm per 1000 km, against its share of the normal rate.</summary>
    public static WheelPair Edge(VehicleFigures figures, Axle axle, Dual dual) =>
        Of(figures, axle.Number, dual, t => t.EdgeSlopeMmPer1000Km, t => RuleLimits.OneEdgeShare.Value * RuleLimits.NormalRate(figures.Vehicle.Class, t));

    /// <summary>Feather of an axle's wheels, mm, hand rubs included.</summary>
    public static WheelPair Feather(VehicleFigures figures, Axle axle, Dual dual) =>
        Of(figures, axle.Number, dual, FeatherReading.Of, _ => RuleLimits.Feather.Value);

    public static IEnumerable<Dual> Members(Axle axle) => axle.Duals ? [Dual.Outer, Dual.Inner] : [Dual.Single];

    /// <summary>What both wheels share; null unless both were measured.</summary>
    public Estimate? Shared => LeftFigure is { } l && RightFigure is { } r ? (l + r) * 0.5 : null;

    /// <summary>Direction the axle seems to point in, positive to the left; null unless both were measured.</summary>
    public Estimate? Direction => LeftFigure is { } l && RightFigure is { } r ? (r - l) * 0.5 : null;

    /// <summary>Side with the larger figure; of equal figures the surer one.</summary>
    public Side WorseSide =>
        RightFigure is not { } r || (LeftFigure is { } l && (Math.Abs(l.Value), -l.StandardError).CompareTo((Math.Abs(r.Value), -r.StandardError)) >= 0) ? Side.Left : Side.Right;

    public Estimate? Worse => WorseSide == Side.Left ? LeftFigure : RightFigure;
    public Estimate? Mate => WorseSide == Side.Left ? RightFigure : LeftFigure;
    public TyreFigures? WorseTyre => WorseSide == Side.Left ? Left : Right;
    public TyreFigures? MateTyre => WorseSide == Side.Left ? Right : Left;

    public PairPattern Pattern
    {
        get
        {
            if (Worse is not { } worse) return PairPattern.None;
            if (MateJoins(worse) && Mate is { } mate)
            {
                var mirrored = mate.Value * worse.Value > 0;
                if (RuleLimits.Stands((mirrored ? Shared : Direction)!.Value, Limit, RuleLimits.AgreeingErrors))
                    return mirrored ? PairPattern.Mirrored : PairPattern.SameVehicleSide;
            }
            return RuleLimits.Stands(worse, Limit, RuleLimits.AloneErrors) ? PairPattern.OneWheel : PairPattern.None;
        }
    }

    /// <summary>The figure that the pattern rests on.</summary>
    public Estimate? Leading => Pattern switch
    {
        PairPattern.Mirrored => Shared,
        PairPattern.SameVehicleSide => Direction,
        PairPattern.OneWheel => Worse,
        _ => null,
    };

    public double Strength => Leading is { } leading ? RuleLimits.Strength(leading) : 0;

    private bool MateJoins(Estimate worse) =>
        Mate is { } mate
        && Math.Abs(mate.Value) >= RuleLimits.MateShare.Value * Math.Abs(worse.Value)
        && RuleLimits.Agrees(mate, mate.Value)
        && RuleLimits.Agrees(worse, worse.Value);
}
