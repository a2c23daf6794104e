using System.Security.Cryptography;
using Google.Protobuf;
using Npgsql;
using WearWatch.Contracts.V1;
using WearWatch.Hosting;
using WearWatch.Storage.Facts;
using Remark = WearWatch.Contracts.V1.Remark;

namespace WearWatch.Ingest;

/// <summary>A batch of facts: each read, judged against what is known, stored or kept aside, and answered.</summary>
internal sealed class RecordFacts(IngestFacts facts, TimeProvider clock)
{
    private const int Attempts = 4;

    public async Task<RecordFactsResponse> Handle(RecordFactsRequest request, CancellationToken cancel)
    {
        Check(request);
        var items = request.Facts.Select(fact => ReadFact.Of(fact, clock.GetUtcNow())).ToList();
        for (var attempt = 1; ; attempt++)
        {
            try
            {
                return await Store(items, cancel);
            }
            catch (PostgresException error) when (attempt < Attempts && error.SqlState is PostgresErrorCodes.UniqueViolation
                or PostgresErrorCodes.DeadlockDetected or PostgresErrorCodes.SerializationFailure)
            {
                // Another sender stored the same id or vehicle in between: judge again by what is there now.
            }
        }
    }

    private static void Check(RecordFactsRequest request)
    {
        if (request.Facts.Count == 0) throw new RequestRefused(RefusedBecause.Invalid, "facts", "a batch holds at least one fact");
        if (request.Facts.Count > Limits.FactsPerCall) throw new RequestRefused(RefusedBecause.TooMuch, "facts", $"at most {Limits.FactsPerCall} facts in one call");
        for (var i = 0; i < request.Facts.Count; i++)
        {
            if (request.Facts[i].Id.Length == 0) throw new RequestRefused(RefusedBecause.Invalid, $"facts[{i}].id", "every fact needs an id, or its answer could not be told from the others");
        }
    }

    private async Task<RecordFactsResponse> Store(List<ReadFact> items, CancellationToken cancel)
    {
        await using var batch = await facts.Begin(ReadFact.Scope(items), cancel);
        var response = new RecordFactsResponse();
        foreach (var item in items) response.Answers.Add(Answer(item, batch, clock.GetUtcNow()));
        await batch.Commit(cancel);
        return response;
    }

    private static FactAnswer Answer(ReadFact item, FactBatch batch, DateTimeOffset now)
    {
        var known = batch.Context.Known(item.Key);
        if (known is not null && known.ContentHash.AsSpan().SequenceEqual(item.Row.ContentHash))
            return Answered(item, known.Held ? Outcome.Held : Outcome.Stored, known.Remarks, known: true);
        if (item.Refusals.Count > 0) return Refuse(item, batch, item.Refusals);
        if (known is not null)
            return Refuse(item, batch, [new("id_in_use", "id", $"{item.Row.Id} is stored with other content; both are kept. To correct it, send a new id that replaces it.")]);
        var judgement = new Judgement(item.Row.Depot, item.Row.Replaces);
        if (item.Row.Kind != FactKind.Depot && batch.Context.Depot(item.Row.Depot) is null)
            judgement.Refuse("unknown_depot", "depot_id", $"depot {item.Row.Depot} is not known; send its depot fact first");
        Correction(item, batch.Context, judgement);
        item.Body!.Judge?.Invoke(batch.Context, judgement);
        if (judgement.Refused) return Refuse(item, batch, judgement.Remarks);
        var row = item.Row with { Releases = judgement.Releases ?? item.Row.Releases };
        batch.Store(row, judgement.Held, judgement.Remarks);
        if (!judgement.Held && Explains(row, batch.Context) is { } vehicle) JudgeAgain.Held(row, vehicle, batch, now, judgement);
        return Answered(item, judgement.Held ? Outcome.Held : Outcome.Stored, judgement.Remarks);
    }

