using CsCheck;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Diagnosis.Tests.Steering;

public class RoadCellTests
{
    [Fact]
    public void Opposite_directions_of_one_road_are_two_cells()
    {
        var (there, back) = (RoadCell.Of(50, 8, 100, 0), RoadCell.Of(50, 8, -100, 0));
        Assert.EndsWith(":0", there);
        Assert.EndsWith(":4", back);
    }

    [Fact]
    public void Standing_or_unknown_position_has_no_cell()
    {
        Assert.Null(RoadCell.Of(50, 8, 3, 3));
        Assert.Null(RoadCell.Of(double.NaN, 8, 100, 0));
        Assert.Null(RoadCell.Of((50, 8), (50, 8), (double.NaN, 8)));
    }

    // One degree of latitude is 111.2 km (mean earth radius 6371 km).
    [Fact]
    public void Squares_are_250_to_500_m_at_any_latitude() => Gen.Select(Gen.Double[-70, 70], Gen.Double[-179, 179]).Sample((latitude, longitude) =>
    {
        var metre = 1 / 111_195.0;
        var east = metre / Math.Cos(latitude * Math.PI / 180);
        Assert.NotEqual(RoadCell.Of(latitude, longitude, 100, 0), RoadCell.Of(latitude + 500 * metre, longitude, 100, 0));
        Assert.NotEqual(RoadCell.Of(latitude, longitude, 100, 0), RoadCell.Of(latitude, longitude + 500 * east, 100, 0));
        var columns = Enumerable.Range(0, 100).Select(i => RoadCell.Of(latitude, longitude + i * 25 * east, 100, 0)).Distinct().Count();
        Assert.InRange(columns, 2500 / 500, 2500 / 250);
    });
}
