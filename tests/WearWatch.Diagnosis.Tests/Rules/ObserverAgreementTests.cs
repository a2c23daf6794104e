using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Rules;

public class ObserverAgreementTests
{
    // A. P. Dawid and A. M. Skene, Applied Statistics 28 (1979) 20: 45 patients; three readings of observer 1, one each of observers 2 to 5.
    private static readonly string[] Patients =
    [
        "1111111", "3334334", "1122122", "2223121", "2223222", "2223322", "1222111", "3333433", "2222223", "2322223", "4444444", "2223343", "1111111", "2223212", "1211111",
        "1112111", "1111111", "1111111", "2222221", "2221322", "2222222", "2222221", "2223222", "2212222", "1111111", "1111111", "2322222", "1111111", "1111111", "1121121",
        "1111111", "3333233", "1111111", "2222222", "2223232", "4334343", "2212232", "2323233", "3333432", "1111111", "1111111", "1212111", "2322222", "1211111", "2222222",
    ];

    private static List<Observation> Table() =>
        [.. Patients.SelectMany((p, i) => p.Select((said, k) => new Observation($"patient {i:D2}", $"observer {Math.Max(0, k - 2) + 1}", said - '1')))];

    [Fact]
    public void The_published_table_gives_its_published_estimates()
    {
        var fit = ObserverAgreement.Fit(Table(), 4)!;
        // Shares of the four categories, log likelihood without multinomial constants, and observer 1's rates: worked out from the same table and start.
        foreach (var (share, expected) in fit.Shares.Zip([0.3996, 0.4220, 0.1118, 0.0667])) Assert.Equal(expected, share, 5e-4);
        Assert.Equal(-192.891, fit.LogLikelihood, 5e-3);
        Assert.Equal(0.8895, fit.Errors["observer 1"][0][0], 5e-4);
        Assert.Equal(0.8764, fit.Errors["observer 1"][1][1], 5e-4);
        var best = Patients.Select((p, i) => Array.IndexOf(Best(fit, p), Best(fit, p).Max())).CountBy(c => c).OrderBy(c => c.Key).Select(c => c.Value);
        Assert.Equal([18, 19, 5, 3], best);

        static double[] Best(ObserverAgreement fit, string p) => fit.Of(p.Select((said, k) => ($"observer {Math.Max(0, k - 2) + 1}", said - '1')));
    }

    [Fact]
    public void The_order_of_the_observations_does_not_matter()
    {
        var random = new Random(1);
        var (a, b) = (ObserverAgreement.Fit(Table(), 4)!, ObserverAgreement.Fit([.. Table().OrderBy(_ => random.Next())], 4)!);
        Assert.Equal(a.LogLikelihood, b.LogLikelihood, 9);
        Assert.Equal(a.Shares, b.Shares);
    }

    private static readonly DateTimeOffset Day = new(2026, 10, 5, 9, 0, 0, TimeSpan.Zero);

    /// <summary>Vans whose steer tyres three hands rub in turn: two that are right nine times in ten, one that answers by chance.</summary>
    private static List<VehicleTread> Fleet(int vehicles)
    {
        var random = new Random(204);
        HandRub[] answers = [HandRub.CatchesOutward, HandRub.Neither, HandRub.CatchesInward];
        return [.. Enumerable.Range(0, vehicles).Select(i =>
        {
            var truth = random.NextDouble() < 0.6 ? 1 : random.Next(2) * 2;
            StoredSurvey Walk(string technician, double right, int day) => new($"{i}-{technician}", new TreadSurvey
            {
                VehicleId = $"van-{i}",
                At = Day.AddDays(day),
                Technician = technician,
                Tyres = [new TyreReadings { Position = Position.Parse("1L"), HandRub = answers[random.NextDouble() < right ? truth : random.Next(3)] }],
            });
            return new VehicleTread { Vehicle = Vehicles.Van($"van-{i}").Vehicle, Depot = Vehicles.RightHandDepot, Surveys = [Walk("A", 0.85, 0), Walk("B", 0.85, 10), Walk("C", 0, 20)] };
        })];
    }

    private static Estimate Rubbed(ObserverAgreement agreement, params (string Technician, HandRub Rub)[] rubs)
    {
        StoredSurvey[] surveys = [.. rubs.Select((r, i) => new StoredSurvey($"s{i}", new TreadSurvey { VehicleId = "v", At = Day, Technician = r.Technician, Tyres = [new TyreReadings { Position = Position.Parse("1L"), HandRub = r.Rub }] }))];
        var tyre = new TyreFigures
        {
            Position = Position.Parse("1L"),
            SurveyIds = [.. surveys.Select(s => s.SurveyId)],
            RubsCatchingOutward = rubs.Count(r => r.Rub == HandRub.CatchesOutward),
            RubsCatchingInward = rubs.Count(r => r.Rub == HandRub.CatchesInward),
            RubsCatchingNeither = rubs.Count(r => r.Rub == HandRub.Neither),
        };
        var tread = new VehicleTread { Vehicle = Vehicles.Van("v").Vehicle, Depot = Vehicles.RightHandDepot, Surveys = surveys };
        return FeatherReading.Of(Assert.Single(HandRubs.Weighed([tyre], tread, agreement)))!.Value;
    }

    [Fact]
    public void A_hand_that_answers_by_chance_counts_for_little_beside_one_that_is_mostly_right()
    {
        var agreement = HandRubs.Fit(Fleet(300))!;
        Assert.InRange(agreement.Errors["A"][0][0], 0.8, 1);
        Assert.InRange(agreement.Errors["C"][0][0], 0.2, 0.5);
        var (sure, vague) = (Rubbed(agreement, ("A", HandRub.CatchesOutward)), Rubbed(agreement, ("C", HandRub.CatchesOutward)));
        Assert.True(sure.Value > 0.3 && sure.Value / sure.StandardError > 1);
        Assert.True(vague.Value < 0.15 && vague.Value / vague.StandardError < 0.5);
        // Two good hands that contradict each other cancel.
        Assert.Equal(0, Rubbed(agreement, ("A", HandRub.CatchesOutward), ("B", HandRub.CatchesInward)).Value, 0.1);
        // One not seen before counts as the hands do on the whole.
        Assert.InRange(Rubbed(agreement, ("new", HandRub.CatchesOutward)).Value, vague.Value, sure.Value);
    }

    [Fact]
    public void Without_enough_tyres_rubbed_twice_all_hands_count_alike()
    {
        Assert.Null(HandRubs.Fit(Fleet(20)));
        Assert.Null(HandRubs.Fit([]));
        TyreFigures[] tyres = [new TyreFigures { Position = Position.Parse("1L"), RubsCatchingOutward = 2 }];
        Assert.Same(tyres, HandRubs.Weighed(tyres, Fleet(1)[0], null));
    }
}
