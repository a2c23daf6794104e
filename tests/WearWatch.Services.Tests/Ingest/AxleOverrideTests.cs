using WearWatch.Contracts.V1;
using WearWatch.Storage.Facts;

namespace WearWatch.Services.Tests.Ingest;

/// <summary>What an operator knows better of an axle than the table of suspensions.</summary>
public sealed class AxleOverrideTests(PostgresFixture postgres) : IngestTest(postgres)
{
    [Fact]
    public async Task What_can_be_set_on_an_axle_and_its_levers_are_stored_and_absent_stays_unknown()
    {
        var vehicle = $"{Depot}-axles";
        await Store(Sample.Van(Depot, vehicle).With(f =>
        {
            f.Vehicle.Axles[0].CamberAdjustable = true;
            f.Vehicle.Axles[0].CasterAdjustable = false;
            f.Vehicle.Axles[0].ScrubRadiusMm = -8;
            f.Vehicle.Axles[0].TrailMm = 24;
            f.Vehicle.Axles[1].Suspension = Suspension.BeamCoil;
        }));
        var axles = (await new FactReader(Server.Database.Analysis).LoadVehicle(vehicle, null, default))!.Vehicle.Axles;
        Assert.Equal((null, true, false), (axles[0].ToeAdjustable, axles[0].CamberAdjustable, axles[0].CasterAdjustable));
        Assert.Equal((-8, 24), (axles[0].ScrubRadiusMm, axles[0].TrailMm));
        Assert.Equal(WearWatch.Diagnosis.Facts.Suspension.BeamCoil, axles[1].Suspension);
        Assert.Null(axles[1].ScrubRadiusMm);
    }
}
