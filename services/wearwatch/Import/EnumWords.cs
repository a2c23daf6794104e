using System.Collections.Concurrent;
using Google.Protobuf.Reflection;

namespace WearWatch.Import;

/// <summary>
/// Words of the import folder and of JSON for the contract's enums: <c>HAND_RUB_CATCHES_OUTWARD</c> is written
/// <c>catches_outward</c>. Read from the generated descriptors, so a value added to the contract has its word at once.
/// </summary>
internal static class EnumWords
{
    private static readonly ConcurrentDictionary<Type, (string Word, object Value)[]> s_words = new();

    public static (string Word, T Value)[] Of<T>() where T : struct, Enum =>
        [.. s_words.GetOrAdd(typeof(T), Read).Select(w => (w.Word, (T)w.Value))];

    public static string Word<T>(T value) where T : struct, Enum => Of<T>().First(w => w.Value.Equals(value)).Word;

    /// <summary>The enum field of a row, or the unspecified value where it is empty.</summary>
    public static T Enum<T>(this CsvRow row, string column, T whenEmpty = default) where T : struct, Enum =>
        row.Word(column, whenEmpty, [.. Of<T>().Where(w => Convert.ToInt32(w.Value) != 0)]);

    private static (string, object)[] Read(Type type)
    {
        var names = type.GetFields(System.Reflection.BindingFlags.Public | System.Reflection.BindingFlags.Static)
            .Select(f => (((OriginalNameAttribute)f.GetCustomAttributes(typeof(OriginalNameAttribute), false)[0]).Name, Value: f.GetValue(null)!))
            .ToArray();
        var prefix = names.Single(n => Convert.ToInt32(n.Value) == 0).Name[..^"UNSPECIFIED".Length];
        return [.. names.Select(n => (n.Name[prefix.Length..].ToLowerInvariant(), n.Value))];
    }
}
