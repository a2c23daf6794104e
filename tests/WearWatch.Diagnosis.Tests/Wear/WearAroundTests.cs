using MathNet.Numerics.LinearAlgebra;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Wear;

/// <summary>What the places of a vehicle say of their wear before and after a date at which a fault may have begun.</summary>
public sealed class WearAroundTests
{
    [Fact]
    public void Wear_that_never_changed_is_as_likely_whatever_the_onset()
    {
        var fleet = new SmallFleet(7).Make(12);
        var wear = FleetWear.Fit([.. fleet.Select(v => v.Tread)], SmallFleet.AsOf);
        foreach (var place in fleet.SelectMany(v => VehicleWear.Estimate(v.Tread, wear, SmallFleet.AsOf).History!.Places))
        {
            var logs = place.ByOnset.Select(o => LogLikelihood(o.Rate, place.NormalRateMmPer1000Km)).ToArray();
            Assert.All(logs, log => Assert.Equal(logs[0], log, 1e-6 * Math.Abs(logs[0]) + 1e-6));
        }
    }

    [Fact]
    public void The_difference_of_two_sides_is_known_better_than_either_for_the_hand_was_the_same()
    {
        var fleet = new SmallFleet(11) { FaultyShare = 0, TechnicianSd = 0.3 }.Make(40);
        var wear = FleetWear.Fit([.. fleet.Select(v => v.Tread)], SmallFleet.AsOf);
        var scores = new List<double>();
        foreach (var vehicle in fleet)
        {
            var history = VehicleWear.Estimate(vehicle.Tread, wear, SmallFleet.AsOf).History!;
            var places = history.Places.Where(p => p.Position.Axle == 1).ToArray();
            var (mean, covariance) = Slopes(history, places);
            var contrast = mean[0] - mean[1] - (vehicle.Tyres[places[0].Position].RateMmPer1000Km - vehicle.Tyres[places[1].Position].RateMmPer1000Km);
            var variance = covariance[0, 0] + covariance[1, 1] - 2 * covariance[0, 1];
            Assert.True(variance < covariance[0, 0] + covariance[1, 1]);
            scores.Add(contrast / Math.Sqrt(variance));
        }
        Assert.InRange(Math.Sqrt(scores.Average(z => z * z)), 0.4, 1.3);
    }

    [Fact]
    public void A_rate_that_trebled_shows_before_and_after()
    {
        var vehicle = new SmallFleet(21) { FaultyShare = 0, NoiseSd = 0.08, StartsRecorded = false, Surveys = 9 }.Make(1)[0];
        var position = Position.Parse("1L");
        var rate = vehicle.Tyres[position].RateMmPer1000Km;
        // From the fifth survey, on 25 May, the left front tyre goes three times as fast, the same across its width.
        var faulty = Enumerable.Range(5, 4).Aggregate(vehicle.Tread, (tread, s) => SmallFleet.Change(tread, s, t => t.Position != position ? t
            : t with { Depths = [.. t.Depths.Select(d => d with { DepthMm = Math.Round(d.DepthMm - 2 * rate * (s - 4) * 4.5, 2) })] }));
        var history = VehicleWear.Estimate(faulty, FleetWear.Fit([faulty], SmallFleet.AsOf), SmallFleet.AsOf).History!;
        var place = history.At(position)!;
        var onset = Enumerable.Range(0, Onsets.DaysAgo.Count).MinBy(o => Math.Abs(Onsets.DaysAgo[o] - (SmallFleet.AsOf.DayNumber - new DateOnly(2026, 5, 25).DayNumber)));
        var (before, after) = Around(history, place, onset);
        Assert.InRange(before / rate, 0.5, 1.7);
        Assert.InRange(after / rate, 2.2, 4);
    }

