using System.Diagnostics.CodeAnalysis;
using System.Globalization;
using System.Text.Json;
using System.Text.Json.Serialization;

namespace WearWatch.Diagnosis.Facts;

/// <summary>Side of the vehicle, seen by a driver facing forward.</summary>
public enum Side { Left, Right }

/// <summary>Place of a tyre within a dual pair; <see cref="Single"/> where there is one tyre a side.</summary>
public enum Dual { Single, Outer, Inner }

/// <summary>
/// Place of a tyre on the vehicle: axle counted from 1 at the front, side, and dual.
/// Written <c>1L</c>, <c>2RO</c>, <c>3LI</c>. Axles 1 to 12.
/// </summary>
[JsonConverter(typeof(PositionJson))]
public readonly record struct Position(int Axle, Side Side, Dual Dual = Dual.Single) : IComparable<Position>
{
    public const int MaxAxle = 12;

    /// <summary>The same place on the other side of the vehicle.</summary>
    public Position Mirrored => this with { Side = Side == Side.Left ? Side.Right : Side.Left };

    public static bool TryParse(string? text, [NotNullWhen(true)] out Position? position)
    {
        position = null;
        if (text is null) return false;
        var digits = 0;
        while (digits < text.Length && char.IsAsciiDigit(text[digits])) digits++;
        if (digits is 0 or > 2 || text.Length - digits is < 1 or > 2) return false;
        var axle = int.Parse(text.AsSpan(0, digits), CultureInfo.InvariantCulture);
        if (axle is < 1 or > MaxAxle) return false;
        Side? side = text[digits] switch { 'L' => Side.Left, 'R' => Side.Right, _ => null };
        if (side is null) return false;
        Dual? dual = text.Length == digits + 1 ? Dual.Single : text[digits + 1] switch { 'O' => Dual.Outer, 'I' => Dual.Inner, _ => null };
        if (dual is null) return false;
        position = new Position(axle, side.Value, dual.Value);
        return true;
    }

    /// <exception cref="FormatException">The text is not a position.</exception>
    public static Position Parse(string text) =>
        TryParse(text, out var position) ? position.Value : throw new FormatException($"'{text}' is not a tyre position such as 1L or 2RO");

    public int CompareTo(Position other) =>
        (Axle, Side, Dual).CompareTo((other.Axle, other.Side, other.Dual));

    public override string ToString() =>
        string.Create(CultureInfo.InvariantCulture, $"{Axle}{(Side == Side.Left ? 'L' : 'R')}{Dual switch { Dual.Outer => "O", Dual.Inner => "I", _ => "" }}");
}

/// <summary>Positions in stored facts are the text a technician would write.</summary>
public sealed class PositionJson : JsonConverter<Position>
{
    public override Position Read(ref Utf8JsonReader reader, Type typeToConvert, JsonSerializerOptions options) => Position.Parse(reader.GetString()!);

    public override void Write(Utf8JsonWriter writer, Position value, JsonSerializerOptions options) => writer.WriteStringValue(value.ToString());
}
