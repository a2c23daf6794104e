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
        var work = seeds.SelectMany(seed => Works(seed, root, options)).ToList();
        var done = 0;
        Exception? first = null;
        using var turns = new SemaphoreSlim(options.AtOnce);
        using var failure = CancellationTokenSource.CreateLinkedTokenSource(cancel);
        try
        {
            var fleets = await Task.WhenAll(work.Select(w => Task.Run(async () =>
            {
                await turns.WaitAsync(failure.Token);
                try
                {
                    var fleet = new Fleet(w.Seed, w.Folder, w.Flat, options, line => progress($"{line} ({Interlocked.Increment(ref done)} of {work.Count})"));
                    return (w.Flat, Cases: options.Again is null ? await fleet.Prove(failure.Token) : await fleet.Again(failure.Token));
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
            var twins = fleets.Where(f => f.Flat).SelectMany(f => f.Cases).ToDictionary(c => (c.Seed, c.Truth.VehicleId));
            return [.. fleets.Where(f => !f.Flat).SelectMany(f => f.Cases).Select(c => c with { OnFlatRoads = twins.GetValueOrDefault((c.Seed, c.Truth.VehicleId)) })];
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

    /// <summary>The fleet of a seed and, for steering, its twin on flat roads; of kept ones those that were made.</summary>
    private static IEnumerable<(ulong Seed, string Folder, bool Flat)> Works(ulong seed, string root, Options options)
    {
        var (folder, twin) = (Path.Combine(root, $"seed-{seed}"), Path.Combine(root, $"flat-{seed}"));
        yield return (seed, folder, false);
        if (options is { Part: "steering", Crown: true } && (options.Again is null || Directory.Exists(twin))) yield return (seed, twin, true);
    }

    public static void Remove(string root)
    {
        foreach (var elsewhere in Directory.GetDirectories(root).Select(Fleet.ServerElsewhere).OfType<string>())
            if (Directory.Exists(elsewhere)) Directory.Delete(elsewhere, recursive: true);
        Directory.Delete(root, recursive: true);
    }
}
