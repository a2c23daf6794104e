using System.Security.Cryptography;
using Google.Protobuf;
using WearWatch.Contracts.V1;
using WearWatch.Hosting;
using WearWatch.Storage.Streams;

namespace WearWatch.Ingest;

/// <summary>One channel of a stream as declared and checked.</summary>
/// <param name="Rule">What the channel may hold.</param>
/// <param name="Factor">Stored units in one sent unit.</param>
/// <param name="Resolution">The sensor's step in the stored unit.</param>
/// <param name="IsRaw">A sensor's own number without a unit; not held against the channel's range.</param>
internal sealed record DeclaredChannel(ChannelRule Rule, double Factor, double Resolution, bool IsRaw)
{
    public Channel Channel => Rule.Channel;
}

/// <summary>A checked stream header.</summary>
internal sealed record DeclaredStream(StreamRow Row, IReadOnlyDictionary<Channel, DeclaredChannel> Channels);

/// <summary>Checks stream headers; what is wrong ends the call, for nothing after it could be understood.</summary>
internal static class StreamHeaders
{
    public static DeclaredStream Read(StreamHeader header)
    {
        Id(header.StreamId, "header.stream_id");
        Id(header.DepotId, "header.depot_id");
        Id(header.VehicleId, "header.vehicle_id");
        if (!(header.RateHz >= Limits.RateHzLeast && header.RateHz <= Limits.RateHzMost))
            throw Wrong("header.rate_hz", $"must be {Limits.RateHzLeast} to {Limits.RateHzMost} samples per second");
        var channels = new Dictionary<Channel, DeclaredChannel>();
        for (var i = 0; i < header.Channels.Count; i++)
        {
            var channel = Channel(header.Channels[i], $"header.channels[{i}]");
            if (!channels.TryAdd(channel.Channel, channel)) throw Wrong($"header.channels[{i}].channel", $"{channel.Channel} comes twice");
        }
        if (!channels.ContainsKey(Contracts.V1.Channel.Speed)) throw Wrong("header.channels", "speed is required");
        return new DeclaredStream(Row(header), channels);
    }

    private static DeclaredChannel Channel(ChannelInfo info, string path)
    {
        if (ChannelRule.Of(info.Channel) is not { } rule) throw Wrong($"{path}.channel", $"{info.Channel} is not a known channel");
        if (rule.Unit(info.Unit) is not { } unit)
            throw Wrong($"{path}.unit", $"{(info.Unit == ChannelUnit.Unspecified ? "is missing" : $"{info.Unit} is not a unit of {info.Channel}")}; one of {string.Join(", ", rule.Units.Select(u => u.Unit))}");
        var least = (rule.Most - rule.Least) / Limits.StepsPerChannel;
        if (!double.IsFinite(info.Resolution) || info.Resolution * unit.Factor < least || info.Resolution * unit.Factor > rule.Most - rule.Least)
            throw Wrong($"{path}.resolution", $"must be above 0 and within the range of {info.Channel}");
        return new DeclaredChannel(rule, unit.Factor, info.Resolution * unit.Factor, info.Unit == ChannelUnit.Raw);
    }

    private static StreamRow Row(StreamHeader header)
    {
        var bytes = header.ToByteArray();
        return new StreamRow
        {
            Depot = header.DepotId,
            StreamId = header.StreamId,
            VehicleId = header.VehicleId,
            RateHz = header.RateHz,
            Header = bytes,
            HeaderHash = SHA256.HashData(bytes),
        };
    }

    private static void Id(string text, string field)
    {
        if (!Problems.IsId(text)) throw Wrong(field, $"must be 1 to {Limits.IdLength} characters of letters, digits and . _ : -");
    }

    private static RequestRefused Wrong(string field, string message) => new(RefusedBecause.Invalid, field, message);
}
