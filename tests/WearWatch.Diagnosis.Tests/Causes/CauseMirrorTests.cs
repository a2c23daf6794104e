using CsCheck;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tests.Causes;

public sealed class CauseMirrorTests
{
    private static readonly Gen<double[]> Noise = Gen.Double[-1.0, 1.0].Array[40];

    [Theory]
    [InlineData("van")]
    [InlineData("bus")]
    [InlineData("truck")]
    [InlineData("trailer")]
    public void Mirroring_the_vehicle_mirrors_the_causes_and_keeps_the_probability(string kind) => Noise.Sample(noise =>
    {
        var figures = Figures(kind, noise);
        var (plain, mirrored) = (figures.Judge(), figures.Mirrored().Judge());
        Assert.Equal(plain.MisalignedProbability, mirrored.MisalignedProbability, 1e-9);
        foreach (var cause in plain.Causes)
        {
            var twin = mirrored.Causes.Single(c => c.Quantity == cause.Quantity && c.Axle == cause.Axle && c.Side == CauseCases.Other(cause.Side));
            Assert.Equal(cause.Probability, twin.Probability, 1e-9);
            var (value, low) = CauseCases.ChangesSign(cause.Quantity) ? (-twin.Value.Value, -twin.Value.High) : (twin.Value.Value, twin.Value.Low);
            Assert.Equal(cause.Value.Value, value, 1e-6);
            Assert.Equal(cause.Value.Low, low, 1e-6);
        }
    }, iter: 5);

    [Fact]
    public void Order_of_tyres_and_records_does_not_matter() => Noise.Sample(noise =>
    {
        var figures = Figures("van", noise);
        var shuffled = figures with { Tyres = [.. figures.Tyres.Reverse()], DriverReports = [.. figures.DriverReports.Reverse()] };
        Assert.Equal(figures.Judge().MisalignedProbability, shuffled.Judge().MisalignedProbability, 1e-12);
    }, iter: 5);

    [Fact]
    public void Probabilities_are_within_bounds_and_intervals_hold_their_value() => Noise.Sample(noise =>
    {
        var verdict = Figures("truck", noise).Judge();
        Assert.InRange(verdict.MisalignedProbability, 0, 1 + 1e-9);
        Assert.Equal(verdict.MisalignedProbability, verdict.Causes.Where(c => c.OutsideTolerance).Sum(c => c.Probability), 1e-6);
        Assert.All(verdict.Causes, c => Assert.InRange(c.Value.Value, c.Value.Low - 1e-9, c.Value.High + 1e-9));
    }, iter: 5);

    private static Diagnosis.Rules.VehicleFigures Figures(string kind, double[] noise)
    {
        var next = 0;
        double Draw(double scale) => scale * noise[next++ % noise.Length];
        var figures = CauseEstimateTests.Named(kind).WithTyres(p => CauseCases.Tyre(p, Draw(0.08), Draw(0.4)) with
        {
            FeatherMm = new Estimate(Draw(0.4), 0.1),
            PressureShare = new Estimate(Draw(0.1), 0.02),
            RubsCatchingOutward = Draw(1) > 0.3 ? 1 : 0,
        });
        if (kind != "trailer") figures = figures.WithSteering(Draw(0.8), Draw(6));
        return figures with
        {
            Route = new UsualRoute { VehicleId = "V1", LeftTurnShare = 0.5 + Draw(0.3) },
            DriverReports =
            [
                new() { VehicleId = "V1", At = new DateTimeOffset(2026, 11, 1, 0, 0, 0, TimeSpan.Zero), Symptom = Symptom.PullsRight },
                new() { VehicleId = "V1", At = new DateTimeOffset(2026, 11, 2, 0, 0, 0, TimeSpan.Zero), Symptom = Symptom.WheelNotStraight },
            ],
            WorkshopRecords =
            [
                new()
                {
                    VehicleId = "V1", At = new DateTimeOffset(2026, 3, 1, 0, 0, 0, TimeSpan.Zero), Result = WorkshopResult.InOrder,
                    Angles = [new() { Quantity = Quantity.Camber, Axle = 1, Side = Side.Left, AfterDeg = 0.4 + Draw(0.3) }],
                },
            ],
        };
    }
}
