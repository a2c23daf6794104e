namespace WearWatch.Proving.Run;

/// <summary>Every fleet of a run, a few side by side.</summary>
internal static class Fleets
{
    public static async Task<IReadOnlyList<Case>> Run(Options options, Action<string> progress, CancellationToken cancel)
    {
        var root = options.Again ?? options.Keep ?? Path.Combine(Path.GetTempPath(), $"wearwatch-proving-{Guid.NewGuid():N}");
        var seeds = options.Again is null
            ? [.. Enumerable.Range(0, options.Seeds).Select(i => options.First + (ulong)i)]
            : Directory.GetDirectories(root).Select(Fleet.SeedOf).OfType<ulong>().Order().ToList();
        if (seeds.Count == 0) throw new InvalidOperationException($"{root} holds no fleets");
        Directory.CreateDirectory(root);
        var done = 0;
        using var turns = new SemaphoreSlim(options.AtOnce);
        Exception? first = null;
        using var failure = CancellationTokenSource.CreateLinkedTokenSource(cancel);
        try
        {
            var fleets = await Task.WhenAll(seeds.Select(seed => Task.Run(async () =>
            {
                await turns.WaitAsync(failure.Token);
                try
                {
                    var fleet = new Fleet(seed, Path.Combine(root, $"seed-{seed}"), options, line => progress($"{line} ({Interlocked.Increment(ref done)} of {seeds.Count})"));
                    return options.Again is null ? await fleet.Prove(failure.Token) : await fleet.Again(failure.Token);
                }
                catch (Exception failed)
                {
                    Interlocked.CompareExchange(ref first, failed, null);
                    await failure.CancelAsync();
                    throw;
                }
                finally
                {
                    turns.Release();
                }
            })));
            return [.. fleets.SelectMany(f => f)];
        }
        catch (OperationCanceledException) when (first is not (null or OperationCanceledException))
        {
            throw new InvalidOperationException(first.Message, first);
        }
        finally
        {
            if (options is { Keep: null, Again: null }) Remove(root);
        }
    }

    private static void Remove(string root)
    {
        foreach (var elsewhere in Directory.GetDirectories(root).Select(Fleet.ServerElsewhere).OfType<string>())
            if (Directory.Exists(elsewhere)) Directory.Delete(elsewhere, recursive: true);
        Directory.Delete(root, recursive: true);
    }
}
