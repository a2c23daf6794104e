using WearWatch.Diagnosis.Facts;

namespace WearWatch.Storage.Facts;

/// <summary>
/// What is known when a batch is judged: the stored facts it touches and, as the batch goes on, its own earlier items.
/// </summary>
public sealed class FactContext
{
    private readonly Dictionary<FactKey, KnownFact> _known = [];
    private readonly Dictionary<string, Depot> _depots = [];
    private readonly Dictionary<string, List<Dated<Vehicle>>> _vehicles = [];
    private readonly Dictionary<string, List<Dated<TreadSurvey>>> _surveys = [];
    private readonly Dictionary<string, List<Dated<FittingRecord>>> _fittings = [];
    private readonly Dictionary<string, Tyre> _tyres = [];
    private readonly Dictionary<FactKey, object> _bodies = [];
    private readonly Dictionary<FactKey, (DateTimeOffset At, object Body)> _held = [];
    private readonly List<(string Depot, Dated<DepthLimitFact> Limit)> _limits = [];
    private readonly Dictionary<string, List<Dated<Decision>>> _decisions = [];
    private readonly HashSet<FactKey> _setAside = [];

    public KnownFact? Known(FactKey key) => _known.GetValueOrDefault(key);

    public Depot? Depot(string depotId) => _depots.GetValueOrDefault(depotId);

    /// <summary>The vehicle as it is at a time; its first record before that; null where it is not known.</summary>
    public Vehicle? Vehicle(string vehicleId, DateTimeOffset at)
    {
        if (!_vehicles.TryGetValue(vehicleId, out var records) || records.Count == 0) return null;
        return (records.LastOrDefault(v => v.At <= at) ?? records[0]).Body;
    }

    public bool VehicleIsKnown(string vehicleId) => _vehicles.TryGetValue(vehicleId, out var records) && records.Count > 0;

    /// <summary>Surveys that hold, by time, from a few before the batch's earliest on, read as they were answered.</summary>
    public IReadOnlyList<Dated<TreadSurvey>> Surveys(string vehicleId) => Answered(vehicleId).Surveys;

    /// <summary>Fittings that hold, by time, and those that answers told of.</summary>
    public IReadOnlyList<Dated<FittingRecord>> Fittings(string vehicleId) => Answered(vehicleId).Fittings;

    private AnsweredSurveys Answered(string vehicleId) =>
        AnsweredSurveys.Of(_surveys.GetValueOrDefault(vehicleId) ?? [], [], _fittings.GetValueOrDefault(vehicleId) ?? [], Decisions(vehicleId));

    /// <summary>Decisions on a vehicle, by time.</summary>
    public IReadOnlyList<Dated<Decision>> Decisions(string vehicleId) => _decisions.GetValueOrDefault(vehicleId) ?? [];

    /// <summary>Surveys of a vehicle that wait held, by time, with the depot that sent each.</summary>
    public IReadOnlyList<(string Depot, Dated<TreadSurvey> Survey)> HeldSurveys(string vehicleId) =>
        [.. _held.Where(h => h.Value.Body is TreadSurvey s && s.VehicleId == vehicleId).OrderBy(h => h.Value.At).ThenBy(h => h.Key.Id, StringComparer.Ordinal)
            .Select(h => (h.Key.Depot, new Dated<TreadSurvey>(h.Key.Id, h.Value.At, (TreadSurvey)h.Value.Body)))];

    /// <summary>Something refused under this id still waits to be looked at.</summary>
    public bool IsSetAside(FactKey key) => _setAside.Contains(key);

    internal void RememberSetAside(FactKey key) => _setAside.Add(key);

    public Tyre? Tyre(string tyreId) => _tyres.GetValueOrDefault(tyreId);

    /// <summary>Depth limits the depot has set over the built-in table, by date.</summary>
    public IReadOnlyList<DepthLimitFact> Limits(string depotId) => _limits.Where(l => l.Depot == depotId).Select(l => l.Limit.Body).ToList();

    internal void Remember(KnownFact fact) => _known[new FactKey(fact.Depot, fact.Id)] = fact;

    /// <summary>Takes in a fact that holds, or waits held.</summary>
    internal void Take(FactKey key, DateTimeOffset at, object body, bool held)
    {
        if (held)
        {
            _held[key] = (at, body);
            return;
        }
        _bodies[key] = body;
        switch (body)
        {
            case Depot depot: _depots[depot.DepotId] = depot; break;
            case Vehicle vehicle: Insert(_vehicles, vehicle.VehicleId, new(key.Id, at, vehicle)); break;
            case TreadSurvey survey: Insert(_surveys, survey.VehicleId, new(key.Id, at, survey)); break;
            case FittingRecord fitting: Insert(_fittings, fitting.VehicleId, new(key.Id, at, fitting)); break;
            case Tyre tyre: _tyres[tyre.TyreId] = tyre; break;
            case Decision { VehicleId: { } on } decision: Insert(_decisions, on, new(key.Id, at, decision)); break;
            case DepthLimitFact limit: _limits.Add((key.Depot, new(key.Id, at, limit))); break;
        }
    }

    /// <summary>A fact was taken back or corrected by another.</summary>
    internal void Drop(FactKey key)
    {
        _held.Remove(key);
        if (!_bodies.Remove(key, out var body)) return;
        switch (body)
        {
            case Vehicle vehicle: _vehicles[vehicle.VehicleId].RemoveAll(v => v.FactId == key.Id && ReferenceEquals(v.Body, body)); break;
            case TreadSurvey survey: _surveys[survey.VehicleId].RemoveAll(s => ReferenceEquals(s.Body, body)); break;
            case FittingRecord fitting: _fittings[fitting.VehicleId].RemoveAll(f => ReferenceEquals(f.Body, body)); break;
            case Decision { VehicleId: { } on }: _decisions[on].RemoveAll(d => ReferenceEquals(d.Body, body)); break;
            case DepthLimitFact: _limits.RemoveAll(l => ReferenceEquals(l.Limit.Body, body)); break;
        }
    }

    /// <summary>A held fact was let through.</summary>
    internal void Release(FactKey key)
    {
        if (_held.Remove(key, out var held)) Take(key, held.At, held.Body, held: false);
    }

    /// <summary>Keeps a list by time; at the same time, by arrival.</summary>
    private static void Insert<T>(Dictionary<string, List<Dated<T>>> lists, string key, Dated<T> item)
    {
        if (!lists.TryGetValue(key, out var list)) lists[key] = list = [];
        var place = list.Count;
        while (place > 0 && list[place - 1].At > item.At) place--;
        list.Insert(place, item);
    }
}
