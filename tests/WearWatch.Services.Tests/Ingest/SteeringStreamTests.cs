using Google.Protobuf;
using Google.Protobuf.WellKnownTypes;
using Google.Rpc;
using Grpc.Core;
using WearWatch.Contracts.V1;
using WearWatch.Diagnosis.Steering;
using WearWatch.Storage.Chunks;
using WearWatch.Storage.Streams;

namespace WearWatch.Services.Tests.Ingest;

/// <summary>Steering samples: what is acknowledged is stored once; what is wrong is refused alone.</summary>
public sealed class SteeringStreamTests(PostgresFixture postgres) : IngestTest(postgres)
{
    private StreamHeader Header(string id = "st1") => Streams.Header(Depot, Van, id);

    private Task<IReadOnlyList<StreamSteeringResponse>> Send(params SteeringChunk[] chunks) => Streams.Send(Client, Header(), chunks);

    private async Task<List<StoredChunk>> Stored(string id = "st1")
    {
        var chunks = new List<StoredChunk>();
        await foreach (var chunk in new ChunkReader(Server.Database.Analysis).OfStream(Depot, id, 0, default)) chunks.Add(chunk);
        return chunks;
    }

    private async Task RefusedHeader(StatusCode status, string field, Action<StreamHeader> change)
    {
        var header = Header();
        change(header);
        var error = await Assert.ThrowsAsync<RpcException>(() => Streams.Send(Client, header, Streams.Chunk(1)));
        Assert.Equal(status, error.StatusCode);
        Assert.Equal(field, Assert.Single(error.GetRpcStatus()!.GetDetail<BadRequest>()!.FieldViolations).Field);
    }

    private async Task RefusedChunk(string code, string field, Action<SteeringChunk> change)
    {
        var bad = Streams.Chunk(2);
        change(bad);
        var answers = await Send(Streams.Chunk(1), bad, Streams.Chunk(3));
        Assert.Equal([Outcome.Stored, Outcome.Refused, Outcome.Stored], answers.Select(a => a.Outcome));
        Assert.Contains(answers[1].Remarks, r => r.Code == code && r.Field == field);
        Assert.Equal([1L, 3L], (await Stored()).Select(c => c.Sequence));
        var aside = Assert.Single(await SetAside(Outcome.Refused));
        Assert.Equal(($"st1/2", "steering_chunk", Van), (aside.Id, aside.Kind, aside.VehicleId));
        Assert.Contains(aside.Remarks, r => r.Code == code);
    }

    [Fact]
    public async Task Chunks_come_back_exactly_at_the_sensors_resolution()
    {
        var answers = await Send(Streams.Chunk(1), Streams.Chunk(2));
        Assert.Equal([1L, 2L], answers.Select(a => a.Sequence));
        Assert.Equal(2, answers[^1].CommittedThrough);
        var stored = await Stored();
        var columns = ChunkCodec.Decode(stored[1].Columns);
        Assert.Equal(Streams.Chunk(2).Columns[1].Values, columns[SteeringChannel.SteeringWheelAngle].ToArray(), (sent, back) => Math.Abs(sent - back) < 1e-4);
        Assert.Equal(Streams.Samples, stored[1].Samples);
        Assert.Equal(Streams.Start(2), stored[1].StartAt);
    }

    [Fact]
    public async Task Miles_per_hour_and_miles_are_stored_in_km_without_loss_of_a_step()
    {
        var header = new StreamHeader
        {
            StreamId = "st1",
            DepotId = Depot,
            VehicleId = Van,
            RateHz = 10,
            Channels =
            {
                new ChannelInfo { Channel = Channel.Speed, Unit = ChannelUnit.MilesPerHour, Resolution = 0.1 },
                new ChannelInfo { Channel = Channel.Distance, Unit = ChannelUnit.Miles, Resolution = 0.001 },
            },
        };
        await Streams.Send(Client, header, new SteeringChunk
        {
            Sequence = 1,
            Start = Streams.Start(1).ToTimestamp(),
            Columns = { new Column { Channel = Channel.Speed, Values = { 50.0f, 50.1f } }, new Column { Channel = Channel.Distance, PreciseValues = { 123_456.789, 123_456.790 } } },
        });
        var columns = ChunkCodec.Decode(Assert.Single(await Stored()).Columns);
        Assert.Equal([80.4672f, 80.6281344f], columns[SteeringChannel.Speed].ToArray(), (a, b) => Math.Abs(a - b) < 1e-4);
        Assert.Equal(123_456.790 * 1.609344, columns.Precise(SteeringChannel.Distance)[1], 6);
        Assert.Equal(0.1 * 1.609344, columns.Resolution(SteeringChannel.Speed), 12);
    }

