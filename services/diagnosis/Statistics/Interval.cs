namespace WearWatch.Diagnosis.Statistics;

/// <summary>A value with its 90 % interval, for quantities whose error is not symmetric (distances, money).</summary>
public readonly record struct Interval(double Value, double Low, double High);
