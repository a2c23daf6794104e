using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tests.Roads;

public class RoadErrorsTests
{
    private static IEnumerable<(double Exact, double Probed)> Errors(RoadFit exact, RoadFit probed)
    {
        static IEnumerable<Estimate?> All(RoadFit f) =>
        [
            .. f.Vehicles.SelectMany(v => new[] { v.SteeringPullNm, v.OffCentreDeg, v.BankReadingBias }),
            .. f.Gains.SelectMany(g => new[] { g.TorqueNmPerSine, g.AngleDegPerSine }),
            .. f.Crowns.Select(c => (Estimate?)c.Bank),
        ];
        return Pairs(All(exact), All(probed));
    }

    private static IEnumerable<(double Exact, double Probed)> CellErrors(RoadFit exact, RoadFit probed) =>
        Pairs(exact.Cells.Select(c => (Estimate?)c.Bank), probed.Cells.Select(c => (Estimate?)c.Bank));

    private static IEnumerable<(double Exact, double Probed)> Pairs(IEnumerable<Estimate?> exact, IEnumerable<Estimate?> probed) =>
        exact.Zip(probed).Where(x => x.First is not null).Select(x => (x.First!.Value.StandardError, x.Second!.Value.StandardError));

    /// <summary>Fleets on shared roads, of depots that few runs join, and of convoys on few cells, with and without every witness.</summary>
    public static TheoryData<int, int, int, bool> Fleets => new() { { 60, 150, 1, true }, { 60, 120, 4, true }, { 40, 12, 1, true }, { 50, 100, 1, false } };

    [Theory]
    [MemberData(nameof(Fleets))]
    public void Probed_errors_stay_within_ten_percent_of_dense_ones(int vehicles, int cells, int depots, bool acceleration)
    {
        var fleet = new RoadFleet(7) { Vehicles = vehicles, Cells = cells, Depots = depots, Acceleration = acceleration }.Drive();
        var runs = RoadRuns.Of(fleet.Runs);
        var (exact, probed) = (RoadModel.Fit(runs, fleet.Fleet), RoadModel.Fit(runs, fleet.Fleet, denseUpTo: 0));
        Assert.All(Errors(exact, probed), e => Assert.InRange(e.Probed / e.Exact, 0.9, 1.1));
        // What a cell's vehicles share beyond the slow direction is left out, so that its error is a little small where few runs join the depots.
        Assert.All(CellErrors(exact, probed), e => Assert.InRange(e.Probed / e.Exact, 0.9, 1.1));
    }

    [Fact]
    public void Small_groups_beside_a_large_one_keep_their_exact_errors()
    {
        var (large, small) = (new RoadFleet(3) { Vehicles = 40 }.Drive(), new RoadFleet(4) { Vehicles = 6, Apart = true }.Drive());
        var runs = large.Runs.Concat(small.Runs.Select(r => r with { VehicleId = "small " + r.VehicleId, RoadCell = "small " + r.RoadCell })).ToArray();
        var fleet = large.Fleet.Concat(small.Fleet.Select(v => v with { VehicleId = "small " + v.VehicleId })).ToArray();
        var errors = Errors(RoadModel.Fit(RoadRuns.Of(runs), fleet), RoadModel.Fit(RoadRuns.Of(runs), fleet, denseUpTo: 20)).ToArray();
        Assert.All(errors, e => Assert.InRange(e.Probed / e.Exact, 0.9, 1.1));
    }

    /// <summary>
    /// Parametric bootstrap (Efron 1979): worlds drawn anew from the model's own priors of vehicles and roads, each driven and fitted; the spread of what the
    /// estimates miss by is what the standard errors claim.
    /// </summary>
    [Fact]
    public void Standard_errors_match_a_bootstrap_on_a_small_graph()
    {
        // Mean bank of a network about the usual: the country's own departure and the network's.
        var level = Math.Sqrt(RoadPriors.CrownError * RoadPriors.CrownError + Math.Pow(RoadPriors.LevelError(10), 2));
        var (pull, angle, pullError, angleError) = (new List<double>(), new List<double>(), new List<double>(), new List<double>());
        for (var world = 0; world < 150; world++)
        {
            var fleet = new RoadFleet(1000 + world) { Vehicles = 10, Cells = 25, RunsPerTrip = 8, LevelSd = level, GainSd = RoadPriors.OwnGainSpread }.Drive();
            foreach (var v in RoadModel.Fit(fleet.Runs, fleet.Fleet).Vehicles)
            {
                pull.Add(v.SteeringPullNm!.Value.Value - fleet.Truth[v.VehicleId].Pull);
                angle.Add(v.OffCentreDeg!.Value.Value - fleet.Truth[v.VehicleId].OffCentre);
                pullError.Add(v.SteeringPullNm.Value.StandardError);
                angleError.Add(v.OffCentreDeg.Value.StandardError);
            }
        }
        static double Root(IEnumerable<double> values) => Math.Sqrt(values.Average(x => x * x));
        Assert.InRange(Root(pullError) / Root(pull), 0.85, 1.15);
        // The worlds all have the same gains, near the middle of their wide priors, so that the angle's errors, which allow for the gain's, are a little wide.
        Assert.InRange(Root(angleError) / Root(angle), 0.85, 1.2);
    }
}
