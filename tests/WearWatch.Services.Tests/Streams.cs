using Google.Protobuf;
using Google.Protobuf.WellKnownTypes;
using Grpc.Core;
using WearWatch.Contracts.V1;
using Client = WearWatch.Contracts.V1.IngestService.IngestServiceClient;

namespace WearWatch.Services.Tests;

/// <summary>Small sound steering streams, always the same samples for the same sequence.</summary>
internal static class Streams
{
    public const double RateHz = 20;
    public const int Samples = 200;

    public static StreamHeader Header(string depot, string vehicle, string id) => new()
    {
        StreamId = id,
        DepotId = depot,
        VehicleId = vehicle,
        RateHz = RateHz,
        Channels =
        {
            new ChannelInfo { Channel = Channel.Speed, Unit = ChannelUnit.KmPerHour, Resolution = 0.01 },
            new ChannelInfo { Channel = Channel.SteeringWheelAngle, Unit = ChannelUnit.Degrees, Resolution = 0.1 },
            new ChannelInfo { Channel = Channel.DriverTorque, Unit = ChannelUnit.NewtonMetres, Resolution = 0.01 },
        },
    };

    public static DateTimeOffset Start(long sequence) => Sample.Monday.AddSeconds(sequence * Samples / RateHz);

    public static SteeringChunk Chunk(long sequence)
    {
        var random = new Random((int)sequence);
        Column Column(Channel channel, double mean, double spread, double step) => new()
        {
            Channel = channel,
            Values = { Enumerable.Range(0, Samples).Select(_ => (float)(Math.Round((mean + spread * random.NextDouble()) / step) * step)) },
        };
        return new SteeringChunk
        {
            Sequence = sequence,
            Start = Start(sequence).ToTimestamp(),
            Columns = { Column(Channel.Speed, 80, 5, 0.01), Column(Channel.SteeringWheelAngle, -2, 4, 0.1), Column(Channel.DriverTorque, 0.2, 0.5, 0.01) },
        };
    }

    public static ByteString Missing(params int[] samples)
    {
        var bits = new byte[(Samples + 7) / 8];
        foreach (var i in samples) bits[i >> 3] |= (byte)(1 << (i & 7));
        return ByteString.CopyFrom(bits);
    }

    /// <summary>Sends all chunks, then reads all answers.</summary>
    public static async Task<IReadOnlyList<StreamSteeringResponse>> Send(Client client, StreamHeader header, params SteeringChunk[] chunks)
    {
        using var call = client.StreamSteering();
        var reading = Read(call);
        try
        {
            await call.RequestStream.WriteAsync(new StreamSteeringRequest { Header = header });
            foreach (var chunk in chunks) await call.RequestStream.WriteAsync(new StreamSteeringRequest { Chunk = chunk });
            await call.RequestStream.CompleteAsync();
        }
        catch (Exception error) when (error is RpcException or InvalidOperationException)
        {
            // The call has ended already; reading says why.
        }
        return await reading;
    }

    private static async Task<IReadOnlyList<StreamSteeringResponse>> Read(AsyncDuplexStreamingCall<StreamSteeringRequest, StreamSteeringResponse> call)
    {
        var answers = new List<StreamSteeringResponse>();
        while (await call.ResponseStream.MoveNext(default)) answers.Add(call.ResponseStream.Current);
        return answers;
    }
}