    /// <summary>The vehicle whose held surveys this fact may explain; null where it explains none.</summary>
    private static string? Explains(FactRow row, FactContext context) => row switch
    {
        { Kind: FactKind.Fitting } => row.VehicleId,
        { Kind: FactKind.Survey, Replaces: not null } => row.VehicleId,
        // What was let through is compared with from now on; whoever answered for one walk should not have to for the next.
        { Kind: FactKind.Decision, Releases: not null } => row.VehicleId,
        { Kind: FactKind.Withdrawal, Releases: { } let } => context.Known(row.Key(let))?.VehicleId,
        { Kind: FactKind.Withdrawal, Retracts: { } taken } when context.Known(row.Key(taken)) is { Kind: FactKind.Survey or FactKind.Fitting } fact => fact.VehicleId,
        _ => null,
    };

    private static void Correction(ReadFact item, FactContext context, Judgement judgement)
    {
        if (item.Row.Replaces is not { } replaced) return;
        if (replaced == item.Row.Id) judgement.Refuse("replaces_itself", "replaces", "a fact does not correct itself");
        else if (context.Known(new FactKey(item.Row.Depot, replaced)) is not { } earlier) judgement.Refuse("unknown_fact", "replaces", $"depot {item.Row.Depot} has no fact {replaced}");
        else if (earlier.Kind != item.Row.Kind) judgement.Refuse("other_kind", "replaces", $"{replaced} is a {earlier.Kind}, not a {item.Row.Kind}");
    }

    private static FactAnswer Refuse(ReadFact item, FactBatch batch, IReadOnlyList<Storage.Facts.Remark> remarks)
    {
        batch.SetAside(item.Row, remarks);
        return Answered(item, Outcome.Refused, remarks);
    }

    private static FactAnswer Answered(ReadFact item, Outcome outcome, IReadOnlyList<Storage.Facts.Remark> remarks, bool known = false) =>
        new() { Id = item.Sent.Id, Outcome = outcome, Known = known, Remarks = { remarks.Select(ToContract) } };

    public static Remark ToContract(Storage.Facts.Remark remark) =>
        new()
        {
            Code = remark.Code,
            Field = remark.Field,
            Message = remark.Message,
            Safety = remark.Safety,
            Choices = { (remark.Choices ?? []).Select(c => new Choice { Answer = c.Answer, Words = c.Words, Probability = c.Probability }) },
        };
}

/// <summary>A fact read by its converter, with what is wrong in itself.</summary>
internal sealed record ReadFact(Fact Sent, FactRow Row, FactBody? Body, IReadOnlyList<Storage.Facts.Remark> Refusals)
{
    public FactKey Key => new(Row.Depot, Row.Id);

    public static ReadFact Of(Fact sent, DateTimeOffset now)
    {
        var problems = new Problems(now);
        problems.Id(sent.Id, "id");
        problems.Id(sent.DepotId, "depot_id");
        problems.OptionalId(sent.Replaces, "replaces");
        problems.Text(sent.RecordedBy, "recorded_by");
        var body = Read(sent, problems, now);
        if (body is null) problems.Refuse("missing", "body", "the fact holds nothing this version knows");
        var row = new FactRow
        {
            Depot = Storable(sent.DepotId),
            Id = Storable(sent.Id),
            Kind = body?.Kind ?? "unknown",
            VehicleId = body?.VehicleId is { } vehicle ? Storable(vehicle) : null,
            TractorId = body?.TractorId,
            TyreId = body?.TyreId,
            At = body?.At ?? now,
            ContentHash = Hash(sent),
            Sent = sent.ToByteArray(),
            Body = body?.Record,
            Readings = body?.Readings ?? 0,
            Replaces = sent.Replaces.Length > 0 ? sent.Replaces : null,
            Retracts = body?.Retracts,
            Releases = body?.Releases,
            About = body?.About,
            RecordedBy = Storable(sent.RecordedBy),
        };
        return new ReadFact(sent, row, body, problems.Refusals);
    }

