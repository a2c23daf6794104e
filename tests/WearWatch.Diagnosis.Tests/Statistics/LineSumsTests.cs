using CsCheck;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tests.Statistics;

public class LineSumsTests
{
    private static readonly Gen<(double X, double Y, double V)[]> s_readings = Gen.Select(Gen.Double[0, 2e5], Gen.Double[0, 20], Gen.Double[0.005, 0.5]).Array[1, 25];

    [Fact]
    public void Sums_give_what_reading_by_reading_gives() => s_readings.Sample(readings =>
    {
        var (intercept, slope, origin) = (new Estimate(9, 5), new Estimate(-5e-5, 5e-5), readings[0].X);
        var belief = new LineBelief(intercept, slope);
        var sums = new LineSums();
        double evidence = 0;
        foreach (var (x, y, v) in readings)
        {
            evidence += belief.Take(x - origin, y, v);
            sums.Add(x, y, v);
        }
        Assert.Equal(evidence, sums.Evidence(origin, intercept, slope), 1e-6 * (1 + Math.Abs(evidence)));
        var at = sums.At(origin, intercept, slope);
        Assert.Equal(belief.Intercept.Value, at.Value, 1e-7);
        Assert.Equal(belief.Intercept.StandardError, at.StandardError, 1e-7);
    });

    [Fact]
    public void What_was_added_can_be_taken_off_again() => s_readings.Sample(readings =>
    {
        var (all, one, rest) = (new LineSums(), new LineSums(), new LineSums());
        for (var i = 0; i < readings.Length; i++)
        {
            all.Add(readings[i].X, readings[i].Y, readings[i].V);
            if (i == 0) one.Add(readings[i].X, readings[i].Y, readings[i].V);
            else rest.Add(readings[i].X, readings[i].Y, readings[i].V);
        }
        var (intercept, slope) = (new Estimate(9, 5), new Estimate(-5e-5, 5e-5));
        Assert.Equal(rest.Evidence(1e5, intercept, slope), (all - one).Evidence(1e5, intercept, slope), 1e-5);
        Assert.Equal(rest.At(1e5, intercept, slope).Value, (all - one).At(1e5, intercept, slope).Value, 1e-6);
    });
}
