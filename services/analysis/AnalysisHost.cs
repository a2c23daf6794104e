using Microsoft.AspNetCore.Builder;
using Microsoft.AspNetCore.Routing;
using Microsoft.Extensions.DependencyInjection;
using Microsoft.Extensions.DependencyInjection.Extensions;
using WearWatch.Hosting;
using WearWatch.Storage;
using WearWatch.Storage.Analysis;
using WearWatch.Storage.Facts;
using WearWatch.Storage.Streams;

namespace WearWatch.Analysis;

/// <summary>Start-up of the analysis service: its queries, its worker and its RPCs.</summary>
public static class AnalysisHost
{
    public static void AddAnalysis(this IServiceCollection services, Database database)
    {
        services.AddGrpc().AddServiceOptions<Analysis>(o => o.Interceptors.Add<StatusInterceptor>());
        services.TryAddSingleton(TimeProvider.System);
        services.AddSingleton(new FactReader(database.Analysis));
        services.AddSingleton(new ChunkReader(database.Analysis));
        services.AddSingleton(new RunStore(database.Analysis));
        services.AddSingleton(new FleetFitStore(database.Analysis));
        services.AddSingleton(new DiagnosisStore(database.Analysis));
        services.AddSingleton<FleetFitting>();
        services.AddSingleton<StreamReducing>();
        services.AddSingleton<Diagnosing>();
        services.AddHostedService<AnalysisWorker>();
    }

    public static void MapAnalysis(this IEndpointRouteBuilder endpoints) => endpoints.MapGrpcService<Analysis>();
}
