using WearWatch.Simulator;
using WearWatch.Simulator.Best;

namespace WearWatch.Proving.Tests;

/// <summary>The best possible verdict: its model is the simulator's own history, and what it states comes true.</summary>
public sealed class BestPossibleTests
{
    private static readonly DateOnly s_end = new(2026, 11, 30);

    private static (Scenario Scenario, IReadOnlyList<VehicleHistory> Histories) Make(ulong seed, int vehicles, long samples)
    {
        var folder = Path.Combine(Path.GetTempPath(), $"wearwatch-best-{Guid.NewGuid():N}");
        try
        {
            Directory.CreateDirectory(folder);
            var scenario = new Scenario(seed, vehicles, 26, samples, s_end) { Best = true };
            return (scenario, new FolderWriter(scenario).Write(Path.Combine(folder, "import"), Path.Combine(folder, "truth.json")).Histories);
        }
        finally
        {
            Directory.Delete(folder, recursive: true);
        }
    }

    [Fact]
    public void At_the_true_angles_nothing_is_left_but_noise_of_the_stated_size()
    {
        var (scenario, histories) = Make(211, 32, 500_000);
        double sum = 0;
        var count = 0;
        foreach (var history in histories)
        {
            var model = new VehicleModel(history, scenario);
            var fault = history.Vehicle.AfterRepair is null ? history.Vehicle.Fault : null;
            model.Suppose(history.Vehicle.AfterRepair ?? history.Vehicle.Sound, fault?.Change, fault is null ? new(null, 0, 0) : new(fault.Mode, fault.StartDay, fault.FullDay));
            var errors = new double[model.Residuals];
            model.Errors(errors);
            // Angles of trips and readings in coarse steps have room; no vehicle may stand out upwards.
            var square = errors.Sum(e => e * e);
            Assert.True(square / errors.Length < 1 + 5 * Math.Sqrt(2.0 / errors.Length), $"{history.Vehicle.Id}: {square / errors.Length:0.00} a reading of {errors.Length}");
            (sum, count) = (sum + square, count + errors.Length);
        }
        Assert.InRange(sum / count, 0.6, 1.1);
    }

    /// <summary>
    /// The bounds are those of counting: the number of misaligned vehicles against the sum of their probabilities, whose variance is Σ p (1 − p), and
    /// the logarithmic score against what the same probabilities promise.
    /// </summary>
    [Fact]
    public void What_it_states_comes_true_as_often_as_it_says()
    {
        var stated = new List<(double P, bool Misaligned)>();
        foreach (var seed in (ulong[])[212, 213])
        {
            var (scenario, histories) = Make(seed, 48, 0); // the gauge alone, which is the harder half
            foreach (var (verdict, history) in BestPossible.Of(scenario, histories).Zip(histories))
                stated.Add((verdict.Probability, history.Vehicle.GeometryAt(scenario.Days).Angles(history.Vehicle.Type).Any(a => a.Ratio > 1)));
        }
        Assert.All(stated, s => Assert.InRange(s.P, 0, 1));
        var sd = Math.Sqrt(stated.Sum(s => s.P * (1 - s.P)) + 0.25);
        Assert.InRange(stated.Count(s => s.Misaligned) - stated.Sum(s => s.P), -3.5 * sd, 3.5 * sd);
        static double Score(double p) => Math.Log(Math.Clamp(p, 1e-3, 1 - 1e-3));
        var promised = stated.Average(s => s.P * Score(s.P) + (1 - s.P) * Score(1 - s.P));
        var kept = stated.Average(s => s.Misaligned ? Score(s.P) : Score(1 - s.P));
        Assert.InRange(kept - promised, -0.12, 0.12);
        var auc = Scoring.Scores.Auc([.. stated.Select(s => (s.P, s.Misaligned))]);
        Assert.True(auc > 0.85, $"auc {auc:0.000}");
    }

    [Fact]
    public void Steps_and_slopes_of_distance_add_up()
    {
        var clock = new DistanceClock(-14, [.. Enumerable.Range(0, 42).Select(d => 10.0 + d)]);
        Span<double> weights = stackalloc double[5];
        foreach (var course in (FaultCourse[])[new(FaultMode.Drifting, -9.5, 17.25), new(FaultMode.Before, -7, 0), new(FaultMode.Sudden, 3.5, 0)])
        {
            var own = weights[..course.Nodes.Length];
            course.Between(clock, -12, 25.5, own);
            double total = 0, share = 0;
            for (var k = 0; k < own.Length; k++) (total, share) = (total + own[k], share + own[k] * course.Nodes[k]);
            Assert.Equal(clock.Distance(25.5) - clock.Distance(-12), total, 9);
            // The mean share by a fine sum over days; a struck day counts whole.
            double sum = 0;
            for (var day = -12.0; day < 25.5; day += 0.001)
                sum += (clock.Distance(Math.Min(25.5, day + 0.001)) - clock.Distance(day)) * course.Share(course.Mode == FaultMode.Sudden ? Math.Floor(day) + 0.5 : day + 0.0005);
            Assert.Equal(sum, share, 1);
        }
    }
}
