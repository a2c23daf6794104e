using Xunit.Abstractions;

namespace WearWatch.Diagnosis.Tests.Causes;

/// <summary>Simulation-based calibration: on vehicles drawn from its own prior and equations, a probability must mean what it says.</summary>
public sealed class CauseCalibrationTests(ITestOutputHelper output)
{
    private const int Vehicles = 300;

    private sealed record Outcome(double Probability, bool Misaligned, bool FirstRight, bool? Covered);

    [Fact]
    public void Probabilities_match_frequencies_and_rank_the_misaligned_first()
    {
        var draws = new OwnDraws(20261201);
        string[] kinds = ["van", "van", "truck", "trailer", "bus"];
        var outcomes = Enumerable.Range(0, Vehicles).Select(i => draws.Next(CauseEstimateTests.Named(kinds[i % kinds.Length]), torque: i % 2 == 0, depths: i % 4 != 3))
            .ToArray().AsParallel().AsOrdered().Select(Judge).ToArray();
        Report(outcomes);

        // Bins of equal count: observed share within three standard errors and 0.06 of the stated one.
        foreach (var bin in outcomes.OrderBy(o => o.Probability).Chunk(Vehicles / 5))
        {
            var stated = bin.Average(o => o.Probability);
            var error = Math.Sqrt(Math.Max(stated * (1 - stated), 0.02) / bin.Length);
            Assert.InRange(bin.Average(o => o.Misaligned ? 1.0 : 0), stated - 3 * error - 0.06, stated + 3 * error + 0.06);
        }
        Assert.True(Auc(outcomes) > 0.62);
        Assert.InRange(outcomes.Where(o => o.Covered is not null).Average(o => o.Covered!.Value ? 1.0 : 0), 0.75, 1);
        Assert.True(outcomes.Where(o => o.Misaligned && o.Probability >= 0.5).Average(o => o.FirstRight ? 1.0 : 0) > 0.6);
    }

    private static Outcome Judge(OwnDraws.Drawn drawn)
    {
        var verdict = drawn.Figures.Judge();
        if (drawn.Angle is not { } angle) return new(verdict.MisalignedProbability, false, false, null);
        var cause = verdict.Causes.Single(c => c.Quantity == angle.Quantity && c.Axle == angle.Axle && c.Side == angle.Side);
        var truth = angle.Target + drawn.Magnitude;
        return new(verdict.MisalignedProbability, true, verdict.First() == cause, truth >= cause.Value.Low && truth <= cause.Value.High);
    }

    private static double Auc(IReadOnlyCollection<Outcome> outcomes)
    {
        double wins = 0;
        var (ill, well) = (outcomes.Where(o => o.Misaligned).ToArray(), outcomes.Where(o => !o.Misaligned).ToArray());
        foreach (var a in ill)
            foreach (var b in well)
                wins += a.Probability > b.Probability ? 1 : a.Probability == b.Probability ? 0.5 : 0;
        return wins / ill.Length / well.Length;
    }

    private void Report(Outcome[] outcomes)
    {
        output.WriteLine($"AUC {Auc(outcomes):0.000}, misaligned {outcomes.Count(o => o.Misaligned)} of {outcomes.Length}, stated {outcomes.Sum(o => o.Probability):0.0}");
        foreach (var bin in outcomes.OrderBy(o => o.Probability).Chunk(outcomes.Length / 10))
            output.WriteLine($"stated {bin.Average(o => o.Probability):0.000} observed {bin.Average(o => o.Misaligned ? 1.0 : 0):0.000}");
        output.WriteLine($"covered {outcomes.Where(o => o.Covered is not null).Average(o => o.Covered!.Value ? 1.0 : 0):0.000}");
        output.WriteLine($"first cause right, p ≥ 0.5: {outcomes.Where(o => o.Misaligned && o.Probability >= 0.5).Average(o => o.FirstRight ? 1.0 : 0):0.000}");
    }
}
