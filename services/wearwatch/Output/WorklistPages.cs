using WearWatch.Contracts.V1;

namespace WearWatch.Output;

/// <summary>All pages of a worklist put together.</summary>
internal sealed record WorklistPages(string AsOf, long Total, string Notice, IReadOnlyList<WorklistRow> Vehicles, IReadOnlyList<UnsafeTyre> BelowLimit, IReadOnlyList<GaugeFirstRow> GaugeFirst, IReadOnlyList<OtherMatter> OtherMatters)
{
    public static async Task<WorklistPages> Read(ReportService.ReportServiceClient report, string depot, WorklistSort sort, CancellationToken cancel)
    {
        var rows = new List<WorklistRow>();
        GetWorklistResponse? first = null;
        var token = "";
        do
        {
            var page = await report.GetWorklistAsync(
                new GetWorklistRequest { DepotId = depot, Sort = sort, PageSize = 500, PageToken = token },
                deadline: DateTime.UtcNow.AddMinutes(1), cancellationToken: cancel);
            first ??= page;
            rows.AddRange(page.Vehicles);
            token = page.NextPageToken;
        }
        while (token.Length > 0);
        return new(first.AsOf, first.Total, first.Notice, rows, first.BelowLimit, first.GaugeFirst, first.OtherMatters);
    }
}
