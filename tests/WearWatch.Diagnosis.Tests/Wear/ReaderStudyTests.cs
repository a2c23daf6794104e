using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tests.Statistics;
using WearWatch.Diagnosis.Tread;
using WearWatch.Diagnosis.Wear;
using Xunit.Abstractions;

namespace WearWatch.Diagnosis.Tests.Wear;

public class ReaderStudyTests(ITestOutputHelper output)
{
    [Fact]
    public void Penicillin_samples_come_out_as_from_the_mixed_model()
    {
        // Davies and Goldsmith 1972: 24 plates crossed with 6 samples. A plate stands for a tyre that does not wear, a sample for a
        // technician; with the same variances the effects are those of the crossed model (checked against R 4.2.2 in MixedModelTests).
        var d = ReferenceData.Read("penicillin.csv");
        var one = Enumerable.Repeat(1.0, 144).ToArray();
        int[] Level(double[] of) => [.. of.Select(v => (int)(v - of.Min()))];
        var (plates, samples) = (Level(d["plate"]), Level(d["sample"]));
        var model = MixedModel.Fit(d["diameter"], [one], [new(plates, 24, [one]), new(samples, 6, [one])]);
        var error = Math.Sqrt(model.ResidualVariance - FittingLines.WanderSdMm * FittingLines.WanderSdMm);
        FleetTyre[] tyres = [.. Enumerable.Range(0, 24).Select(p => Tyre(p, [.. Enumerable.Range(0, 144).Where(i => plates[i] == p).Select((i, k) => (100.0 * k, d["diameter"][i], samples[i]))], error))];
        string[] names = [.. Enumerable.Range(0, 6).Select(s => $"sample {s}")];
        var (technicians, _) = ReaderBiases.Fit([tyres], _ => new(0, 1e-7), 1, names, [], new(Math.Sqrt(model.Covariances[1][0, 0]), GaugeNoise.GaugeSdMm));
        for (var s = 0; s < 6; s++) Assert.Equal(model.Effects[1][s, 0].Value, technicians[s].BiasMm.Value - technicians.Average(t => t.BiasMm.Value), 0.05); // the model is not robust, the fit is
    }

    private static FleetTyre Tyre(int number, (double Km, double Mm, int Technician)[] readings, double sd)
    {
        LinePoint[] points = [.. readings.Select((r, i) => LinePoint.Of(new FittingPoint { Survey = i, Km = r.Km, Mean = new(r.Mm, sd) }, r.Technician, -1))];
        return new FleetTyre { Vehicle = number, Class = VehicleClass.Van, Role = AxleRole.Steer, Dual = Dual.Single, Fall = 1, Feather = null, FittedNew = false, Shaped = false, Kept = points };
    }

    [Fact]
    public void Bias_and_repeatability_of_technicians_and_gauges_are_told_apart()
    {
        double[] bias = [0.25, -0.2, 0.05, -0.1], gaugeBias = [0.12, -0.12, 0], sd = [0.08, 0.15, 0.15, 0.4];
        var study = FleetWear.Fit(Fleet(11, 60, bias, gaugeBias, sd), SmallFleet.AsOf).Readers;
        foreach (var row in study.Technicians.Concat(study.Gauges)) output.WriteLine($"{row}");
        for (var t = 0; t < 4; t++)
        {
            var row = study.Technicians[t];
            Assert.InRange(bias[t] - bias.Average(), row.BiasMm - 3 * row.BiasStandardError, row.BiasMm + 3 * row.BiasStandardError);
            Assert.True(row.BiasStandardError < 0.05);
            Assert.InRange(row.RepeatabilityMm, sd[t] - 0.05, sd[t] + 0.06);
            Assert.True(row.RepeatabilityLow < row.RepeatabilityMm && row.RepeatabilityMm < row.RepeatabilityHigh);
            Assert.True(row is { Readings: > 200, Surveys: > 50 });
        }
        for (var g = 0; g < 3; g++) Assert.Equal(gaugeBias[g], study.Gauges[g].BiasMm, 0.05);
        Assert.Equal(study.Technicians.Sum(t => t.Surveys), study.Gauges.Sum(g => g.Surveys));
    }

    [Fact]
    public void Nine_in_ten_intervals_of_the_repeatability_hold_the_truth()
    {
        double[] bias = [0.1, -0.1, 0.2, 0, -0.2, 0.05], sd = [0.1, 0.12, 0.15, 0.18, 0.22, 0.3];
        var (held, all) = (0, 0);
        for (var seed = 0; seed < 8; seed++)
        {
            var rows = FleetWear.Fit(Fleet(100 + seed, 12, bias, [0.0], sd), SmallFleet.AsOf).Readers.Technicians;
            held += rows.Where((r, t) => r.RepeatabilityLow <= sd[t] && sd[t] <= r.RepeatabilityHigh).Count();
            all += rows.Count;
        }
        output.WriteLine($"{held} of {all}");
        // 90 % of 48, less two and a half standard errors; readings of one walk are few, and the fleet's scatter pulls.
        Assert.True(held >= 0.78 * all, $"{held} of {all}");
    }

    [Fact]
    public void A_fleet_that_names_nobody_has_an_empty_study()
    {
        var fleet = new SmallFleet(5).Make(8).Select(v => v.Tread with { Surveys = [.. v.Tread.Surveys.Select(s => s with { Survey = s.Survey with { Technician = null } })] }).ToList();
        var study = FleetWear.Fit(fleet, SmallFleet.AsOf).Readers;
        Assert.Empty(study.Technicians);
        Assert.Empty(study.Gauges);
    }

    /// <summary>Sound vans with known hands: reading by reading a technician with his bias and his repeatability, a gauge with its bias.</summary>
    private static List<VehicleTread> Fleet(int seed, int vehicles, double[] bias, double[] gaugeBias, double[] sd)
    {
        var random = new Random(seed);
        double Normal() => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());
        return [.. new SmallFleet(seed) { FaultyShare = 0, Surveys = 8 }.Make(vehicles).Select(v => v.Tread with
        {
            Surveys = [.. v.Tread.Surveys.Select(s =>
            {
                var (t, g) = (random.Next(bias.Length), random.Next(gaugeBias.Length));
                return s with { Survey = s.Survey with
                {
                    Technician = $"t{t}",
                    Gauge = $"g{g}",
                    Tyres = [.. v.Tyres.Select(tyre => new TyreReadings
                    {
                        Position = tyre.Key,
                        Depths = [.. Enumerable.Range(1, 4).Select(k => new GrooveDepth(k, Math.Round(tyre.Value.Depth(s.Survey.DistanceKm!.Value, k, 4) + bias[t] + gaugeBias[g] + sd[t] * Normal(), 1)))],
                    })],
                } };
            })],
        })];
    }
}
