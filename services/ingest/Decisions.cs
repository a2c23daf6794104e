using WearWatch.Diagnosis.Facts;
using WearWatch.Storage.Facts;
using Contract = WearWatch.Contracts.V1;

namespace WearWatch.Ingest;

/// <summary>What people decide: prices, limits, tolerances, settings, decisions, and facts withdrawn.</summary>
internal static class Decisions
{
    public static FactBody Price(Contract.Price sent, Problems p)
    {
        var record = new Price
        {
            Kind = p.Required<Contract.PriceKind, PriceKind>(sent.Kind, "price.kind"),
            Class = p.Named<Contract.VehicleClass, VehicleClass>(sent.VehicleClass, "price.vehicle_class"),
            Amount = (decimal)p.Number(sent.Amount, "price.amount", 0, Limits.Money),
            Currency = Vehicles.Currency(sent.Currency, "price.currency", p),
            From = p.RequiredDate(sent.From, "price.from"),
        };
        return new FactBody(FactKind.Price, record, Vehicles.Start(record.From));
    }

    public static FactBody DepthLimit(Contract.DepthLimit sent, Problems p)
    {
        var record = new DepthLimitFact
        {
            Jurisdiction = p.RequiredText(sent.Jurisdiction, "depth_limit.jurisdiction"),
            Class = p.Named<Contract.VehicleClass, VehicleClass>(sent.VehicleClass, "depth_limit.vehicle_class"),
            Axle = sent.HasAxle ? p.Whole(sent.Axle, "depth_limit.axle", 1, Limits.AxlesPerVehicle) : null,
            WinterOnly = sent.WinterOnly,
            LimitMm = p.Converted(true, sent.Limit, "depth_limit.limit", Measures.Mm(sent.DepthUnit), "depth_limit.depth_unit", 0, Limits.DepthMm, "mm") ?? 0,
            From = p.RequiredDate(sent.From, "depth_limit.from"),
            Source = p.RequiredText(sent.Source, "depth_limit.source"),
        };
        return new FactBody(FactKind.DepthLimit, record, Vehicles.Start(record.From));
    }

    public static FactBody Tolerance(Contract.Tolerance sent, Problems p)
    {
        var quantity = p.Required<Contract.Quantity, Quantity>(sent.Quantity, "tolerance.quantity");
        if (!quantity.IsAngle()) p.Refuse("not_an_angle", "tolerance.quantity", "is no alignment angle");
        var record = new ToleranceFact
        {
            Class = p.Required<Contract.VehicleClass, VehicleClass>(sent.VehicleClass, "tolerance.vehicle_class"),
            Quantity = quantity,
            PlusMinus = p.Converted(true, sent.PlusMinus, "tolerance.plus_minus", Measures.Deg(sent.AngleUnit), "tolerance.angle_unit", 0, Limits.AngleDeg, "deg") ?? 0,
            From = p.RequiredDate(sent.From, "tolerance.from"),
        };
        if (sent.PlusMinus == 0) p.Refuse("out_of_range", "tolerance.plus_minus", "must be above 0");
        return new FactBody(FactKind.Tolerance, record, Vehicles.Start(record.From));
    }

    public static FactBody Setting(Contract.Setting sent, Problems p)
    {
        var name = p.Required<Contract.SettingName, SettingName>(sent.Name, "setting.name");
        var (most, unit) = name switch
        {
            SettingName.ChangeAtDepth => (Limits.DepthMm, "mm"),
            SettingName.HorizonWeeks => (520, "weeks"),
            _ => (200, "N·m"),
        };
        var record = new OperatorSetting
        {
            Name = name,
            Class = p.Named<Contract.VehicleClass, VehicleClass>(sent.VehicleClass, "setting.vehicle_class"),
            Value = p.Number(sent.Value, "setting.value", 0, most, unit),
            From = p.RequiredDate(sent.From, "setting.from"),
        };
        return new FactBody(FactKind.Setting, record, Vehicles.Start(record.From));
    }

    public static FactBody Decision(Contract.Decision sent, Problems p)
    {
        var record = new Decision
        {
            Kind = p.Required<Contract.DecisionKind, DecisionKind>(sent.Kind, "decision.kind"),
            VehicleId = p.OptionalId(sent.VehicleId, "decision.vehicle_id"),
            About = p.Text(sent.About, "decision.about"),
            At = p.Time(sent.At, "decision.at"),
            Until = p.Date(sent.Until, "decision.until"),
            Answer = p.Text(sent.Answer, "decision.answer"),
            Who = p.Text(sent.Who, "decision.who"),
        };
        if (record is { VehicleId: null, About: null }) p.Refuse("missing", "decision.about", "a decision is about a vehicle, a finding or a fact");
        if (record.Kind == DecisionKind.Answered) Answers.Check(record, p);
        return new FactBody(FactKind.Decision, record, record.At)
        {
            VehicleId = record.VehicleId,
            About = record.Kind == DecisionKind.Answered ? record.About : null,
            Judge = (context, judgement) =>
            {
                if (record.VehicleId is { } vehicle) judgement.NeedsVehicle(context, vehicle, "decision.vehicle_id");
                if (record.Kind == DecisionKind.Answered && !judgement.Refused) Answers.Judge(record, context, judgement);
            },
        };
    }

    public static FactBody Withdrawal(Contract.Withdrawal sent, Problems p)
    {
        var record = new Withdrawal
        {
            Kind = p.Required<Contract.WithdrawalKind, WithdrawalKind>(sent.Kind, "withdrawal.kind"),
            FactId = p.Id(sent.FactId, "withdrawal.fact_id"),
            At = p.Time(sent.At, "withdrawal.at"),
            Reason = p.Text(sent.Reason, "withdrawal.reason"),
        };
        return new FactBody(FactKind.Withdrawal, record, record.At)
        {
            Retracts = record.Kind == WithdrawalKind.Retract ? record.FactId : null,
            Releases = record.Kind == WithdrawalKind.Release ? record.FactId : null,
            Judge = (context, judgement) => Judge(record, context, judgement),
        };
    }

    private static void Judge(Withdrawal record, FactContext context, Judgement judgement)
    {
        const string Field = "withdrawal.fact_id";
        var key = new FactKey(judgement.Depot, record.FactId);
        if (context.Known(key) is not { } fact)
        {
            // Something refused is no fact, but it can be laid to rest.
            if (record.Kind == WithdrawalKind.Retract && context.IsSetAside(key)) return;
            judgement.Refuse("unknown_fact", Field, $"depot {judgement.Depot} has no fact {record.FactId}");
        }
        else if (fact.Kind == FactKind.Withdrawal)
            judgement.Refuse("not_withdrawable", Field, "a withdrawal stands; send the fact anew under another id");
        else if (record.Kind == WithdrawalKind.Release && !fact.Held)
            judgement.Refuse("not_held", Field, $"fact {record.FactId} is not held");
    }
}
