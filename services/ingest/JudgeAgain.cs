using System.Security.Cryptography;
using System.Text;
using Google.Protobuf.WellKnownTypes;
using WearWatch.Contracts.V1;
using WearWatch.Storage.Facts;

namespace WearWatch.Ingest;

/// <summary>
/// A late record may explain what a survey was held for: surveys of the vehicle that wait are judged again by what is known
/// now, and those that fit are let through by a release of their own, which stays on record.
/// </summary>
internal static class JudgeAgain
{
    public static void Held(FactRow because, string vehicleId, FactBatch batch, DateTimeOffset now, Judgement judgement)
    {
        foreach (var (depot, survey) in batch.Context.HeldSurveys(vehicleId))
        {
            if (survey.FactId == because.Id) continue;
            var again = new Judgement(depot, null);
            SurveyJudge.Judge(survey.Body, batch.Context, again);
            if (again.Held || again.Refused) continue;
            batch.Store(ReadFact.Of(Release(because, depot, survey.FactId, now), now).Row, held: false, []);
            judgement.Tell("judged_again", "", $"Survey {survey.FactId}, which was held, fits with this record and was let through.");
        }
    }

    private static Fact Release(FactRow because, string depot, string survey, DateTimeOffset now) => new()
    {
        Id = $"again-{Convert.ToHexStringLower(SHA256.HashData(Encoding.UTF8.GetBytes($"{because.Depot}/{because.Id}/{survey}")))[..32]}",
        DepotId = depot,
        RecordedBy = "wearwatch",
        Withdrawal = new() { Kind = Contracts.V1.WithdrawalKind.Release, FactId = survey, At = Timestamp.FromDateTimeOffset(now), Reason = $"judged again after {because.Kind} {because.Id}: it fits" },
    };
}
