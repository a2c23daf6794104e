using System.Globalization;

namespace WearWatch.Proving;

/// <summary>The command line.</summary>
internal sealed record Options
{
    public const string Usage = "prove verdict|tread|steering [--seeds N=10] [--first SEED=101] [--vehicles N=100] [--max-samples N=3000000] [--at-once N=2] [--no-best] [--steering-only] [--no-crown] [--json] [--keep DIR] | prove ... --again DIR [--stored] [--json]";

    public static readonly string[] Parts = ["verdict", "tread", "steering"];

    public required string Part { get; init; }
    public int Seeds { get; init; } = 10;
    public ulong First { get; init; } = 101;
    public int Vehicles { get; init; } = 100;
    public long MaxSamples { get; init; } = 3_000_000;
    /// <summary>Fleets worked on side by side.</summary>
    public int AtOnce { get; init; } = Math.Min(2, Environment.ProcessorCount);
    public bool Json { get; init; }
    /// <summary>For steering: simulate each fleet a second time on flat roads, which crown_removed needs.</summary>
    public bool Crown { get; init; } = true;
    /// <summary>For verdict: have the simulator work out the best possible on the same data (some 0.5 s of CPU a vehicle).</summary>
    public bool Best { get; init; } = true;
    /// <summary>Withhold every tread survey, and judge the vehicles with steering signals.</summary>
    public bool SteeringOnly { get; init; }
    /// <summary>Folder in which databases and truths stay; a temporary one, removed at the end, where null.</summary>
    public string? Keep { get; init; }
    /// <summary>Folder kept earlier, to be analysed and scored anew.</summary>
    public string? Again { get; init; }
    /// <summary>With <see cref="Again"/>: score the diagnoses as they are stored, without analysing anew.</summary>
    public bool Stored { get; init; }
    /// <summary>The product's command and the simulator; beside this program where not given.</summary>
    public string Product { get; init; } = Path.Combine(AppContext.BaseDirectory, "wearwatch.dll");
    public string Simulator { get; init; } = Path.Combine(AppContext.BaseDirectory, "simulator.dll");

    /// <exception cref="ArgumentException">Something on the line is not understood; the message says what.</exception>
    public static Options Read(string[] args)
    {
        var options = new Options { Part = args.FirstOrDefault(a => !a.StartsWith('-')) ?? throw new ArgumentException("what is to be proved is missing") };
        if (args[0] != options.Part || !Parts.Contains(options.Part)) throw new ArgumentException($"the first word is one of {string.Join(", ", Parts)}");
        for (var i = 1; i < args.Length; i++)
        {
            if (args[i] == "--json")
            {
                options = options with { Json = true };
                continue;
            }
            if (args[i] == "--stored")
            {
                options = options with { Stored = true };
                continue;
            }
            if (args[i] == "--no-crown")
            {
                options = options with { Crown = false };
                continue;
            }
            if (args[i] == "--no-best")
            {
                options = options with { Best = false };
                continue;
            }
            if (args[i] == "--steering-only")
            {
                options = options with { SteeringOnly = true };
                continue;
            }
            var (name, value) = args[i].Split('=', 2) is [var n, var v] ? (n, v) : (args[i], i + 1 < args.Length ? args[++i] : throw new ArgumentException($"{args[i]} lacks its value"));
            options = name switch
            {
                "--seeds" => options with { Seeds = (int)Whole(name, value, 1, 1000) },
                "--first" => options with { First = (ulong)Whole(name, value, 0, long.MaxValue) },
                "--vehicles" => options with { Vehicles = (int)Whole(name, value, 4, 20_000) },
                "--max-samples" => options with { MaxSamples = Whole(name, value, 0, long.MaxValue) },
                "--at-once" => options with { AtOnce = (int)Whole(name, value, 1, 16) },
                "--keep" => options with { Keep = Path.GetFullPath(value) },
                "--again" => options with { Again = Path.GetFullPath(value) },
                "--product" => options with { Product = Path.GetFullPath(value) },
                "--simulator" => options with { Simulator = Path.GetFullPath(value) },
                _ => throw new ArgumentException($"{name} is not an option"),
            };
        }
        if (options is { Keep: not null, Again: not null }) throw new ArgumentException("--keep and --again exclude one another: what is scored again stays");
        if (options is { Stored: true, Again: null }) throw new ArgumentException("--stored goes with --again");
        if (options.Again is { } kept && !Directory.Exists(kept)) throw new ArgumentException($"--again: {kept} is not there");
        return options;
    }

    private static long Whole(string name, string value, long least, long most) =>
        long.TryParse(value, NumberStyles.None, CultureInfo.InvariantCulture, out var number) && number >= least && number <= most
            ? number : throw new ArgumentException($"{name}: a whole number from {least} to {most}");
}
