namespace WearWatch.Simulator;

/// <summary>True money of one vehicle in its depot's currency.</summary>
public sealed record Money(double TyresPerWeek, double FuelPerWeek, double JobPrice)
{
    public const int HorizonWeeks = 52;

    public double PerWeek => TyresPerWeek + FuelPerWeek;
    public double NetBenefit => HorizonWeeks * PerWeek - JobPrice;

    /// <summary>
    /// Tyres: Σ (rate − rate with every angle on target) ÷ usable depth × price, per 1000 km. Drag: Σ C α² now less the
    /// same on target; 1 N is 0.00735 L/100 km (engine efficiency 0.38, 35.8 MJ/L) or 0.0309 kWh/100 km (0.9).
    /// </summary>
    public static Money Of(FleetVehicle vehicle, TyreSet tyres, Geometry now)
    {
        var type = vehicle.Type;
        var target = OnTarget(type, now);
        var (slipNow, slipThen) = (vehicle.MeanSlip(now, tyres.Tyres), vehicle.MeanSlip(target, tyres.Tyres));
        var wheels = vehicle.Wheels(tyres.Tyres);
        double tyreCost = 0, drag = 0;
        foreach (var p in vehicle.Positions)
        {
            var axle = type.Axles[p.Axle];
            var (rateNow, rateThen) = (tyres.MeanRate(p, now, slipNow[p.Index]), tyres.MeanRate(p, target, slipThen[p.Index]));
            var usable = axle.NewDepthMm - vehicle.Depot.LimitMm(type) - 1;
            tyreCost += (rateNow - rateThen) / usable * axle.TyrePriceEur * vehicle.Depot.PriceFactor;
            var stiffness = axle.StiffnessKnPerRad * 1000 * wheels[p.Index].StiffnessShare * Math.Pow(Math.PI / 180, 2);
            drag += stiffness * (slipNow[p.Index] * slipNow[p.Index] - slipThen[p.Index] * slipThen[p.Index]);
        }
        var perKm = drag * (type.Electric ? 0.0309 * vehicle.Depot.EnergyPrice : 0.00735 * vehicle.Depot.FuelPrice) / 100;
        return new(tyreCost * vehicle.KmPerWeek / 1000, perKm * vehicle.KmPerWeek, Math.Round(type.JobPriceEur * vehicle.Depot.PriceFactor));
    }

    /// <summary>The vehicle after a perfect alignment. Front toe split stays: it wears nothing and is the wheel's place only.</summary>
    private static Geometry OnTarget(VehicleType type, Geometry now)
    {
        var g = new Geometry(type.Axles.Length);
        for (var a = 0; a < g.Axles; a++)
        {
            var front = a == 0 && !type.IsTrailer;
            g.TotalToe[a] = (front ? Tolerances.FrontTotalToe(type.Class) : Tolerances.RearTotalToe(type.Class)).Target;
            g.CamberLeft[a] = g.CamberRight[a] = Tolerances.Camber(type.Class, front).Target;
            if (type.Axles[a].Steered) g.Direction[a] = now.Direction[a];
        }
        return g;
    }
}