    [Fact]
    public void Mirroring_the_vehicle_mirrors_its_places()
    {
        var tread = new SmallFleet(31).Make(4)[3].Tread;
        var wear = FleetWear.Fit([tread], SmallFleet.AsOf);
        var mirrored = SmallFleet.Mirror(tread);
        var (plain, turned) = (VehicleWear.Estimate(tread, wear, SmallFleet.AsOf).History!, VehicleWear.Estimate(mirrored, wear, SmallFleet.AsOf).History!);
        foreach (var place in plain.Places)
        {
            var twin = turned.At(place.Position.Mirrored)!;
            for (var o = 0; o < place.ByOnset.Count; o++)
            {
                Assert.Equal(place.ByOnset[o].Edge.H[1], twin.ByOnset[o].Edge.H[1], 1e-6 * (1 + Math.Abs(place.ByOnset[o].Edge.H[1])));
                Assert.Equal(place.ByOnset[o].Rate.H[1], twin.ByOnset[o].Rate.H[1], 1e-6 * (1 + Math.Abs(place.ByOnset[o].Rate.H[1])));
            }
        }
    }

    [Fact]
    public void Wear_from_before_an_adjustment_tells_nothing_of_the_angles_since()
    {
        var tread = new SmallFleet(41).Make(1)[0].Tread;
        var wear = FleetWear.Fit([tread], SmallFleet.AsOf);
        var after = VehicleWear.Estimate(tread with { AdjustedAt = tread.Surveys[^1].Survey.At.AddHours(1) }, wear, SmallFleet.AsOf).History!;
        Assert.All(after.Places, p => Assert.All(p.ByOnset, o => Assert.False(o.Rate.Tells)));
    }

    [Fact]
    public void The_wandering_of_a_slope_adds_what_integrating_its_covariance_gives()
    {
        var wander = new SlopeWander(0.02, 7);
        // ∫∫ s² exp(−|u−v|/m) du dv by the middle rule.
        double Integral(double x, double y)
        {
            const int steps = 400;
            double sum = 0;
            for (var i = 0; i < steps; i++)
                for (var j = 0; j < steps; j++) sum += Math.Exp(-Math.Abs(x * (i + 0.5) / steps - y * (j + 0.5) / steps) / 7);
            return 0.02 * 0.02 * sum * x * y / steps / steps;
        }
        foreach (var (x, y) in ((double, double)[])[(3, 3), (3, 20), (40, 12)]) Assert.Equal(Integral(x, y), wander.Covariance(x, y), 1e-3 * Integral(x, y));
    }

    /// <summary>Log likelihood of one slope throughout and no shared error.</summary>
    private static double LogLikelihood(SlopeEvidence e, double slope) =>
        slope * (e.H[0] + e.H[1]) - 0.5 * slope * slope * (e.K[0] + 2 * e.K[1] + e.K[e.Size + 1]);

    /// <summary>Slopes that have always held, of several places at once.</summary>
    private static (Vector<double> Mean, Matrix<double> Covariance) Slopes(VehicleWearHistory history, PlaceHistory[] places)
    {
        var n = places.Length;
        var (k, h) = (Matrix<double>.Build.Dense(n + history.Surveys, n + history.Surveys), Vector<double>.Build.Dense(n + history.Surveys));
        for (var s = 0; s < history.Surveys; s++)
            for (var t = 0; t < history.Surveys; t++) k[n + s, n + t] = history.SharedPrecision[s * history.Surveys + t];
        for (var i = 0; i < n; i++)
        {
            var e = places[i].ByOnset[0].Rate;
            k[i, i] += e.K[e.Size + 1];
            h[i] += e.H[1];
            for (var s = 0; s < history.Surveys; s++)
            {
                k[i, n + s] += e.K[e.Size + 2 + s];
                k[n + s, i] += e.K[e.Size + 2 + s];
                h[n + s] += e.H[2 + s];
                for (var t = 0; t < history.Surveys; t++) k[n + s, n + t] += e.K[(2 + s) * e.Size + 2 + t];
            }
        }
        var covariance = k.Inverse();
        return (covariance * h, covariance);
    }

    private static (double Before, double After) Around(VehicleWearHistory history, PlaceHistory place, int onset)
    {
        var e = place.ByOnset[onset].Rate;
        var k = Matrix<double>.Build.Dense(e.Size, e.Size, (i, j) => e.K[i * e.Size + j] + (i >= 2 && j >= 2 ? history.SharedPrecision[(i - 2) * history.Surveys + j - 2] : 0));
        var mean = k.Solve(Vector<double>.Build.DenseOfArray(e.H));
        return (mean[0], mean[1]);
    }
}
