using WearWatch.Diagnosis.Steering;

namespace WearWatch.Storage.Chunks;

/// <summary>What stands in front of a chunk's compressed columns, readable without unpacking them.</summary>
/// <param name="Version">Of the codec.</param>
/// <param name="Start">UTC time of the first sample.</param>
/// <param name="RateHz">Samples per second.</param>
/// <param name="Count">Samples in each column.</param>
/// <param name="TorqueUnit">What torque columns hold.</param>
/// <param name="Channels">Columns present, in stored order.</param>
public sealed record ChunkHeader(byte Version, DateTimeOffset Start, double RateHz, int Count, TorqueUnit TorqueUnit, IReadOnlyList<SteeringChannel> Channels);

/// <summary>A chunk as it is stored.</summary>
public sealed record EncodedChunk(ChunkHeader Header, byte[] Bytes);
