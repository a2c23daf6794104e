namespace WearWatch.Simulator;

/// <summary>Runs every vehicle and writes the import folder and the truth beside it.</summary>
public sealed class FolderWriter(Scenario scenario)
{
    private readonly List<Planted> _planted = [];

    public (Rows Rows, IReadOnlyList<VehicleHistory> Histories) Write(string folder, string truth)
    {
        var fleet = new FleetScenario(scenario);
        var technicians = Technician.Draw(scenario.Seed);
        var months = Months();
        var logged = Math.Max(1, fleet.Vehicles.Count(v => v.Sensors.Channels.Length > 0));
        var share = scenario.MaxSamples / logged;
        Directory.CreateDirectory(folder);
        var histories = fleet.Vehicles.Select(v => new VehicleHistory(v, scenario, fleet.Roads(v.Depot), technicians, months, share)).ToArray();
        Parallel.ForEach(histories, h => h.Run(folder));
        var rows = new Rows();
        DescribeDepots(rows);
        foreach (var history in histories) rows.Take(history.Rows);
        Couple(fleet.Vehicles, rows);
        PlantRefusals(histories, rows);
        rows.Write(folder);
        Truth.Write(truth, scenario, histories, technicians, _planted, rows.Count("tyres"));
        return (rows, histories);
    }

    /// <summary>What weather does to the wear of the whole fleet, month by month.</summary>
    private double[] Months()
    {
        var random = new RandomStream(scenario.Seed, 12);
        return [.. Enumerable.Range(0, 12).Select(m => 1 + 0.04 * Math.Cos((m - 7) * Math.PI / 6) + random.Within(0.03, 0.06))];
    }

    private void DescribeDepots(Rows rows)
    {
        var from = scenario.Start.AddDays(-400).ToString("yyyy-MM-dd");
        foreach (var d in Depot.All)
        {
            rows.Add("depots", $"dep-{d.Id}", d.Id, d.Name, d.RoadSide > 0 ? "right" : "left", d.Jurisdiction, d.TimeZone, d.Currency);
            foreach (var type in VehicleTypes.Mix.Select(m => m[0]).DistinctBy(t => t.Class))
            {
                var name = type.Class.ToString().ToLowerInvariant();
                rows.Add("prices", $"p-{d.Id}-job-{name}", d.Id, "alignment_job", name, Math.Round(type.JobPriceEur * d.PriceFactor), d.Currency, from);
            }
            rows.Add("prices", $"p-{d.Id}-fuel", d.Id, "fuel", null, d.FuelPrice, d.Currency, from);
            rows.Add("prices", $"p-{d.Id}-energy", d.Id, "energy", null, d.EnergyPrice, d.Currency, from);
            rows.Add("prices", $"p-{d.Id}-bay", d.Id, "bay_hour", null, Math.Round(92 * d.PriceFactor), d.Currency, from);
            rows.Add("settings", $"set-{d.Id}-truck", d.Id, from, "change_at_depth", "truck", 4.0);
            rows.Add("settings", $"set-{d.Id}-van", d.Id, from, "change_at_depth", "van", 2.5);
        }
        // Fuel went up in one depot half way through.
        var later = scenario.Start.AddDays(scenario.Days / 2).ToString("yyyy-MM-dd");
        rows.Add("prices", "p-INNAU-fuel-2", "INNAU", "fuel", null, Depot.All[1].FuelPrice, "EUR", later);
    }

    private void Couple(IReadOnlyList<FleetVehicle> vehicles, Rows rows)
    {
        var random = new RandomStream(scenario.Seed, 13);
        foreach (var depot in Depot.All)
        {
            var tractors = vehicles.Where(v => v.Depot == depot && v.Type.Name.Contains("tractor", StringComparison.Ordinal)).ToList();
            var trailers = vehicles.Where(v => v.Depot == depot && v.Type.IsTrailer).ToList();
            for (var i = 0; i < Math.Min(tractors.Count, trailers.Count); i++)
            {
                var change = random.Between(0.3, 0.7) * scenario.Days;
                rows.Add("couplings", $"c-{trailers[i].Id}-1", trailers[i].Id, tractors[i].Id, scenario.Time(0), scenario.Time(change));
                if (i % 2 == 0) rows.Add("couplings", $"c-{trailers[i].Id}-2", trailers[i].Id, tractors[i].Id, scenario.Time(change + 2), null);
            }
        }
    }

    /// <summary>What every real depot also sends: a vehicle nobody knows, a survey sent again under its id with other content.</summary>
    private void PlantRefusals(VehicleHistory[] histories, Rows rows)
    {
        var end = scenario.Days - 5.6;
        rows.Add("surveys", "s-V999-01", "V999", scenario.Time(end), "tech-2", "gauge-2", 0.1, "mm", null, 120345, "odometer", true);
        rows.Add("readings", "s-V999-01", "1L", 1, "6.2", null, null);
        _planted.Add(new("unknown_vehicle", "s-V999-01"));
        var again = histories[Math.Min(12, histories.Length - 1)].Vehicle;
        rows.Add("surveys", $"s-{again.Id}-01", again.Id, scenario.Time(end + 1), "tech-1", "gauge-1", 0.1, "mm", null, null, "none", true);
        _planted.Add(new("resent_other_content", $"s-{again.Id}-01"));
    }
}
