namespace WearWatch.Hosting;

/// <summary>Why a whole request cannot be served.</summary>
internal enum RefusedBecause { Invalid, NotFound, AlreadyExists, TooMuch }

/// <summary>A request refused as a whole; what is wrong with a single item is answered beside it instead.</summary>
internal sealed class RequestRefused(RefusedBecause because, string field, string message) : Exception(message)
{
    public RefusedBecause Because { get; } = because;

    /// <summary>Path of the field inside the request.</summary>
    public string Field { get; } = field;
}
