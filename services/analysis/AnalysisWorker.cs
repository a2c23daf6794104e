using Microsoft.Extensions.Hosting;
using Microsoft.Extensions.Logging;
using Npgsql;
using WearWatch.Storage;
using WearWatch.Storage.Analysis;

namespace WearWatch.Analysis;

/// <summary>
/// Goes round: reduces new streams, makes a fleet snapshot when the facts have come to rest, diagnoses what is due.
/// Any number of workers may share a database.
/// </summary>
internal sealed partial class AnalysisWorker(StreamReducing reducing, FleetFitting fitting, FleetFitStore fits, Diagnosing diagnosing, ILogger<AnalysisWorker> log) : BackgroundService
{
    private static readonly TimeSpan s_idle = TimeSpan.FromMilliseconds(250);

    /// <summary>Facts that keep coming are fitted at the latest after this long.</summary>
    private static readonly TimeSpan s_longestWait = TimeSpan.FromMinutes(10);

    /// <summary>Facts are at rest when none came for this long.</summary>
    private static readonly TimeSpan s_rest = TimeSpan.FromSeconds(1);

    private string _mark = "";
    private long _markSince = Environment.TickCount64;

    protected override async Task ExecuteAsync(CancellationToken stoppingToken)
    {
        while (!stoppingToken.IsCancellationRequested)
        {
            try
            {
                var reduced = await reducing.Some(stoppingToken);
                if (reduced == 0) await FitWhenDue(stoppingToken);
                var diagnosed = await diagnosing.Some(stoppingToken);
                if (reduced + diagnosed == 0) await Task.Delay(s_idle, stoppingToken);
            }
            catch (OperationCanceledException) when (stoppingToken.IsCancellationRequested)
            {
                return;
            }
            catch (NpgsqlException away)
            {
                DatabaseAway(log, away);
                await Task.Delay(TimeSpan.FromSeconds(2), stoppingToken);
            }
            catch (Exception unexpected)
            {
                // The other services of this process go on serving; what could not be analysed stays due.
                RoundFailed(log, unexpected);
                await Task.Delay(TimeSpan.FromSeconds(10), stoppingToken);
            }
        }
    }

    private async Task FitWhenDue(CancellationToken cancel)
    {
        var mark = await fits.FactsMark(cancel);
        if (mark != _mark) (_mark, _markSince) = (mark, Environment.TickCount64);
        var latest = await fits.Latest(cancel);
        if (mark.StartsWith("0/", StringComparison.Ordinal) || latest is not null && latest.FactsMark == mark && latest.Method == Diagnosing.Method) return;
        var rests = Environment.TickCount64 - _markSince >= s_rest.TotalMilliseconds;
        if (!rests && (latest is null || DateTime.UtcNow - latest.MadeAt < s_longestWait)) return;
        await fits.Make(Diagnosing.Method, async () =>
        {
            var (snapshot, vehicles, runs) = await fitting.Make(null, cancel);
            return (snapshot.AsOf.ToString("yyyy-MM-dd", System.Globalization.CultureInfo.InvariantCulture), mark, vehicles, runs, FactJson.Write(snapshot));
        }, cancel);
    }

    [LoggerMessage(Level = LogLevel.Error, Message = "A round of the analysis failed; what is due stays due")]
    private static partial void RoundFailed(ILogger log, Exception unexpected);

    [LoggerMessage(Level = LogLevel.Warning, Message = "The database does not answer; trying again")]
    private static partial void DatabaseAway(ILogger log, Exception away);
}
