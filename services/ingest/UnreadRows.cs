using WearWatch.Storage.Facts;
using Contract = WearWatch.Contracts.V1;

namespace WearWatch.Ingest;

/// <summary>Rows of files that their sender could not read: refused with the sender's own reason, and kept.</summary>
internal static class UnreadRows
{
    public static FactBody Row(Contract.UnreadRow sent, Problems p, DateTimeOffset now)
    {
        p.Text(sent.Text, "unread_row.text");
        var where = sent.Line > 0 ? $"{sent.File} line {sent.Line}{(sent.Column.Length > 0 ? $", {sent.Column}" : "")}" : sent.File;
        p.Refuse("row_unread", "unread_row", $"{where}: {p.RequiredText(sent.Reason, "unread_row.reason")}");
        return new FactBody(FactKind.UnreadRow, sent, now);
    }
}
