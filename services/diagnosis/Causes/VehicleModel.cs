using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Geometry;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Rules;

namespace WearWatch.Diagnosis.Causes;

/// <summary>One quantity of the vehicle's state, as departure from its target.</summary>
/// <param name="Quantity">Angle or look-alike.</param>
/// <param name="Axle">Its axle, or null.</param>
/// <param name="Side">Its wheel, or null.</param>
/// <param name="PriorSd">SD on a vehicle where it is nothing worth naming, in the quantity's unit.</param>
/// <param name="Tolerance">± tolerance; null for look-alikes.</param>
/// <param name="Target">Target the departure counts from.</param>
public sealed record StateDimension(Quantity Quantity, int? Axle, Side? Side, double PriorSd, double? Tolerance, double Target = 0);

/// <summary>
/// The steady straight-ahead vehicle at small angles: every observable as a function of the state, by linear maps
/// from the state to slip (in units of RMS service slip), camber and the steering rows.
/// </summary>
public sealed class VehicleModel
{
    private readonly List<StateDimension> _dimensions = [];

    public VehicleModel(VehicleFigures figures)
    {
        Figures = figures;
        Class = Sensitivities.Of(figures.Vehicle.Class);
        Positions = [.. figures.Vehicle.Positions()];
        (AssistShare, AssistSpread) = Sensitivities.AssistShare(figures.Vehicle.Assist, figures.Steering?.TorqueIncludesAssist ?? false);
        Ratio = figures.Vehicle.SteeringRatio ?? Class.SteeringRatio;
        AddAngles();
        if (!IsTrailer) AddSteeringLookAlikes();
        _dimensions.Add(new(Quantity.Duty, null, null, Sensitivities.DutySd, null));
        var (tyres, states) = (Positions.Count, _dimensions.Count);
        (Slip, Duty, Camber) = (new double[tyres, states], new double[tyres, states], new double[tyres, states]);
        (ShareUncertain, Torque, WheelAngle) = (new bool[states], new double[states], new double[states]);
        for (var d = 0; d < states; d++) Map(d);
        CrownSlip = (figures.Depot.TrafficSide == TrafficSide.Right ? 1 : -1) * Sensitivities.CrownSlipDeg(figures.Vehicle.Class) / Sensitivities.ServiceSlipDeg;
        DutyMean = figures.Route?.LeftTurnShare is { } share ? Sensitivities.DutyPerShare * (2 * Math.Clamp(share, 0, 1) - 1) : 0;
    }

    public VehicleFigures Figures { get; }
    public ClassSensitivities Class { get; }
    public IReadOnlyList<Position> Positions { get; }
    public IReadOnlyList<StateDimension> Dimensions => _dimensions;
    public bool IsTrailer => Figures.Vehicle.Class == VehicleClass.Trailer;
    public double AssistShare { get; }
    public double AssistSpread { get; }
    public double Ratio { get; }

    /// <summary>Slip per unit of state, over RMS service slip; positive as for toe-in.</summary>
    public double[,] Slip { get; }
    /// <summary>Slip that one-way turning adds: it shapes the tread but is already within the service wear.</summary>
    public double[,] Duty { get; }
    /// <summary>Camber, deg per unit of state.</summary>
    public double[,] Camber { get; }
    /// <summary>States whose slip is known only to a share with a wide spread.</summary>
    public bool[] ShareUncertain { get; }
    /// <summary>Holding torque at the wheel per unit of state, N·m.</summary>
    public double[] Torque { get; }
    /// <summary>Straight-ahead steering-wheel angle per unit of state, deg.</summary>
    public double[] WheelAngle { get; }
    /// <summary>Slip that holds the vehicle on the usual crown, as of an axle pointing left, over RMS service slip. Normal wear has it inside.</summary>
    public double CrownSlip { get; }
    /// <summary>One-way turning slip that the usual route implies, over RMS service slip.</summary>
    public double DutyMean { get; }

    public int IndexOf(Quantity quantity, int? axle = null, Side? side = null) =>
        _dimensions.FindIndex(d => d.Quantity == quantity && d.Axle == axle && d.Side == side);

    private void AddAngles()
    {
        foreach (var axle in Figures.Vehicle.Axles.OrderBy(a => a.Number))
        {
            AddAngle(axle.Number == 1 && !IsTrailer ? Quantity.FrontTotalToe : Quantity.RearTotalToe, axle.Number, null);
            AddAngle(Quantity.Camber, axle.Number, Side.Left);
            AddAngle(Quantity.Camber, axle.Number, Side.Right);
        }
        AddAngle(Quantity.CasterSplit, null, null);
        if (RearGroup.Count > 0) AddAngle(Quantity.Thrust, null, null);
        for (var pair = 0; pair + 1 < RearGroup.Count; pair++) AddAngle(Quantity.TandemSkew, RearGroup[pair], null);
        AddAngle(Quantity.TrailerSkew, null, null);
    }

    /// <summary>Axles that guide the vehicle's rear: unsteered ones behind the first, all of a trailer's.</summary>
    public IReadOnlyList<int> RearGroup => [.. Figures.Vehicle.Axles.Where(a => IsTrailer || (a.Number > 1 && !a.Steered)).Select(a => a.Number).Order()];

