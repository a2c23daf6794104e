using Microsoft.AspNetCore.Builder;
using Microsoft.AspNetCore.Routing;
using Microsoft.Extensions.DependencyInjection;
using Microsoft.Extensions.DependencyInjection.Extensions;
using WearWatch.Hosting;
using WearWatch.Storage;
using WearWatch.Storage.Facts;
using WearWatch.Storage.Streams;

namespace WearWatch.Ingest;

/// <summary>Puts the ingest service into a web application.</summary>
public static class IngestHost
{
    public static void AddIngest(this IServiceCollection services, Database database)
    {
        services.AddGrpc().AddServiceOptions<IngestService>(options =>
        {
            options.MaxReceiveMessageSize = Limits.MessageBytes;
            options.Interceptors.Add<StatusInterceptor>();
        });
        services.TryAddSingleton(TimeProvider.System);
        services.AddSingleton(new IngestFacts(database.Ingest));
        services.AddSingleton(new StreamStore(database.Ingest));
        services.AddSingleton(new ChunkWriter(database.Ingest));
        services.AddSingleton(new SetAsideReader(database.Ingest));
        services.AddSingleton(new FactFinder(database.Ingest));
        services.AddSingleton<RecordFacts>();
        services.AddSingleton<StreamSteering>();
        services.AddSingleton<SetAside>();
        services.AddSingleton<FindFact>();
    }

    public static void MapIngest(this IEndpointRouteBuilder routes) => routes.MapGrpcService<IngestService>();
}
