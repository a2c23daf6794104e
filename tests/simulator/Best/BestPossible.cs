using System.Text.Json;

namespace WearWatch.Simulator.Best;

/// <summary>
/// The best verdict that the written data allow: the exact posterior of each vehicle under the law by which it was drawn,
/// told everything but its wheel angles. Driver, goods, route, month, pressures, conicity, brakes, sensor zeros, casting,
/// technicians' bias and blunders are known; readings have the noise they were drawn with.
/// </summary>
public static class BestPossible
{
    private static readonly JsonSerializerOptions s_json = new() { PropertyNamingPolicy = JsonNamingPolicy.SnakeCaseLower, WriteIndented = true };

    public static void Write(string path, Scenario scenario, IReadOnlyList<VehicleHistory> histories)
    {
        var verdicts = Of(scenario, histories);
        var rounded = verdicts.Select(v => v with
        {
            Probability = Math.Round(v.Probability, 5),
            Causes = [.. v.Causes.Select(c => c with { Probability = Math.Round(c.Probability, 4), Outside = Math.Round(c.Outside, 4), Value = Math.Round(c.Value, 4), Low = Math.Round(c.Low, 4), High = Math.Round(c.High, 4) })],
        });
        File.WriteAllText(path, JsonSerializer.Serialize(new { scenario.Seed, Vehicles = rounded }, s_json) + "\n");
    }

    public static IReadOnlyList<BestVerdict> Of(Scenario scenario, IReadOnlyList<VehicleHistory> histories)
    {
        var law = new FaultLaw(scenario);
        var verdicts = new BestVerdict[histories.Count];
        Parallel.For(0, histories.Count, i =>
            verdicts[i] = Posterior.Of(new VehicleModel(histories[i], scenario), law, new RandomStream(scenario.Seed, 203, histories[i].Vehicle.Index)));
        return verdicts;
    }
}