    [Fact]
    public async Task A_missing_sample_stays_missing_whatever_stood_in_its_place()
    {
        var chunk = Streams.Chunk(1);
        chunk.Columns[0].Values[3] = float.NaN;
        chunk.Columns[0].Missing = Streams.Missing(3);
        Assert.Equal(Outcome.Stored, Assert.Single(await Send(chunk)).Outcome);
        var other = chunk.Clone();
        other.Columns[0].Values[3] = 12_345;
        Assert.True(Assert.Single(await Send(other)).Known);
        var speed = ChunkCodec.Decode(Assert.Single(await Stored()).Columns)[SteeringChannel.Speed].ToArray();
        Assert.True(float.IsNaN(speed[3]) && !float.IsNaN(speed[2]));
    }

    [Fact]
    public async Task A_chunk_sent_again_is_known_and_stored_once()
    {
        await Send(Streams.Chunk(1), Streams.Chunk(2));
        var again = await Send(Streams.Chunk(1), Streams.Chunk(2), Streams.Chunk(2), Streams.Chunk(3), Streams.Chunk(3));
        Assert.All(again, a => Assert.Equal(Outcome.Stored, a.Outcome));
        Assert.Equal([true, true, true, false, true], again.Select(a => a.Known));
        Assert.Equal([1L, 2L, 3L], (await Stored()).Select(c => c.Sequence));
    }

    [Fact]
    public async Task Chunks_out_of_order_are_stored_and_progress_waits_for_the_gap()
    {
        var answers = await Send(Streams.Chunk(3), Streams.Chunk(1));
        Assert.Equal(1, answers[^1].CommittedThrough);
        answers = await Send(Streams.Chunk(2));
        Assert.Equal(3, answers[^1].CommittedThrough);
    }

    [Fact]
    public async Task A_sender_that_was_cut_off_asks_and_goes_on()
    {
        await Send(Streams.Chunk(1), Streams.Chunk(2));
        var progress = await Client.GetStreamProgressAsync(new GetStreamProgressRequest { DepotId = Depot, StreamId = "st1" });
        Assert.Equal(2, progress.CommittedThrough);
        var answers = await Send(Streams.Chunk(progress.CommittedThrough + 1));
        Assert.Equal(3, answers[^1].CommittedThrough);
    }

    [Fact]
    public async Task Progress_of_a_stream_never_begun_is_not_found() =>
        Assert.Equal(StatusCode.NotFound, (await Assert.ThrowsAsync<RpcException>(async () =>
            await Client.GetStreamProgressAsync(new GetStreamProgressRequest { DepotId = Depot, StreamId = "never" }))).StatusCode);

    [Fact]
    public async Task A_cancelled_stream_keeps_what_was_acknowledged()
    {
        using var call = Client.StreamSteering();
        await call.RequestStream.WriteAsync(new StreamSteeringRequest { Header = Header() });
        await call.RequestStream.WriteAsync(new StreamSteeringRequest { Chunk = Streams.Chunk(1) });
        Assert.True(await call.ResponseStream.MoveNext(default));
        await call.RequestStream.WriteAsync(new StreamSteeringRequest { Chunk = Streams.Chunk(2) });
        call.Dispose();
        Assert.Contains(1L, (await Stored()).Select(c => c.Sequence));
        Assert.True(Assert.Single(await Send(Streams.Chunk(1))).Known);
    }

