using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Rules;

/// <summary>
/// One shoulder wears faster than the other beyond what is normal for the class and position. What the mate tyre does
/// tells toe and camber (mirrored), a steady side force (same vehicle side) and one wheel's fault apart.
/// </summary>
public static class OneEdgeWearRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        foreach (var axle in figures.Vehicle.Axles.OrderBy(a => a.Number))
        {
            // One finding an axle: of the outer and the inner pair the stronger speaks.
            var pair = WheelPair.Members(axle).Select(dual => WheelPair.Edge(figures, axle, dual)).MaxBy(p => p.Strength)!;
            var finding = pair.Pattern switch
            {
                PairPattern.Mirrored => Mirrored(figures, axle, pair),
                // The same vehicle side on an axle that keeps its direction is the axle's own skew: AxleSkewRule.
                PairPattern.SameVehicleSide when axle.Steered || figures.Vehicle.IsFront(axle.Number) => SideForceWear.Find(figures, axle, pair),
                PairPattern.OneWheel => OneWheelWear.Find(figures, axle, pair),
                _ => null,
            };
            if (finding is not null) yield return finding;
        }
    }

    private static Finding Mirrored(VehicleFigures figures, Axle axle, WheelPair pair)
    {
        var vehicle = figures.Vehicle;
        var shared = pair.Shared!.Value;
        var sign = Witnesses.SignOf(shared.Value);
        var feather = WheelPair.Feather(figures, axle, pair.Dual);
        var finAgrees = RuleLimits.Agrees(feather.Shared, sign) || (feather.Shared is null && RuleLimits.Agrees(feather.Worse, sign));
        var finContradicts = RuleLimits.Agrees(feather.Shared, -sign);
        var finClean = FeatherReading.Clean(pair.Left) && FeatherReading.Clean(pair.Right);
        var roll = sign > 0 && !finAgrees && !finContradicts ? Rolling(figures, axle) : [];
        var causes = MirroredCauses(figures, axle, pair.Dual, sign, finAgrees, finContradicts, finClean, roll.Count > 0);

        var (workshopFor, workshopAgainst) = Witnesses.Workshop(figures);
        var against = new List<Evidence>(workshopAgainst);
        if (finContradicts) against.AddRange(Witnesses.Wheels(vehicle, feather, Witnesses.FeatherOf, -sign, -sign));
        if (finClean) against.Add(new("The rib edges are clean on both tyres", [.. pair.Left!.SurveyIds, .. pair.Right!.SurveyIds]));

        var edge = sign > 0 ? "outboard" : "inboard";
        var points = roll.Count > 0 ? "; another axle shows the same, as a high body rolling in turns does" : !causes[0].IsAngle() ? "" : (causes[0], finAgrees) switch
        {
            (Quantity.Camber, _) => sign > 0 ? "; both agree on camber with the tops leaning out" : "; both agree on camber with the tops leaning in",
            (_, true) => sign > 0 ? "; their rib edges agree on toe-in" : "; their rib edges agree on toe-out",
            _ => sign > 0 ? "; both wheels agree on toe-in first, camber second" : "; both wheels agree on toe-out first, camber second",
        };
        return new Finding
        {
            Kind = FindingKind.OneEdgeWear,
            Axle = axle.Number,
            Dual = axle.Duals ? pair.Dual : null,
            Sentence = $"Both {TradeWords.Tyres(vehicle, axle.Number, pair.Dual)} wear their {edge} shoulders faster than normal "
                + $"({TradeWords.LeftRight(pair.LeftFigure * sign, pair.RightFigure * sign, 3, TradeWords.PerDistance)}; {TradeWords.Range(shared * sign, 3)}){points}.",
            EvidenceFor = [Witnesses.EdgeOf(vehicle, pair.Left!), Witnesses.EdgeOf(vehicle, pair.Right!),
                .. finAgrees ? Witnesses.Wheels(vehicle, feather, Witnesses.FeatherOf, sign, sign) : [], .. roll, .. workshopFor],
            EvidenceAgainst = against,
            Confounders = MirroredConfounders(figures, axle, sign),
            Causes = causes,
            FirstCheck = FirstCheck.For(causes[0] == Quantity.Camber ? CheckFor.WheelCamber : CheckFor.Toe, figures.Vehicle, axle),
            AlignmentMends = vehicle.Mends(axle, causes[0]),
            Caution = Cautions.Under(axle),
            Strength = pair.Strength,
        };
    }

    private static IReadOnlyList<Quantity> MirroredCauses(VehicleFigures figures, Axle axle, Dual dual, double sign, bool finAgrees, bool finContradicts, bool finClean, bool roll)
    {
        var toe = figures.Vehicle.ToeOf(axle.Number);
        // Inner duals worn inboard on both sides: the beam bends under load (trade practice).
        if (dual == Dual.Inner && sign < 0) return finAgrees ? [toe, Quantity.Camber, Quantity.Pressure] : [Quantity.Camber, Quantity.Pressure, Quantity.Crown];
        // The body of a bus or high van leans out in every turn and loads the outboard shoulders of all its axles alike.
        if (roll) return [Quantity.Duty, Quantity.Camber, toe, Quantity.Pressure];
        if (finContradicts) return [Quantity.Camber, toe, Quantity.Duty];
        // Rounded shoulders with no fin: cornering (1948 shop manual, pp. 212-213), outboard only.
        if (sign > 0 && finClean && figures.Vehicle.IsFront(axle.Number)) return [Quantity.Duty, Quantity.Pressure, Quantity.Camber, toe];
        return sign > 0 ? [toe, Quantity.Camber, Quantity.Duty] : [toe, Quantity.Camber];
    }

    /// <summary>Other axles of a high vehicle whose outboard shoulders wear on both sides too.</summary>
    private static List<Evidence> Rolling(VehicleFigures figures, Axle axle)
    {
        if (figures.Vehicle.Class is not (VehicleClass.Bus or VehicleClass.Van)) return [];
        return [.. from other in figures.Vehicle.Axles
                   where other.Number != axle.Number
                   orderby other.Number
                   let pair = WheelPair.Edge(figures, other, other.Duals ? Dual.Outer : Dual.Single)
                   where pair.Pattern == PairPattern.Mirrored && pair.Shared!.Value.Value > 0
                   from tyre in new[] { pair.Left!, pair.Right! }
                   select Witnesses.EdgeOf(figures.Vehicle, tyre)];
    }

    private static IReadOnlyList<Confounder> MirroredConfounders(VehicleFigures figures, Axle axle, double sign)
    {
        var list = new List<Confounder>();
        if (sign > 0 && figures.Vehicle.IsFront(axle.Number))
        {
            list.Add(new("Cornering and roundabouts round both outboard shoulders", "A clean fin inboard speaks for toe-in, an abraded edge without a fin for cornering; compare vehicles on the same route"));
            if (figures.Vehicle.Class is VehicleClass.Bus or VehicleClass.Van)
                list.Add(new("Body roll of a high vehicle loads the outboard shoulders", "The fin of the rib edges; the same wear on others of its class and route"));
        }
        var row = figures.Vehicle.Chassis(axle).Row;
        if (row.Beam)
            list.Add(new($"Camber of a beam axle changes with load, by about {TradeWords.Number(Math.Abs(row.LadenCamberDeg), 2)} deg from empty to laden", "Measure loaded as in service"));
        else if (row.CamberDegPerCm != 0)
            list.Add(OneWheelWear.CamberWithHeight(row.CamberDegPerCm));
        list.Add(new("Tyres turned on the rim change their shoulders over", "Ask whether both were turned; the fin turns with the tyre"));
        return list;
    }
}
