namespace WearWatch.Simulator;

/// <summary>Place of one tyre: axle from 0 at the front, side, and <c>O</c>uter or <c>I</c>nner of a dual pair.</summary>
public sealed record Position(int Index, int Axle, bool Left, char? Dual)
{
    public string Name { get; } = $"{Axle + 1}{(Left ? 'L' : 'R')}{Dual}";

    /// <summary>+1 on the left, −1 on the right.</summary>
    public int Sign => Left ? 1 : -1;

    /// <summary>All positions of a vehicle type in the order in which a technician walks round it.</summary>
    public static Position[] Of(VehicleType type)
    {
        var all = new List<Position>();
        for (var a = 0; a < type.Axles.Length; a++)
            foreach (var (left, dual) in Places(type.Axles[a].Duals))
                all.Add(new(all.Count, a, left, dual));
        return [.. all];
    }

    private static (bool Left, char? Dual)[] Places(bool duals) => duals
        ? [(true, 'O'), (true, 'I'), (false, 'I'), (false, 'O')]
        : [(true, null), (false, null)];
}
