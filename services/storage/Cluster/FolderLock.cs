namespace WearWatch.Storage.Cluster;

/// <summary>A file held open alone: one process at a time works on a folder. The system lets go of it when a process dies.</summary>
internal static class FolderLock
{
    public static async Task<FileStream> Take(string path, CancellationToken cancel)
    {
        for (var attempt = 0; ; attempt++)
        {
            try
            {
                return new FileStream(path, FileMode.OpenOrCreate, FileAccess.ReadWrite, FileShare.None);
            }
            catch (IOException) when (attempt < 600)
            {
                await Task.Delay(200, cancel);
            }
        }
    }
}
