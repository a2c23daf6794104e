using Microsoft.AspNetCore.Builder;
using Microsoft.AspNetCore.Routing;
using Microsoft.Extensions.DependencyInjection;
using WearWatch.Hosting;
using WearWatch.Storage;
using WearWatch.Storage.Report;

namespace WearWatch.Report;

/// <summary>Start-up of the report service, alone or beside the others in one process.</summary>
public static class ReportHost
{
    public static void AddReport(this IServiceCollection services, Database database)
    {
        services.AddGrpc().AddServiceOptions<Report>(o => o.Interceptors.Add<StatusInterceptor>());
        services.AddSingleton(new WorklistStore(database.Report));
    }

    public static void MapReport(this IEndpointRouteBuilder endpoints) => endpoints.MapGrpcService<Report>();
}
