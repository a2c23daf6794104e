using System.Text.Json;
using System.Text.Json.Serialization;

namespace WearWatch.Storage;

/// <summary>How records are written into <c>jsonb</c>: snake_case names, enumerations as text, what is not known left out.</summary>
public static class FactJson
{
    public static JsonSerializerOptions Options { get; } = new()
    {
        PropertyNamingPolicy = JsonNamingPolicy.SnakeCaseLower,
        DefaultIgnoreCondition = JsonIgnoreCondition.WhenWritingNull,
        Converters = { new JsonStringEnumConverter(JsonNamingPolicy.SnakeCaseLower) },
    };

    public static string Write<T>(T value) => JsonSerializer.Serialize(value, value?.GetType() ?? typeof(T), Options);

    public static T Read<T>(string json) =>
        JsonSerializer.Deserialize<T>(json, Options) ?? throw new JsonException($"a stored {typeof(T).Name} is null");
}
