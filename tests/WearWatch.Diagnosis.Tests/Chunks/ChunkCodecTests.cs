using CsCheck;
using WearWatch.Diagnosis.Steering;
using WearWatch.Diagnosis.Tests.Steering;
using WearWatch.Storage.Chunks;

namespace WearWatch.Diagnosis.Tests.Chunks;

public class ChunkCodecTests
{
    private static Gen<T> OneOf<T>(params T[] values) => Gen.Int[0, values.Length - 1].Select(i => values[i]);

    private static readonly Gen<double> Resolution = OneOf(0.001, 0.01, 0.0625, 0.1, 1.0 / 1024, 1, 5);

    private static readonly Gen<SteeringColumns> Chunk =
        from count in Gen.Int[0, 300]
        from angle in Gen.Frequency((5, Gen.Float[-720, 720]), (1, Gen.Const(float.NaN))).Array[count]
        from torque in Gen.Float[-10, 10].Array[count]
        from brake in OneOf(0f, 1f).Array[count]
        from latitude in Gen.Frequency((5, Gen.Double[-89, 89]), (1, Gen.Const(double.NaN))).Array[count]
        from step in Resolution
        from unit in OneOf(TorqueUnit.NewtonMetre, TorqueUnit.Raw, TorqueUnit.Unknown)
        select new SteeringColumns(Drive.Start, 50, [
            SteeringColumn.Of(SteeringChannel.SteeringWheelAngle, angle, step), SteeringColumn.Of(SteeringChannel.DriverTorque, torque, step),
            SteeringColumn.Of(SteeringChannel.Brake, brake, 1), SteeringColumn.Of(SteeringChannel.Latitude, latitude, 1e-7)], unit);

    [Fact]
    public void What_comes_back_is_the_nearest_multiple_of_the_resolution_and_missing_stays_missing() => Chunk.Sample(chunk =>
    {
        var back = ChunkCodec.Decode(ChunkCodec.Encode(chunk).Bytes);
        Assert.Equal((chunk.Start, chunk.RateHz, chunk.Count, chunk.TorqueUnit), (back.Start, back.RateHz, back.Count, back.TorqueUnit));
        foreach (var (sent, got) in chunk.Columns.Zip(back.Columns))
        {
            Assert.Equal((sent.Channel, sent.Resolution), (got.Channel, got.Resolution));
            for (var i = 0; i < chunk.Count; i++)
            {
                if (sent.Values is not null) Assert.Equal((float)(Math.Round(sent.Values[i] / sent.Resolution) * sent.Resolution), got.Values![i]);
                else Assert.Equal(Math.Round(sent.PreciseValues![i] / sent.Resolution) * sent.Resolution, got.PreciseValues![i]);
            }
        }
    });

    [Fact]
    public void Encoding_what_was_decoded_gives_the_same_bytes() => Chunk.Sample(chunk =>
    {
        var once = ChunkCodec.Encode(chunk).Bytes;
        Assert.Equal(once, ChunkCodec.Encode(ChunkCodec.Decode(once)).Bytes);
    });

    [Fact]
    public void Position_keeps_its_hundred_nanodegrees()
    {
        double[] longitude = [8.1234567, 8.1234568, -179.9999999];
        var chunk = new SteeringColumns(Drive.Start, 1, [SteeringColumn.Of(SteeringChannel.Longitude, longitude, 1e-7)]);
        var back = ChunkCodec.Decode(ChunkCodec.Encode(chunk).Bytes).Precise(SteeringChannel.Longitude);
        for (var i = 0; i < 3; i++) Assert.Equal(longitude[i], back[i], 1e-12);
    }

    [Fact]
    public void A_constant_column_costs_nearly_nothing()
    {
        SteeringColumns With(params SteeringColumn[] columns) => new(Drive.Start, 100, columns);
        var speed = SteeringColumn.Of(SteeringChannel.Speed, Enumerable.Range(0, 6000).Select(i => (float)(i * 7919 % 1000)).ToArray(), 1);
        var bare = ChunkCodec.Encode(With(speed)).Bytes.Length;
        var load = ChunkCodec.Encode(With(speed, SteeringColumn.Of(SteeringChannel.Load, Enumerable.Repeat(1200f, 6000).ToArray(), 1))).Bytes.Length;
        Assert.InRange(load - bare, 0, 30);
    }

    [Fact]
    public void Infinite_or_absurdly_fine_values_are_refused_at_the_door()
    {
        SteeringColumns With(float value, double step) => new(Drive.Start, 1, [SteeringColumn.Of(SteeringChannel.Speed, [value], step)]);
        Assert.Throws<ArgumentException>(() => ChunkCodec.Encode(With(float.PositiveInfinity, 1)));
        Assert.Throws<ArgumentException>(() => ChunkCodec.Encode(With(100, 1e-300)));
        Assert.Throws<ArgumentException>(() => With(1, 0));
        Assert.Throws<ArgumentException>(() => With(1, double.NaN));
    }

    [Fact]
    public void Every_truncation_is_refused()
    {
        var bytes = ChunkCodec.Encode(new Drive().Straight(20).Chunks()[0].Item2).Bytes;
        for (var length = 0; length < bytes.Length; length++)
            Assert.Throws<InvalidDataException>(() => ChunkCodec.Decode(bytes.AsSpan(0, length)));
    }

    [Fact]
    public void Damaged_bytes_are_refused_or_decode_to_a_chunk_but_never_fail_otherwise()
    {
        var bytes = ChunkCodec.Encode(new Drive().Straight(5).Chunks()[0].Item2).Bytes;
        Gen.Select(Gen.Int[0, bytes.Length - 1], Gen.Byte, Gen.Int[0, bytes.Length - 1], Gen.Byte).Sample((i, x, j, y) =>
        {
            var damaged = (byte[])bytes.Clone();
            (damaged[i], damaged[j]) = (x, y);
            try { Assert.InRange(ChunkCodec.Decode(damaged).Count, 0, SteeringColumns.MostSamples); }
            catch (InvalidDataException) { }
        });
    }

    [Fact]
    public void Wrong_version_and_absurd_counts_are_named()
    {
        var bytes = ChunkCodec.Encode(new Drive().Straight(5).Chunks()[0].Item2).Bytes;
        void Refused(int at, byte value, string says)
        {
            var wrong = (byte[])bytes.Clone();
            wrong[at] = value;
            Assert.Contains(says, Assert.Throws<InvalidDataException>(() => ChunkCodec.Decode(wrong)).Message);
        }
        Refused(0, 9, "version");
        Refused(1, 7, "torque unit");
        Refused(21, 0x7F, "samples"); // count's high byte: two thousand million samples
        Refused(22, 200, "columns");
        Refused(23, 99, "channel");
    }
}