    private static FactBody? Read(Fact sent, Problems p, DateTimeOffset now) => sent.BodyCase switch
    {
        Fact.BodyOneofCase.Depot => Vehicles.Depot(sent.Depot, sent.DepotId, p),
        Fact.BodyOneofCase.Vehicle => Vehicles.Vehicle(sent.Vehicle, sent.DepotId, p),
        Fact.BodyOneofCase.Coupling => Vehicles.Coupling(sent.Coupling, p),
        Fact.BodyOneofCase.UsualRoute => Vehicles.UsualRoute(sent.UsualRoute, p),
        Fact.BodyOneofCase.Tyre => Fittings.Tyre(sent.Tyre, p),
        Fact.BodyOneofCase.Fitting => Fittings.Fitting(sent.Fitting, p),
        Fact.BodyOneofCase.Survey => Surveys.Survey(sent.Survey, p),
        Fact.BodyOneofCase.DriverReport => Workshop.DriverReport(sent.DriverReport, p),
        Fact.BodyOneofCase.WorkshopRecord => Workshop.Record(sent.WorkshopRecord, p),
        Fact.BodyOneofCase.Price => Decisions.Price(sent.Price, p),
        Fact.BodyOneofCase.DepthLimit => Decisions.DepthLimit(sent.DepthLimit, p),
        Fact.BodyOneofCase.Tolerance => Decisions.Tolerance(sent.Tolerance, p),
        Fact.BodyOneofCase.Setting => Decisions.Setting(sent.Setting, p),
        Fact.BodyOneofCase.Decision => Decisions.Decision(sent.Decision, p),
        Fact.BodyOneofCase.Withdrawal => Decisions.Withdrawal(sent.Withdrawal, p),
        Fact.BodyOneofCase.UnreadRow => UnreadRows.Row(sent.UnreadRow, p, now),
        _ => null,
    };

    /// <summary>The content without who entered it: two people entering the same row send the same fact.</summary>
    private static byte[] Hash(Fact sent)
    {
        if (sent.RecordedBy.Length == 0) return SHA256.HashData(sent.ToByteArray());
        var anonymous = sent.Clone();
        anonymous.RecordedBy = "";
        return SHA256.HashData(anonymous.ToByteArray());
    }

    /// <summary>A refused fact is kept under whatever was sent as its id, cut and cleaned so that a key can hold it.</summary>
    private static string Storable(string text) =>
        new(text.Take(Limits.IdLength).Select(c => char.IsControl(c) || char.IsSurrogate(c) ? '?' : c).ToArray());

    public static BatchScope Scope(IReadOnlyList<ReadFact> items)
    {
        var sound = items.Where(i => i.Refusals.Count == 0).Select(i => i.Row).ToList();
        string?[] Others(FactRow row) => [row.Id, row.Replaces, row.Retracts, row.Releases, row.About];
        return new BatchScope
        {
            Keys = sound.SelectMany(r => Others(r).OfType<string>().Select(id => new FactKey(r.Depot, id))).Concat(items.Select(i => i.Key)).Distinct().ToList(),
            Vehicles = sound.SelectMany(r => new[] { r.VehicleId, r.TractorId }).OfType<string>().Distinct().ToList(),
            Depots = sound.Select(r => r.Depot).Distinct().ToList(),
            Tyres = sound.Select(r => r.TyreId).OfType<string>().Distinct().ToList(),
            TouchesSettings = sound.Any(r => r.VehicleId is null && r.Kind != FactKind.Tyre || r.Kind == FactKind.Decision),
            // What is taken back may lie anywhere, and so may what it explained.
            Earliest = sound.Any(r => r.Retracts is not null || r.Releases is not null || r.About is not null) ? DateTimeOffset.MinValue
                : sound.Where(r => r.Kind is FactKind.Survey or FactKind.Fitting).Select(r => r.At).DefaultIfEmpty(DateTimeOffset.MaxValue).Min(),
        };
    }
}
