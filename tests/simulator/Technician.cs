namespace WearWatch.Simulator;

/// <summary>Who gauges, with what, and how far off on average. Technician bias 0.2 mm and repeat 0.15 mm (standard deviations, from memory).</summary>
/// <param name="BiasMm">Mean error of technician and gauge together, mm.</param>
/// <param name="In32nds">Whether the gauge reads in 1/32 inch.</param>
/// <param name="FeelsEdges">Also measures the step between the rib edges of each groove.</param>
public sealed record Technician(string Id, string Gauge, int Depot, double BiasMm, double RepeatMm, bool In32nds, bool FeelsEdges)
{
    public const double MmPer32nd = 0.79375;

    public static Technician[] Draw(ulong seed)
    {
        var random = new RandomStream(seed, 5);
        int[] depots = [0, 0, 0, 1, 1, 2, 2, 2];
        return [.. depots.Select((d, i) => new Technician(
            $"tech-{i + 1}", $"gauge-{i + 1}", d, random.Within(0.2, 0.45), random.Between(0.12, 0.18), i == 6, i is 1 or 5))];
    }
}
