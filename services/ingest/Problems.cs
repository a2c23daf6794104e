using System.Globalization;
using Google.Protobuf.WellKnownTypes;
using WearWatch.Storage.Facts;
using Enum = System.Enum;

namespace WearWatch.Ingest;

/// <summary>
/// Reads the fields of one fact and collects what is wrong, each with the path of its field. Reading goes on past a
/// problem, so that a sender hears of all of them at once; a value read from a wrong field is never used.
/// </summary>
internal sealed class Problems(DateTimeOffset now)
{
    private readonly List<Remark> _refusals = [];

    public IReadOnlyList<Remark> Refusals => _refusals;

    public bool Any => _refusals.Count > 0;

    public void Refuse(string code, string field, string message) => _refusals.Add(new Remark(code, field, message));

    /// <summary>A required identifier.</summary>
    public string Id(string text, string field)
    {
        if (text.Length == 0) Refuse("missing", field, "is required");
        else if (!IsId(text)) Refuse("id_malformed", field, $"must be 1 to {Limits.IdLength} characters of letters, digits and . _ : -");
        return text;
    }

    public string? OptionalId(string text, string field) => text.Length == 0 ? null : Id(text, field);

    public static bool IsId(string text) =>
        text.Length is > 0 and <= Limits.IdLength && text.All(c => char.IsAsciiLetterOrDigit(c) || c is '.' or '_' or ':' or '-');

    /// <summary>Free text; null where empty.</summary>
    public string? Text(string text, string field)
    {
        if (text.Length > Limits.TextLength) Refuse("text_too_long", field, $"is longer than {Limits.TextLength} characters");
        else if (text.Any(c => char.IsControl(c) && c is not ('\n' or '\t' or '\r'))) Refuse("text_malformed", field, "holds control characters");
        return text.Length == 0 ? null : text;
    }

    public string RequiredText(string text, string field)
    {
        if (text.Length == 0) Refuse("missing", field, "is required");
        return Text(text, field) ?? "";
    }

    /// <summary>A time that has come: seen, measured or done.</summary>
    public DateTimeOffset Time(Timestamp? time, string field)
    {
        if (time is null)
        {
            Refuse("missing", field, "is required");
            return Limits.Earliest;
        }
        if (Instant(time) is not { } at) Refuse("time_malformed", field, "is not a time");
        else if (at < Limits.Earliest) Refuse("time_too_early", field, $"lies before {Limits.Earliest:yyyy}");
        else if (at > now + Limits.ClockAhead) Refuse("time_ahead", field, $"lies in the future ({at:O}); check the sender's clock");
        else return at;
        return Limits.Earliest;
    }

    /// <summary>Null where the message holds no valid time.</summary>
    public static DateTimeOffset? Instant(Timestamp time) =>
        time.Seconds is >= -62_135_596_800 and <= 253_402_300_799 && time.Nanos is >= 0 and < 1_000_000_000
            ? DateTimeOffset.UnixEpoch.AddSeconds(time.Seconds).AddTicks(time.Nanos / 100) : null;

    /// <summary>An ISO date; null where empty.</summary>
    public DateOnly? Date(string text, string field)
    {
        if (text.Length == 0) return null;
        if (!DateOnly.TryParseExact(text, "yyyy-MM-dd", CultureInfo.InvariantCulture, DateTimeStyles.None, out var date))
        {
            Refuse("date_malformed", field, "must be a date such as 2026-03-02");
            return null;
        }
        if (date < DateOnly.FromDateTime(Limits.Earliest.UtcDateTime) || date > Limits.LatestDate) Refuse("date_out_of_range", field, $"lies outside {Limits.Earliest:yyyy} to {Limits.LatestDate:yyyy}");
        return date;
    }

    public DateOnly RequiredDate(string text, string field)
    {
        if (text.Length == 0) Refuse("missing", field, "is required");
        return Date(text, field) ?? default;
    }

    /// <summary>A finite number within bounds.</summary>
    public double Number(double value, string field, double least, double most, string unit = "", string code = "out_of_range")
    {
        if (!double.IsFinite(value)) Refuse("not_a_number", field, "is not a finite number");
        else if (value < least || value > most)
            Refuse(code, field, string.Create(CultureInfo.InvariantCulture, $"{value:0.###} is outside {least:0.###} to {most:0.###}{(unit.Length > 0 ? " " : "")}{unit}"));
        else return value;
        return least;
    }

    public double Finite(double value, string field)
    {
        if (double.IsFinite(value)) return value;
        Refuse("not_a_number", field, "is not a finite number");
        return 0;
    }

    public double? Optional(bool given, double value, string field, double least, double most, string unit = "") =>
        given ? Number(value, field, least, most, unit) : null;

    public int Whole(int value, string field, int least, int most) => (int)Number(value, field, least, most);

    /// <summary>A quantity converted to the stored unit, of which <paramref name="factor"/> make one sent unit; its unit must be known.</summary>
    public double? Converted(bool given, double value, string field, double? factor, string unitField, double least, double most, string unit)
    {
        if (!given) return null;
        if (factor is not { } by)
        {
            Unit(unitField);
            return null;
        }
        return double.IsFinite(value) ? Number(value * by, field, least, most, unit) : Number(value, field, least, most, unit);
    }

    /// <summary>A unit is missing or not one of ours; said once a field.</summary>
    public void Unit(string field)
    {
        if (_refusals.All(r => r.Field != field)) Refuse("unit_unknown", field, "names no known unit");
    }

    /// <summary>The record's value of the same name; null where unspecified.</summary>
    public TRecord? Named<TContract, TRecord>(TContract value, string field) where TContract : struct, Enum where TRecord : struct, Enum
    {
        if (Convert.ToInt32(value, CultureInfo.InvariantCulture) == 0) return null;
        if (Enum.IsDefined(value) && Enum.TryParse<TRecord>(value.ToString(), out var named)) return named;
        Refuse("value_unknown", field, $"{value} is not a known value");
        return null;
    }

    public TRecord Required<TContract, TRecord>(TContract value, string field) where TContract : struct, Enum where TRecord : struct, Enum
    {
        if (Convert.ToInt32(value, CultureInfo.InvariantCulture) == 0) Refuse("missing", field, "is required");
        return Named<TContract, TRecord>(value, field) ?? default;
    }

    public Diagnosis.Facts.Position Position(string text, string field)
    {
        if (Diagnosis.Facts.Position.TryParse(text, out var position)) return position.Value;
        Refuse("position_malformed", field, text.Length == 0 ? "is required" : "is not a tyre position such as 1L or 2RO");
        return new(1, Diagnosis.Facts.Side.Left);
    }
}
