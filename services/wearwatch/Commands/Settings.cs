using System.ComponentModel;
using Spectre.Console.Cli;

namespace WearWatch.Commands;

/// <summary>Exit codes of every command.</summary>
internal static class ExitCode
{
    public const int Done = 0;
    /// <summary>The work was done but something was refused, or what was asked for is not there.</summary>
    public const int SomethingRefused = 1;
    /// <summary>The command line was wrong.</summary>
    public const int Usage = 2;
    /// <summary>A service or the database could not be reached or failed.</summary>
    public const int Failed = 3;
}

internal class OutputSettings : CommandSettings
{
    [CommandOption("--json")]
    [Description("Print JSON instead of text.")]
    public bool Json { get; init; }
}
