using System.Text.Json;
using CsCheck;
using WearWatch.Diagnosis.Causes;
using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tests.Causes;

public class OutcomeCalibrationTests
{
    private static readonly DateTimeOffset Start = new(2026, 1, 5, 8, 0, 0, TimeSpan.Zero);

    private static double Sigma(double x) => 1 / (1 + Math.Exp(-x));

    private static ConfirmedOutcome Outcome(int i, string vehicleClass, SentBecause because, double stated, bool misaligned, double ratio = OutcomeLikelihood.Most) => new()
    {
        VehicleId = $"{vehicleClass}-{i}",
        VehicleClass = vehicleClass,
        At = Start.AddHours(i),
        SentBecause = because,
        StatedProbability = stated,
        LikelihoodRatio = misaligned ? ratio : 1 / ratio,
    };

    /// <summary>Vehicles of a class whose true log odds are shift + slope × stated log odds, sent as <paramref name="sent"/> says (stated, truth, random).</summary>
    private static List<ConfirmedOutcome> Fleet(int seed, int vehicles, string vehicleClass, SentBecause because, double shift, double slope, Func<double, bool, Random, bool>? sent = null, double ratio = OutcomeLikelihood.Most)
    {
        var random = new Random(seed);
        var outcomes = new List<ConfirmedOutcome>();
        for (var i = 0; i < vehicles; i++)
        {
            var logOdds = -1.5 + 1.5 * Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());
            var misaligned = random.NextDouble() < Sigma(shift + slope * logOdds);
            // A record errs as often as its likelihood ratio says.
            var said = random.NextDouble() < 1 / (1 + ratio) ? !misaligned : misaligned;
            if (sent?.Invoke(Sigma(logOdds), misaligned, random) ?? true) outcomes.Add(Outcome(i, vehicleClass, because, Sigma(logOdds), said, ratio));
        }
        return outcomes;
    }

    [Fact]
    public void Without_outcomes_a_probability_stays_as_stated()
    {
        foreach (var p in new[] { 0.001, 0.1, 0.37, 0.9, 0.999 })
        {
            Assert.Equal(p, OutcomeCalibration.None.Apply("Van", p), 12);
            Assert.Equal(p, OutcomeCalibration.Fit([]).Apply("no such class", p), 12);
        }
        Assert.InRange(OutcomeCalibration.None.Apply("Van", 0), double.Epsilon, 0.01);
        Assert.InRange(OutcomeCalibration.None.Apply("Van", 1), 0.99, 1 - 1e-12);
    }

    [Fact]
    public void Ranking_within_a_class_is_never_lost() =>
        (from records in (from p in Gen.Double[0, 1]
                          from k in Gen.Int[0, 3]
                          from because in Gen.Enum<SentBecause>()
                          from r in Gen.Int[0, 3]
                          let lr = new[] { 0.02, 0.1, 3.0, 50.0 }[r]
                          from i in Gen.Int[0, 30]
                          select Outcome(i, ((VehicleClass)k).ToString(), because, p, true) with { LikelihoodRatio = lr }).List[0, 60]
         from low in Gen.Double[0.001, 0.998]
         from gap in Gen.Double[0.001, 0.999]
         select (records, low, high: Math.Min(0.999, low + gap))).Sample(x =>
         {
             var fit = OutcomeCalibration.Fit(x.records);
             foreach (var c in new[] { "Car", "Van", "Truck", "Bus", "Trailer" })
             {
                 Assert.True(fit.Apply(c, x.low) <= fit.Apply(c, x.high));
                 Assert.InRange(fit.Apply(c, x.high), 1e-5, 1 - 1e-5);
             }
             Assert.All(fit.Classes, c => Assert.True(c.Slope > 0));
         }, iter: 60);

    [Theory]
    [InlineData(0.6, 0.8)] // middling ones stated too low
    [InlineData(-0.7, 0.7)] // too high and too sure
    [InlineData(0, 1.3)] // not sure enough
    public void A_known_distortion_is_recovered_from_routine_checks(double shift, double slope)
    {
        var fit = OutcomeCalibration.Fit(Fleet(201, 3000, "Van", SentBecause.Routine, shift, slope));
        foreach (var p in new[] { 0.05, 0.2, 0.5, 0.8 })
            Assert.Equal(Sigma(shift + slope * Math.Log(p / (1 - p))), fit.Apply("Van", p), 0.05);
    }

    [Fact]
    public void What_the_list_itself_sent_is_unbiased_given_what_it_stated()
    {
        // Only the likely ones are sent: given the stated probability the choice tells nothing more.
        var listed = OutcomeCalibration.Fit(Fleet(202, 6000, "Van", SentBecause.Listed, 0, 1, (stated, _, _) => stated > 0.4));
        foreach (var p in new[] { 0.1, 0.5, 0.8 }) Assert.Equal(p, listed.Apply("Van", p), 0.06);
    }

    [Fact]
    public void Suspects_alone_do_not_bias()
    {
        // Drivers notice eight in ten misaligned vehicles and one in ten sound ones, whatever was stated: odds eight times as high.
        var suspects = Fleet(203, 4000, "Van", SentBecause.Suspected, 0, 1, (_, misaligned, random) => random.NextDouble() < (misaligned ? 0.8 : 0.1));
        var fit = OutcomeCalibration.Fit(suspects);
        foreach (var p in new[] { 0.05, 0.2, 0.5, 0.8 }) Assert.Equal(p, fit.Apply("Van", p), 0.04);
        Assert.Equal(Math.Log(8), fit.SentShift[SentBecause.Suspected], 0.35);
        // The same records taken for routine ones would have raised every probability.
        Assert.True(OutcomeCalibration.Fit([.. suspects.Select(o => o with { SentBecause = SentBecause.Routine })]).Apply("Van", 0.2) > 0.4);
    }

    [Fact]
    public void Suspects_beside_routine_checks_leave_the_calibration_to_the_routine_ones()
    {
        var routine = Fleet(204, 1500, "Bus", SentBecause.Routine, 0.5, 0.8);
        var suspects = Fleet(205, 3000, "Bus", SentBecause.Suspected, 0.5, 0.8, (_, misaligned, random) => random.NextDouble() < (misaligned ? 0.9 : 0.1));
        var (alone, beside) = (OutcomeCalibration.Fit(routine), OutcomeCalibration.Fit([.. routine, .. suspects]));
        foreach (var p in new[] { 0.1, 0.3, 0.7 }) Assert.Equal(alone.Apply("Bus", p), beside.Apply("Bus", p), 0.06);
    }

    [Fact]
    public void Records_that_err_do_not_flatten_the_calibration()
    {
        // One bare record in five is wrong: taken at its word it would halve the slope.
        var fit = OutcomeCalibration.Fit(Fleet(206, 6000, "Van", SentBecause.Routine, 0, 1, ratio: 4));
        foreach (var p in new[] { 0.05, 0.2, 0.5, 0.8 }) Assert.Equal(p, fit.Apply("Van", p), 0.06);
    }

    [Fact]
    public void A_class_without_outcomes_takes_the_fleets_and_few_outcomes_move_little()
    {
        var fit = OutcomeCalibration.Fit([.. Fleet(207, 1500, "Van", SentBecause.Routine, 0.8, 1), .. Fleet(208, 1500, "Bus", SentBecause.Routine, 0.8, 1)]);
        Assert.InRange(fit.Apply("Truck", 0.2), 0.23, fit.Apply("Van", 0.2));
        var few = OutcomeCalibration.Fit([Outcome(1, "Van", SentBecause.Routine, 0.1, true), Outcome(2, "Van", SentBecause.Routine, 0.2, true)]);
        Assert.InRange(few.Apply("Van", 0.2), 0.2, 0.33);
    }

    [Fact]
    public void The_order_of_the_outcomes_does_not_matter_and_a_stored_fit_answers_alike()
    {
        var outcomes = Fleet(209, 200, "Van", SentBecause.Routine, 0.4, 0.8).Concat(Fleet(210, 100, "Bus", SentBecause.Suspected, 0, 1)).ToList();
        var random = new Random(1);
        var fit = OutcomeCalibration.Fit(outcomes);
        var stored = JsonSerializer.Serialize(fit);
        Assert.Equal(stored, JsonSerializer.Serialize(OutcomeCalibration.Fit([.. outcomes.OrderBy(_ => random.Next()), outcomes[0]])));
        Assert.Equal(fit.Apply("Van", 0.3), JsonSerializer.Deserialize<OutcomeCalibration>(stored)!.Apply("Van", 0.3));
    }

    [Fact]
    public void After_a_repair_or_without_a_stated_probability_an_outcome_is_left_out()
    {
        var repaired = Outcome(1, "Van", SentBecause.AfterRepair, 0.9, false);
        var unstated = Outcome(2, "Van", SentBecause.Routine, 0.5, true) with { StatedProbability = null };
        var fit = OutcomeCalibration.Fit([repaired, unstated, Outcome(3, "Van", SentBecause.Routine, double.NaN, true)]);
        Assert.Equal((0, 3), (fit.Used, fit.LeftOut));
        Assert.Equal(0.3, fit.Apply("Van", 0.3), 12);
    }

    private static WorkshopRecord Record(WorkshopResult result, params MeasuredAngle[] angles) => new() { VehicleId = "V1", At = Start, Result = result, Angles = angles };

    [Fact]
    public void A_bare_result_counts_less_than_measured_angles_and_angles_in_order_less_than_all_of_them()
    {
        var van = CauseCases.Van().Vehicle;
        double Ratio(WorkshopRecord record) => OutcomeLikelihood.Ratio(van, record, []);
        static MeasuredAngle Angle(Quantity quantity, double before) => new() { Quantity = quantity, Axle = 1, BeforeDeg = before };

        Assert.Equal(0.1, Ratio(Record(WorkshopResult.InOrder)));
        Assert.InRange(Ratio(Record(WorkshopResult.Adjusted)), 1, 10);
        Assert.Equal(1, Ratio(Record(WorkshopResult.Unknown)));
        // Front total toe of a van: 0.15 ± 0.15.
        Assert.Equal(OutcomeLikelihood.Most, Ratio(Record(WorkshopResult.Adjusted, Angle(Quantity.FrontTotalToe, 0.60))));
        // In tolerance although adjusted: what was measured counts, but only for what was measured.
        var one = Ratio(Record(WorkshopResult.Adjusted, Angle(Quantity.FrontTotalToe, 0.15)));
        var three = Ratio(Record(WorkshopResult.Adjusted, Angle(Quantity.FrontTotalToe, 0.15), Angle(Quantity.RearTotalToe, 0.10), Angle(Quantity.Thrust, 0)));
        Assert.True(three < one && one < 1);
        // At the tolerance itself the record says nearly nothing.
        Assert.InRange(Ratio(Record(WorkshopResult.Adjusted, Angle(Quantity.FrontTotalToe, 0.30))), 1, 2);
    }

    [Fact]
    public void An_outcome_takes_the_stated_interval_of_the_very_angle()
    {
        var cause = new Cause(Quantity.Camber, 1, Side.Left, new Interval(1.0, 0.6, 1.4), true, 0.7);
        var record = Record(WorkshopResult.Adjusted,
            new MeasuredAngle { Quantity = Quantity.Camber, Axle = 1, Side = Side.Left, BeforeDeg = 1.2 },
            new MeasuredAngle { Quantity = Quantity.Camber, Axle = 1, Side = Side.Right, BeforeDeg = 0.1 });
        var outcome = ConfirmedOutcome.Of(CauseCases.Van().Vehicle, record, [], 0.7, [cause]);
        Assert.Equal(new AngleOutcome(Quantity.Camber, cause.Value, 1.2), Assert.Single(outcome.Angles));
        Assert.Equal(("Van", 0.7), (outcome.VehicleClass, outcome.StatedProbability));
    }

    private static OutcomeConformal Conformal(IEnumerable<(string Vehicle, double Score)> scores) =>
        OutcomeConformal.Of(scores.GroupBy(s => s.Vehicle).Select((g, i) => Outcome(i, "Van", SentBecause.Routine, 0.5, true) with
        {
            VehicleId = g.Key,
            Angles = [.. g.Select(s => new AngleOutcome(Quantity.Thrust, new(0, -1, 1), s.Score))],
        }));

    [Fact]
    public void Conformal_rank_of_ninety_nine_vehicles_is_the_ninetieth_and_of_nine_at_five_percent_none()
    {
        // Split conformal: the ⌈(n+1)(1−a)⌉-th score (Vovk 2005; Lei et al. 2018).
        Assert.Equal(90, Conformal(Enumerable.Range(1, 99).Select(i => ($"v{i:D2}", (double)i))).Factor(miss: 0.1));
        Assert.Null(Conformal(Enumerable.Range(1, 9).Select(i => ($"v{i}", (double)i))).Factor(miss: 0.05));
    }

    [Fact]
    public void A_vehicle_with_many_angles_counts_once_and_its_own_are_left_out_for_itself()
    {
        var scores = Enumerable.Range(1, 20).Select(i => ($"v{i:D2}", i / 10.0)).Concat(Enumerable.Repeat(("v20", 2.0), 200)).ToList();
        var fit = Conformal(scores);
        Assert.Equal(1.9, fit.Factor("nobody"));
        Assert.Equal(1.8, fit.Factor("v20")); // 0.9 × 20 = the 18th of the other 19
        var widened = fit.Apply("v20", new Interval(1, 0.5, 1.2));
        Assert.Equal(1 - 1.8 * 0.5, widened.Low, 9);
        Assert.Equal(1 + 1.8 * 0.2, widened.High, 9);
        Assert.Equal(new Interval(1, 0.5, 1.2), Conformal([]).Apply("v20", new Interval(1, 0.5, 1.2)));
    }

    [Fact]
    public void Nine_in_ten_intervals_of_new_vehicles_hold_although_readings_of_one_vehicle_go_together()
    {
        var random = new Random(211);
        double Normal() => Math.Sqrt(-2 * Math.Log(1 - random.NextDouble())) * Math.Cos(2 * Math.PI * random.NextDouble());
        IEnumerable<(string, double)> Vehicle(string id)
        {
            // Stated intervals are too narrow by 1.8; one error is shared by the vehicle's angles.
            var shared = Normal();
            return Enumerable.Range(0, random.Next(1, 6)).Select(_ => (id, (0.8 * shared + 0.6 * Normal()) * 1.8 / 1.645)).ToList();
        }
        var (held, all) = (0.0, 0);
        for (var fleet = 0; fleet < 60; fleet++)
        {
            var factor = Conformal(Enumerable.Range(0, 40).SelectMany(i => Vehicle($"v{i}"))).Factor()!.Value;
            for (var i = 0; i < 40; i++, all++)
            {
                var angles = Vehicle("new").ToList();
                held += angles.Count(a => Math.Abs(a.Item2) <= factor) / (double)angles.Count;
            }
        }
        Assert.InRange(held / all, 0.88, 0.94);
    }
}
