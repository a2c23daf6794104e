using System.Collections.Concurrent;
using Grpc.Net.Client;
using Microsoft.AspNetCore.Builder;
using Microsoft.AspNetCore.Hosting;
using Microsoft.AspNetCore.Hosting.Server;
using Microsoft.AspNetCore.Hosting.Server.Features;
using Microsoft.AspNetCore.Server.Kestrel.Core;
using Microsoft.Extensions.DependencyInjection;
using Microsoft.Extensions.Logging;
using WearWatch.Contracts.V1;
using WearWatch.Ingest;
using WearWatch.Storage;
using Client = WearWatch.Contracts.V1.IngestService.IngestServiceClient;

namespace WearWatch.Services.Tests;

/// <summary>The ingest service on a real port of the loopback, its log watched for unexpected errors.</summary>
public sealed class IngestServer : IAsyncDisposable
{
    private readonly WebApplication _app;
    private readonly GrpcChannel _channel;
    private readonly ErrorLog _errors;

    private IngestServer(WebApplication app, Database database, ErrorLog errors)
    {
        (_app, Database, _errors) = (app, database, errors);
        var address = app.Services.GetRequiredService<IServer>().Features.Get<IServerAddressesFeature>()!.Addresses.First();
        _channel = GrpcChannel.ForAddress(address, new GrpcChannelOptions { MaxSendMessageSize = null });
        Client = new Client(_channel);
    }

    public Client Client { get; }

    public Database Database { get; }

    public IReadOnlyCollection<string> UnexpectedErrors => _errors.Errors;

    public static async Task<IngestServer> Start(string connectionString)
    {
        var database = await Database.Open(connectionString);
        var errors = new ErrorLog();
        var builder = WebApplication.CreateSlimBuilder();
        builder.Logging.ClearProviders().AddProvider(errors);
        builder.WebHost.ConfigureKestrel(kestrel => kestrel.Listen(System.Net.IPAddress.Loopback, 0, listen => listen.Protocols = HttpProtocols.Http2));
        builder.Services.AddIngest(database);
        var app = builder.Build();
        app.MapIngest();
        await app.StartAsync();
        return new IngestServer(app, database, errors);
    }

    public async ValueTask DisposeAsync()
    {
        _channel.Dispose();
        await _app.StopAsync();
        await _app.DisposeAsync();
        await Database.DisposeAsync();
    }

    /// <summary>Errors the server logs: none is expected, whatever a client sends.</summary>
    private sealed class ErrorLog : ILoggerProvider
    {
        private readonly ConcurrentQueue<string> _errors = new();

        public IReadOnlyCollection<string> Errors => _errors;

        public ILogger CreateLogger(string categoryName) => new Watch(categoryName, _errors);

        public void Dispose()
        {
        }

        private sealed class Watch(string category, ConcurrentQueue<string> errors) : ILogger
        {
            public IDisposable? BeginScope<TState>(TState state) where TState : notnull => null;

            public bool IsEnabled(LogLevel logLevel) => logLevel >= LogLevel.Error;

            public void Log<TState>(LogLevel logLevel, EventId eventId, TState state, Exception? exception, Func<TState, Exception?, string> formatter)
            {
                if (logLevel >= LogLevel.Error) errors.Enqueue($"{category}: {formatter(state, exception)} {exception}");
            }
        }
    }
}

/// <summary>One test on one depot of its own; fails where the server logged an unexpected error.</summary>
[Collection(PostgresCollection.Name)]
public abstract class IngestTest(PostgresFixture postgres) : IAsyncLifetime
{
    protected IngestServer Server { get; private set; } = null!;

    protected Client Client => Server.Client;

    protected PostgresFixture Postgres => postgres;

    /// <summary>A depot of this test's own, known to the service.</summary>
    protected string Depot { get; } = $"D{Guid.NewGuid():N}"[..12];

    /// <summary>A two-axle van of this depot, known to the service.</summary>
    protected string Van => $"{Depot}-V1";

    public virtual async Task InitializeAsync()
    {
        Server = await IngestServer.Start(postgres.ConnectionString);
        await Store(Sample.Depot(Depot), Sample.Van(Depot, Van));
    }

    public async Task DisposeAsync()
    {
        await Server.DisposeAsync();
        Assert.Empty(Server.UnexpectedErrors);
    }

    protected async Task<IReadOnlyList<FactAnswer>> Record(params Fact[] facts) =>
        (await Client.RecordFactsAsync(new RecordFactsRequest { Facts = { facts } })).Answers;

    protected async Task<IReadOnlyList<FactAnswer>> Store(params Fact[] facts)
    {
        var answers = await Record(facts);
        Assert.All(answers, a => Assert.True(a.Outcome == Outcome.Stored, $"{a.Id}: {a.Outcome} {a.Remarks}"));
        return answers;
    }

    /// <summary>The fact is refused, and a remark with this code names this field.</summary>
    protected async Task Refused(Fact fact, string code, string field)
    {
        var answer = Assert.Single(await Record(fact));
        Assert.Equal(Outcome.Refused, answer.Outcome);
        Assert.Contains(answer.Remarks, r => r.Code == code && r.Field == field);
        Assert.Contains((await SetAside(Outcome.Refused)), item => item.Id == fact.Id && item.Remarks.Any(r => r.Code == code));
    }

    protected async Task<IReadOnlyList<SetAside>> SetAside(Outcome outcome) =>
        (await Client.ListSetAsideAsync(new ListSetAsideRequest { DepotId = Depot, Outcome = outcome, PageSize = 500 })).Items;
}