    private void AddAngle(Quantity quantity, int? axle, Side? side)
    {
        if (Tolerances.For(Figures.Vehicle, quantity, axle, Figures.Tolerances, Figures.AsOf) is { } tolerance)
            _dimensions.Add(new(quantity, axle, side, Sensitivities.InOrderSd * tolerance.PlusMinus, tolerance.PlusMinus, tolerance.Target));
    }

    private void AddSteeringLookAlikes()
    {
        var bankSd = Figures.Steering?.RoadShare switch { RoadShare.SharedCells => 0.1, RoadShare.OwnBankReading => 0.2, _ => 0.35 };
        _dimensions.Add(new(Quantity.Conicity, null, null, Class.ConicitySdN, null));
        _dimensions.Add(new(Quantity.Pressure, null, null, 0.04, null));
        _dimensions.Add(new(Quantity.Crown, null, null, bankSd, null));
        _dimensions.Add(new(Quantity.Drag, null, null, 15, null));
        _dimensions.Add(new(Quantity.SensorZeroOrFrontToeSplit, null, null, Sensitivities.SensorZeroSdDeg, null));
    }

    private void Map(int d)
    {
        var state = _dimensions[d];
        switch (state.Quantity)
        {
            case Quantity.FrontTotalToe or Quantity.RearTotalToe:
                EachTyre(p => p.Axle == state.Axle, (i, _) => Slip[i, d] = 0.5 / Sensitivities.ServiceSlipDeg);
                break;
            case Quantity.Camber:
                EachTyre(p => p.Axle == state.Axle && p.Side == state.Side, (i, _) => Camber[i, d] = 1);
                if (state.Axle == 1) Torque[d] = (state.Side == Side.Left ? -1 : 1) * Class.CamberNmPerDeg * AssistShare;
                break;
            case Quantity.CasterSplit:
                Torque[d] = Class.CasterNmPerDeg * AssistShare;
                break;
            case Quantity.Thrust:
                WheelAngle[d] = Ratio;
                ShareUncertain[d] = true;
                EachTyre(p => RearGroup.Contains(p.Axle), (i, turn) => Slip[i, d] = turn * Sensitivities.ThrustScrubShare / Sensitivities.ServiceSlipDeg);
                break;
            case Quantity.TandemSkew:
                MapTandem(d, state.Axle!.Value);
                break;
            case Quantity.TrailerSkew:
                ShareUncertain[d] = true;
                EachTyre(_ => true, (i, turn) => Slip[i, d] = turn * Sensitivities.TrailerSkewShare / Sensitivities.ServiceSlipDeg);
                break;
            case Quantity.Conicity:
                Torque[d] = -Class.SideForceLeverM * AssistShare;
                break;
            case Quantity.Pressure: // left less right on the front axle
                Torque[d] = Class.PressureNmPerShare * AssistShare;
                break;
            case Quantity.Crown:
                Torque[d] = Class.BankNmPerDeg * AssistShare;
                WheelAngle[d] = Class.BankWheelDegPerDeg;
                EachTyre(p => p.Axle == 1, (i, turn) => Duty[i, d] = 0.2 * turn);
                break;
            case Quantity.Drag:
                Torque[d] = -Class.DragLeverM * AssistShare;
                break;
            case Quantity.SensorZeroOrFrontToeSplit:
                WheelAngle[d] = 1;
                break;
            case Quantity.Duty:
                EachTyre(_ => true, (i, turn) => Duty[i, d] = Positions[i].Axle == 1 || IsTrailer ? turn : 0.7 * turn);
                break;
        }
    }

    /// <summary>Axles before the gap point left, those behind it right, so that the group's side forces balance; the couple loads the steer axle.</summary>
    private void MapTandem(int d, int firstOfPair)
    {
        var group = RearGroup;
        var before = group.TakeWhile(a => a <= firstOfPair).Count();
        EachTyre(p => group.Contains(p.Axle), (i, turn) =>
            Slip[i, d] = turn * (Positions[i].Axle <= firstOfPair ? 1 - before / (double)group.Count : -before / (double)group.Count) / Sensitivities.ServiceSlipDeg);
        if (IsTrailer) return;
        // 600 kN/rad an axle, 1.31 m apart, 5.5 m behind the steer axle: 1247 N a degree.
        var wheelbase = Figures.Vehicle.WheelbaseM is > 2 and < 14 ? Figures.Vehicle.WheelbaseM.Value : 5.5;
        var force = TandemFight.SteerAxleForceN(600e3, 1, 1.31, wheelbase);
        Torque[d] = force * Class.SideForceLeverM * AssistShare;
        var steerSlipDeg = force / (2 * Class.TyreStiffnessNPerRad) * 180 / Math.PI;
        WheelAngle[d] = Ratio * steerSlipDeg;
        EachTyre(p => p.Axle == 1, (i, turn) => Slip[i, d] = turn * steerSlipDeg / Sensitivities.ServiceSlipDeg);
    }

    /// <summary>Calls with the tyre's index and +1 on the right, −1 on the left: an axle direction to the left toes the right wheel in.</summary>
    private void EachTyre(Func<Position, bool> which, Action<int, int> act)
    {
        for (var i = 0; i < Positions.Count; i++)
            if (which(Positions[i])) act(i, Positions[i].Side == Side.Right ? 1 : -1);
    }
}
