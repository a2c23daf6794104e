namespace WearWatch.Simulator;

/// <summary>What makes a sound vehicle look misaligned: planted on some of them, one each.</summary>
public static class LookAlikes
{
    public static void Plant(FleetVehicle vehicle, RoadNetwork roads, RandomStream random)
    {
        var type = vehicle.Type;
        var light = type.Class is VehicleClass.Car or VehicleClass.Van;
        var sensors = vehicle.Sensors.Kind != "gauge_only";
        List<string> kinds = ["pressure", "roll", "swapped_records", "habit", "damper"];
        if (type.Class != VehicleClass.Bus) kinds.Add("crown");
        if (!type.IsTrailer) kinds.AddRange(["duty", "drag"]);
        if (light) kinds.AddRange(["conicity", "conicity"]);
        if (sensors) kinds.AddRange(["sensor_zero_or_front_toe_split", "sensor_zero_or_front_toe_split"]);
        if (vehicle.Sensors.Kind == "torque") kinds.Add("torque_zero");
        // Town buses carry one-sided duty anyway.
        if (type.Class == VehicleClass.Bus) kinds.AddRange(["duty", "duty", "roll"]);
        vehicle.LookAlikes.Add(Plant(random.Pick(kinds), vehicle, roads, light, random));
    }

    private static LookAlike Plant(string kind, FleetVehicle vehicle, RoadNetwork roads, bool light, RandomStream random)
    {
        var sign = random.Sign();
        switch (kind)
        {
            case "pressure":
                var axle = random.Whole(0, vehicle.Type.Axles.Length - 1);
                var (left, share) = (random.Chance(0.5), -random.Between(0.18, 0.3));
                var both = random.Chance(0.5);
                foreach (var p in vehicle.Positions.Where(p => p.Axle == axle && (both || p.Left == left))) vehicle.PressureShare[p.Index] = share;
                return new(kind, share, "share", both ? $"both sides of axle {axle + 1}" : $"axle {axle + 1} {(left ? 'L' : 'R')}");
            case "roll":
                vehicle.Duty = vehicle.Duty with { Roll = vehicle.Duty.Roll + random.Between(0.15, 0.25) };
                return new(kind, vehicle.Duty.Roll, "share", "high centre of gravity, outboard shoulders");
            case "habit":
                vehicle.Duty = vehicle.Duty with { Driver = random.Between(1.25, 1.35), Roll = vehicle.Duty.Roll + 0.12 };
                return new(kind, vehicle.Duty.Driver, "share", "hard cornering in town");
            case "damper":
                vehicle.CuppedPosition = random.Pick(vehicle.Positions.Where(p => p.Dual != 'I').ToList()).Index;
                return new(kind, 1, "mm", $"cupping on {vehicle.Positions[vehicle.CuppedPosition].Name}");
            case "crown":
                vehicle.Routes = [RoadNetwork.Loops + 8, RoadNetwork.Loops + 9];
                vehicle.Duty = vehicle.Duty with { MeanBank = vehicle.Routes.Average(r => RoadNetwork.MeanBank(roads.Routes[r])) };
                return new(kind, Math.Asin(vehicle.Duty.MeanBank) * 180 / Math.PI, "deg", "crowned roads only");
            case "duty":
                vehicle.Duty = vehicle.Duty with { OneWayDeg = (vehicle.Type.Class == VehicleClass.Bus ? vehicle.Depot.RoadSide : sign) * random.Between(0.09, 0.14) };
                return new(kind, vehicle.Duty.OneWayDeg, "deg", "turns mostly one way");
            case "drag":
                vehicle.DragN[sign > 0 ? 0 : 1] = light ? random.Between(60, 160) : random.Between(250, 600);
                return new(kind, sign * vehicle.DragN.Max(), "N", "front brake");
            case "swapped_records":
                vehicle.RecordsSwapped = true;
                return new(kind, 2, "surveys", "left and right written the wrong way round");
            case "conicity":
                return new(kind, sign * (light ? random.Between(75, 120) : 250), "N", "each front tyre, to the vehicle's left where positive");
            case "torque_zero":
                vehicle.Sensors = vehicle.Sensors with { TorqueZeroNm = sign * random.Between(0.3, 0.5) };
                return new(kind, vehicle.Sensors.TorqueZeroNm, "N·m", "zero of the torsion bar");
            default:
                return PlantOffCentre(vehicle, sign, random);
        }
    }

    private static LookAlike PlantOffCentre(FleetVehicle vehicle, double sign, RandomStream random)
    {
        if (random.Chance(0.5))
        {
            vehicle.Sensors = vehicle.Sensors with { AngleZeroDeg = sign * random.Between(4, 8) };
            return new("sensor_zero_or_front_toe_split", vehicle.Sensors.AngleZeroDeg, "deg", "zero of the angle sensor");
        }
        vehicle.Sound.Direction[0] = sign * random.Between(0.25, 0.5);
        return new("sensor_zero_or_front_toe_split", -vehicle.Type.SteeringRatio * vehicle.Sound.Direction[0], "deg", "front toe split, total in order");
    }
}
