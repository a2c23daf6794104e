using Google.Protobuf.WellKnownTypes;
using WearWatch.Contracts.V1;

namespace WearWatch.Services.Tests.Pipeline;

/// <summary>A depot with nothing in it, all services running on a database of its own: each test brings its own van and surveys.</summary>
public sealed class SmallDepot : IAsyncLifetime
{
    public const string Depot = "YARD";

    private readonly PostgresFixture _postgres = new();
    private readonly string _folder = Directory.CreateTempSubdirectory("wearwatch-depot-").FullName;

    internal Installation Installation { get; private set; } = null!;

    public async Task InitializeAsync()
    {
        await _postgres.InitializeAsync();
        Installation = await Installation.Start(_folder, new HostOptions { Database = await _postgres.NewDatabase() }, CancellationToken.None);
        await Record(Sample.Depot(Depot));
    }

    public async Task DisposeAsync()
    {
        await Installation.DisposeAsync();
        await _postgres.DisposeAsync();
        Directory.Delete(_folder, recursive: true);
    }

    public async Task<IReadOnlyList<FactAnswer>> Record(params Fact[] facts) => (await Installation.Ingest.RecordFactsAsync(new() { Facts = { facts } })).Answers;

    /// <summary>The vehicle as it is told once everything is analysed.</summary>
    public async Task<GetVehicleReportResponse> Report(string vehicle)
    {
        await Installation.Analysed((_, _) => { }, CancellationToken.None);
        return await Installation.Report.GetVehicleReportAsync(new() { VehicleId = vehicle });
    }

    /// <summary>A van with walks four weeks apart, 0.35 mm a month, its tyres all different.</summary>
    public async Task Van(string vehicle, int walks) =>
        await Record([Sample.Van(Depot, vehicle), .. Enumerable.Range(0, walks).Select(i => Walk(vehicle, i))]);

    public static Fact Walk(string vehicle, int month)
    {
        var survey = Sample.Survey(Depot, vehicle, $"{vehicle}-s{month}", Sample.Monday.AddDays(28 * month), 40_000 + 2_400 * month, 1);
        survey.Survey.Tyres.Clear();
        survey.Survey.Technician = "MK";
        foreach (var (position, depth) in new[] { ("1L", 8.0), ("1R", 6.4), ("2L", 7.2), ("2R", 5.6) })
            survey.Survey.Tyres.Add(Sample.Tyre(position, [.. new[] { 0.1, -0.1, 0.0, -0.2 }.Select(d => Math.Round(depth + d - 0.35 * month, 1))]));
        return survey;
    }

    public static Fact Answer(string id, string vehicle, string about, string answer) => Sample.Fact(Depot, id, f => f.Decision = new Decision
    {
        Kind = DecisionKind.Answered,
        VehicleId = vehicle,
        About = about,
        At = Sample.Monday.AddDays(200).ToTimestamp(),
        Answer = answer,
        Who = "MK",
    });
}
