using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Number of each position of a vehicle in its own order, without hashing; −1 for a position it does not have.</summary>
internal sealed class PositionIndex
{
    private readonly int[] _index = new int[(Position.MaxAxle + 1) * 6];

    public PositionIndex(IReadOnlyList<Position> positions)
    {
        Array.Fill(_index, -1);
        for (var i = positions.Count - 1; i >= 0; i--) _index[Slot(positions[i])] = i;
    }

    public int this[Position position] => position.Axle is >= 1 and <= Position.MaxAxle ? _index[Slot(position)] : -1;

    private static int Slot(Position p) => p.Axle * 6 + (int)p.Side * 3 + (int)p.Dual;
}