    [Fact]
    public Task A_sample_that_is_not_a_number_is_refused() => RefusedChunk("not_a_number", "chunk.columns[1].values[7]", c => c.Columns[1].Values[7] = float.NaN);

    [Fact]
    public Task An_infinite_sample_is_refused() => RefusedChunk("not_a_number", "chunk.columns[0].values[0]", c => c.Columns[0].Values[0] = float.PositiveInfinity);

    [Fact]
    public Task A_sample_outside_its_channels_range_is_refused() => RefusedChunk("out_of_range", "chunk.columns[0].values[5]", c => c.Columns[0].Values[5] = 301);

    [Fact]
    public Task Columns_of_different_length_are_refused() => RefusedChunk("lengths_differ", "chunk.columns[2]", c => c.Columns[2].Values.RemoveAt(0));

    [Fact]
    public Task A_declared_channel_must_be_there() => RefusedChunk("channel_missing", "chunk.columns", c => c.Columns.RemoveAt(2));

    [Fact]
    public Task An_undeclared_channel_is_refused() => RefusedChunk("channel_not_declared", "chunk.columns[2]", c => c.Columns[2].Channel = Channel.Load);

    [Fact]
    public Task A_validity_bitmap_of_the_wrong_length_is_refused() => RefusedChunk("missing_length", "chunk.columns[0].missing", c => c.Columns[0].Missing = ByteString.CopyFrom(1));

    [Fact]
    public Task An_empty_chunk_is_refused() => RefusedChunk("samples_count", "chunk.columns", c =>
    {
        foreach (var column in c.Columns) column.Values.Clear();
    });

    [Fact]
    public Task A_chunk_that_starts_before_the_one_before_it_ends_is_refused() =>
        RefusedChunk("time_back", "chunk.start", c => c.Start = Streams.Start(1).AddSeconds(1).ToTimestamp());

    [Fact]
    public Task A_chunk_from_the_future_is_refused() => RefusedChunk("time_ahead", "chunk.start", c => c.Start = DateTimeOffset.UtcNow.AddDays(9).ToTimestamp());

    [Fact]
    public async Task A_sequence_below_one_is_refused() =>
        Assert.Contains(Assert.Single(await Send(Streams.Chunk(0))).Remarks, r => r.Field == "chunk.sequence");

    [Fact]
    public async Task A_chunk_sent_again_with_other_samples_is_refused_and_both_are_kept()
    {
        await Send(Streams.Chunk(1));
        var other = Streams.Chunk(1);
        other.Columns[1].Values[0] += 1;
        var answers = await Send(other, Streams.Chunk(2));
        Assert.Equal([Outcome.Refused, Outcome.Stored], answers.Select(a => a.Outcome));
        Assert.Contains(answers[0].Remarks, r => r.Code == "id_in_use");
        var aside = Assert.Single(await SetAside(Outcome.Refused));
        var kept = JsonParser.Default.Parse<SteeringChunk>(aside.ContentJson);
        Assert.Equal(100, kept.Columns[1].Values.Count); // the first 100 samples of each column
        Assert.Equal(other.Columns[1].Values[0], kept.Columns[1].Values[0]);
    }

    [Fact]
    public Task A_missing_unit_ends_the_stream() => RefusedHeader(StatusCode.InvalidArgument, "header.channels[0].unit", h => h.Channels[0].Unit = ChannelUnit.Unspecified);

    [Fact]
    public Task A_unit_of_another_channel_ends_the_stream() => RefusedHeader(StatusCode.InvalidArgument, "header.channels[1].unit", h => h.Channels[1].Unit = ChannelUnit.NewtonMetres);

    [Fact]
    public Task A_channel_declared_twice_ends_the_stream() => RefusedHeader(StatusCode.InvalidArgument, "header.channels[3].channel", h => h.Channels.Add(h.Channels[1]));

    [Theory]
    [InlineData(0)]
    [InlineData(double.NaN)]
    [InlineData(-1)]
    public Task A_resolution_that_is_not_above_0_ends_the_stream(double resolution) =>
        RefusedHeader(StatusCode.InvalidArgument, "header.channels[0].resolution", h => h.Channels[0].Resolution = resolution);

    [Fact]
    public Task A_rate_out_of_range_ends_the_stream() => RefusedHeader(StatusCode.InvalidArgument, "header.rate_hz", h => h.RateHz = 201);

    [Fact]
    public Task A_stream_without_speed_is_refused() => RefusedHeader(StatusCode.InvalidArgument, "header.channels", h => h.Channels.RemoveAt(0));

    [Fact]
    public Task A_stream_of_an_unknown_vehicle_is_not_found() => RefusedHeader(StatusCode.NotFound, "header.vehicle_id", h => h.VehicleId = "NOBODY");

    [Fact]
    public async Task Another_header_under_the_same_stream_id_is_refused()
    {
        await Send(Streams.Chunk(1));
        await RefusedHeader(StatusCode.AlreadyExists, "header.stream_id", h => h.RateHz = 50);
    }

    [Fact]
    public async Task A_stream_that_begins_with_a_chunk_is_refused()
    {
        using var call = Client.StreamSteering();
        await call.RequestStream.WriteAsync(new StreamSteeringRequest { Chunk = Streams.Chunk(1) });
        var error = await Assert.ThrowsAsync<RpcException>(() => call.ResponseStream.MoveNext(default));
        Assert.Equal(StatusCode.InvalidArgument, error.StatusCode);
    }

    [Fact]
    public async Task A_chunk_over_the_message_limit_ends_its_stream_and_what_came_before_is_stored()
    {
        using var call = Client.StreamSteering();
        await call.RequestStream.WriteAsync(new StreamSteeringRequest { Header = Header() });
        await call.RequestStream.WriteAsync(new StreamSteeringRequest { Chunk = Streams.Chunk(1) });
        var huge = Streams.Chunk(2);
        foreach (var column in huge.Columns) column.Values.AddRange(Enumerable.Repeat(1f, 500_000));
        var writing = call.RequestStream.WriteAsync(new StreamSteeringRequest { Chunk = huge }); // cut short when the service answers
        var error = await Assert.ThrowsAsync<RpcException>(async () =>
        {
            while (await call.ResponseStream.MoveNext(default)) { }
        });
        await Xunit.Record.ExceptionAsync(() => writing);
        Assert.Equal(StatusCode.ResourceExhausted, error.StatusCode);
        Assert.Equal([1L], (await Stored()).Select(c => c.Sequence));
    }

    [Fact]
    public async Task A_bad_stream_does_not_disturb_a_good_one()
    {
        using var bad = Client.StreamSteering();
        await bad.RequestStream.WriteAsync(new StreamSteeringRequest { Header = Header("bad") });
        for (var i = 1; i <= 20; i++)
        {
            var chunk = Streams.Chunk(i);
            chunk.Columns[0].Values[0] = float.NaN;
            await bad.RequestStream.WriteAsync(new StreamSteeringRequest { Chunk = chunk });
        }
        var answers = await Send(Enumerable.Range(1, 40).Select(i => Streams.Chunk(i)).ToArray());
        Assert.Equal(40, answers[^1].CommittedThrough);
    }

    [Fact]
    public async Task Raw_torque_is_stored_as_raw()
    {
        var header = Header();
        header.Channels[2].Unit = ChannelUnit.Raw;
        await Streams.Send(Client, header, Streams.Chunk(1));
        var columns = ChunkCodec.Decode(Assert.Single(await Stored()).Columns);
        Assert.Equal(TorqueUnit.Raw, columns.TorqueUnit);
        Assert.True(columns[SteeringChannel.DriverTorque].IsEmpty);
    }

    [Fact]
    public async Task Chunks_raise_the_vehicles_revision_and_are_read_from_there_on()
    {
        await Send(Streams.Chunk(1), Streams.Chunk(2));
        var first = await Stored();
        await Send(Streams.Chunk(3));
        var later = new List<long>();
        await foreach (var chunk in new ChunkReader(Server.Database.Analysis).OfVehicle(Van, first.Max(c => c.Revision), default)) later.Add(chunk.Sequence);
        Assert.Equal([3L], later);
    }
}
