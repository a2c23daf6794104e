using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Figures of the tyre now on one position.</summary>
internal sealed class TyreWear(VehicleTread vehicle, FleetWear fleet, DateOnly asOf, VehicleHistory history, IReadOnlyList<(Estimate Bias, int Reader)> biases)
{
    /// <summary>What a tyre of unknown past may have gathered of one-edge wear elsewhere, mm per mm of loss (from memory).</summary>
    private const double PastEdgePerMm = 0.12, PastShoulderPerMm = 0.15;

    /// <summary>A warm tyre reads about this much above its cold pressure (common practice, no source).</summary>
    private const double WarmFactor = 1.12;

    /// <summary>Standard error of a pressure reading, share: gauge, and temperature beyond what 'warm' tells (from memory).</summary>
    private const double PressureSd = 0.025, WarmSd = 0.04;

    /// <summary>How long a tyre taken off still tells of the place it stood on, days, and how much wider its errors count (from memory).</summary>
    private const int EarlierDays = 150;
    private const double EarlierErrorFactor = 1.5;

    public TyreFigures Figures(Fitting fitting)
    {
        var normal = fleet.For(vehicle.Vehicle, fitting.Position);
        var winter = fitting.Winter;
        var limit = DepthLimits.For(vehicle.Depot.Jurisdiction, vehicle.Vehicle, fitting.Position, winter, asOf, vehicle.Limits);
        var figures = new TyreFigures
        {
            Position = fitting.Position,
            TyreId = fitting.TyreId,
            Pattern = fitting.Pattern,
            NewDepthMm = fitting.NewDepthMm,
            LimitMm = limit.LimitMm,
            LimitSource = limit.Source,
            ChangeAtMm = vehicle.ChangeAtMm(asOf),
        };
        var before = fitting.Points.Count == 0 ? EarlierHere(fitting) : [];
        if (fitting.Points.Count == 0) return Evidence(figures with { RateMmPer1000Km = RatePosterior.Of(null, normal).Rate, RateBorrowed = true }, normal, null, null, null, before);
        var lines = FittingLines.Fit(fitting.LinePoints, fleet.Noise, s => biases[s], normal.RateMmPer1000Km);
        var own = lines.Rate(fleet.Noise);
        var (rate, logSd) = RatePosterior.Of(own, normal);
        var shaped = WithUnknownStart(fitting, rate) is { } start ? FittingLines.Fit([start, .. fitting.Points], fleet.Noise, s => biases[s], normal.RateMmPer1000Km) : lines;
        var edge = shaped.EdgeRate(fleet.Noise);
        var shoulder = shaped.ShoulderRate(fleet.Noise);
        var alone = RatePosterior.Of(null, normal).LogSd;
        var last = fitting.Points[^1];
        var read = Hand(Depth(figures, fitting, limit, normal, rate, edge, shoulder), fitting) with
        {
            SurveyIds = Ids(fitting),
            RateMmPer1000Km = rate,
            RateBorrowed = own is null || logSd * logSd > 0.5 * alone * alone,
            RoundVariationMm = last.Shape?.RoundVariationMm,
            FeatherMm = fitting.Points.LastOrDefault(p => p.Shape?.FeatherMm is not null)?.Shape!.FeatherMm,
        };
        return Evidence(read, normal, RatePosterior.LogRatio(own, normal), Beyond(edge, EdgePerMm(normal, fitting.Position), rate), Beyond(shoulder, normal.ShoulderPerMm, rate), before);
    }

    /// <summary>
    /// How the place wears its tyres, whichever tyre stood there: an axle out of alignment wore the one before as well. The
    /// earlier tyres count with a wider error, for what has changed since.
    /// </summary>
    private TyreFigures Evidence(TyreFigures figures, NormalWear normal, Estimate? ratio, Estimate? edge, Estimate? shoulder, IReadOnlyList<Fitting> before)
    {
        var rubs = (Out: figures.RubsCatchingOutward, In: figures.RubsCatchingInward, Neither: figures.RubsCatchingNeither);
        foreach (var f in before)
        {
            var lines = FittingLines.Fit(f.LinePoints, fleet.Noise, s => biases[s], normal.RateMmPer1000Km);
            var own = lines.Rate(fleet.Noise);
            var rate = RatePosterior.Of(own, normal).Rate;
            ratio = Pooled(ratio, RatePosterior.LogRatio(own, normal));
            edge = Pooled(edge, Beyond(lines.EdgeRate(fleet.Noise), EdgePerMm(normal, f.Position), rate));
            shoulder = Pooled(shoulder, Beyond(lines.ShoulderRate(fleet.Noise), normal.ShoulderPerMm, rate));
            rubs.Out += Count(f, HandRub.CatchesOutward);
            rubs.In += Count(f, HandRub.CatchesInward);
            rubs.Neither += Count(f, HandRub.Neither);
        }
        return figures with
        {
            SurveyIds = [.. before.SelectMany(Ids), .. figures.SurveyIds],
            NormalRateMmPer1000Km = normal.RateMmPer1000Km,
            LogRateRatio = ratio,
            EdgeSlopeMmPer1000Km = edge,
            ShoulderMmPer1000Km = shoulder,
            FeatherMm = (figures.FeatherMm ?? before.SelectMany(f => f.Points).LastOrDefault(p => p.Shape?.FeatherMm is not null)?.Shape!.FeatherMm)
                - normal.LeanFeatherMm * NormalWear.FallSign(figures.Position, vehicle.Depot.TrafficSide),
            RubsCatchingOutward = rubs.Out,
            RubsCatchingInward = rubs.In,
            RubsCatchingNeither = rubs.Neither,
        };
    }

    /// <summary>Tyres that stood on the same place before, as far as they were surveyed lately; oldest first.</summary>
    private IReadOnlyList<Fitting> EarlierHere(Fitting fitting)
    {
        var since = new DateTimeOffset(asOf.AddDays(-EarlierDays).ToDateTime(TimeOnly.MinValue), TimeSpan.Zero);
        return [.. history.Fittings.Where(f => f.Position == fitting.Position && !f.Current && f.Points.Count > 0 && history.Surveys[f.Points[^1].Survey].Survey.At >= since)
            .OrderBy(f => f.Points[0].Km)];
    }

    private string[] Ids(Fitting fitting) => [.. fitting.Points.Select(p => history.Surveys[p.Survey].SurveyId)];

    private static int Count(Fitting fitting, HandRub rub) => fitting.Points.Count(p => p.Readings?.HandRub == rub);

    private static Estimate? Pooled(Estimate? now, Estimate? before)
    {
        if (before is not { } b) return now;
        b = b with { StandardError = b.StandardError * EarlierErrorFactor };
        if (now is not { } n) return b;
        var (wn, wb) = (1 / Square(n.StandardError), 1 / Square(b.StandardError));
        return new((wn * n.Value + wb * b.Value) / (wn + wb), 1 / Math.Sqrt(wn + wb));
    }

    /// <summary>
    /// Where the start was not recorded but the new depth is known, the tyre lay flat when new: its shape now has grown
    /// over the loss so far, at places and under conditions unknown, which the error allows for.
    /// </summary>
    internal static FittingPoint? WithUnknownStart(Fitting fitting, Estimate rate)
    {
        if (fitting.Start is not null || fitting.NewDepthMm is not { } n) return null;
        var first = fitting.Points[0];
        var loss = n - first.Mean.Value;
        if (loss < 1) return null;
        return new FittingPoint
        {
            Survey = -1,
            Km = first.Km - loss / rate.Value * 1000,
            KmSd = loss / rate.Value * 1000 * rate.StandardError / rate.Value,
            Mean = new(n, TreadShape.NewDepthSdMm),
            Edge = new(0, Math.Sqrt(0.15 * 0.15 + PastEdgePerMm * loss * PastEdgePerMm * loss)),
            Shoulder = new(0, Math.Sqrt(0.3 * 0.3 + PastShoulderPerMm * loss * PastShoulderPerMm * loss)),
        };
    }

    private Estimate EdgePerMm(NormalWear normal, Position position) => normal.EdgePerMmAt(position, vehicle.Depot.TrafficSide);

    private static Estimate? Beyond(Estimate? slope, Estimate normalPerMm, Estimate rate) =>
        slope is { } s ? s - new Estimate(normalPerMm.Value * rate.Value, Math.Abs(normalPerMm.StandardError * rate.Value)) : null;

    private TyreFigures Depth(TyreFigures figures, Fitting fitting, DepthLimit limit, NormalWear normal, Estimate rate, Estimate? edge, Estimate? shoulder)
    {
        var last = fitting.Points[^1];
        var resolution = history.Surveys[last.Survey].Survey.ResolutionMm;
        var readingSd = Math.Sqrt(GaugeNoise.ReadingVariance(GaugeNoise.RepeatSdMm, resolution));
        if (last.Readings is null || DepthLimits.Judge(limit, last.Readings.Depths) is not { } judged) return figures;
        var bias = fleet.BiasOf(history.Surveys[last.Survey].Survey).Sd;
        var edgeTotal = Shrunk(edge, EdgePerMm(normal, fitting.Position), normal.EdgeBetweenSd, rate.Value);
        var shoulderTotal = Shrunk(shoulder, normal.ShoulderPerMm, normal.ShoulderBetweenSd, rate.Value);
        var courses = Courses(fitting, normal);
        Interval? Until(double mm) => Grooves(fitting, limit).Select(g => ToLimit(fitting, g, rate, edgeTotal, shoulderTotal, mm, courses)).OfType<Interval>().OrderBy(i => i.Value).Select(i => (Interval?)i).FirstOrDefault();
        return figures with
        {
            RemainingMm = new(judged.GoverningMm, Math.Sqrt(readingSd * readingSd + bias * bias)),
            GoverningGroove = judged.Groove,
            Across = [.. last.Shape!.ByGroove.Where(g => g.Groove > 0)],
            Points = [.. fitting.Points.Select(p => (p.Km, Groove: p.Shape!.ByGroove.FirstOrDefault(g => g.Groove == judged.Groove), Bias: fleet.BiasOf(history.Surveys[p.Survey].Survey).Mm))
                .Where(p => p.Groove.Places > 0).Select(p => new WearPoint(p.Km, p.Groove.DepthMm - p.Bias))],
            RemainingKm = !judged.Legal ? new Interval(0, 0, 0) : Until(limit.LimitMm),
            ToChangeKm = figures.ChangeAtMm is not { } at ? null : judged.GoverningMm <= at ? new Interval(0, 0, 0) : Until(at),
        };
    }

    private static IEnumerable<int> Grooves(Fitting fitting, DepthLimit limit)
    {
        var shape = fitting.Points[^1].Shape!;
        var outside = limit.Judged is BandJudgement.LeastOfCentralThreeQuarters or BandJudgement.LeastOfThreeQuartersBand && shape.Grooves >= 8;
        return shape.ByGroove.Select(g => g.Groove).Where(g => !outside || (g != 1 && g != shape.Grooves));
    }

    /// <summary>Own shape rate pulled towards the normal one, with room for a fault.</summary>
    private static Estimate Shrunk(Estimate? own, Estimate normalPerMm, double betweenSd, double rate)
    {
        var prior = new Estimate(normalPerMm.Value * rate, rate * Math.Sqrt(betweenSd * betweenSd + 0.2 * 0.2));
        if (own is not { } o) return prior;
        var (a, b) = (1 / (prior.StandardError * prior.StandardError), 1 / (o.StandardError * o.StandardError));
        return new((a * prior.Value + b * o.Value) / (a + b), 1 / Math.Sqrt(a + b));
    }

    /// <summary>How the rate of the tyre now on may have gone, from its mean depths.</summary>
    private IReadOnlyList<RateCourse> Courses(Fitting fitting, NormalWear normal)
    {
        var points = new List<(double Km, double Mm, double Variance)>();
        var kept = fitting.LinePoints.Select(p => LinePoint.Of(p, -1, -1)).ToArray();
        var fittedNew = kept.Length > 0 && fitting.LinePoints[0].New;
        var loss = fittedNew ? RunIn.MiddleLoss(kept) : 0;
        for (var i = 0; i < kept.Length; i++)
        {
            var bias = kept[i].Measured ? fleet.BiasOf(history.Surveys[kept[i].Survey].Survey).OwnSd : 0;
            var p = fittedNew ? fleet.Noise.RunIn.OnLine(kept[i], kept[0].Mean.Value, loss) : kept[i];
            if (FittingLines.Reading(p, TreadFigure.Mean, fleet.Noise, new(0, 0), normal.RateMmPer1000Km) is { } r) points.Add((p.X * 1000, r.Y, r.Variance + bias * bias));
        }
        return RateChange.Of(points, normal.RateMmPer1000Km, vehicle.AdjustedAt is { } at ? history.Axis.At(at).Value : null);
    }

    /// <summary>Depth of one groove now, from all its readings brought forward at its own rate, and the distance from there to the limit, over all courses.</summary>
    private Interval? ToLimit(Fitting fitting, int groove, Estimate rate, Estimate edge, Estimate shoulder, double limitMm, IReadOnlyList<RateCourse> courses)
    {
        var grooves = fitting.Points[^1].Shape!.Grooves;
        var u = groove == 0 ? 0 : TreadShape.Across(groove, grooves);
        var q = groove == 0 || grooves < 3 ? 0 : u * u - TreadShape.MeanSquareAcross(grooves);
        var own = Math.Max(rate.Value + edge.Value * u / 2 + shoulder.Value * q, 0.2 * rate.Value);
        var shape = Math.Sqrt(Square(edge.StandardError * u / 2) + Square(shoulder.StandardError * q));
        var whole = courses[0].Now.Value > 0 ? courses[0].Now.Value : rate.Value;
        var ways = new List<RemainingDistance.Course>(courses.Count);
        foreach (var course in courses)
        {
            if (course.Weight < 0.01) continue;
            // The shape of wear is taken to keep its proportions when the rate changes.
            var (before, now) = double.IsNegativeInfinity(course.SinceKm) ? (1, 1) : (Math.Max(0.2, course.Before.Value / whole), Math.Max(0.2, course.Now.Value / whole));
            var error = double.IsNegativeInfinity(course.SinceKm) ? rate.StandardError : Math.Max(rate.StandardError, course.Now.StandardError);
            if (Way(fitting, groove, course, own * before, own * now, Math.Sqrt(Square(error) + Square(shape)), limitMm) is { } way) ways.Add(way);
        }
        return ways.Count == 0 ? null : RemainingDistance.Of(ways, limitMm);
    }

    private RemainingDistance.Course? Way(Fitting fitting, int groove, RateCourse course, double before, double now, double error, double limitMm)
    {
        var last = fitting.Points[^1];
        double sum = 0, weights = 0, gaps = 0, noise = 0;
        foreach (var p in fitting.Points)
        {
            if (p.Shape!.ByGroove.FirstOrDefault(g => g.Groove == groove) is not { Places: > 0 } mean) continue;
            var survey = history.Surveys[p.Survey].Survey;
            var bias = fleet.BiasOf(survey);
            var gap = (last.Km - p.Km) / 1000;
            var earlier = Math.Max(0, Math.Min(course.SinceKm, last.Km) - p.Km) / 1000;
            var variance = (GaugeNoise.ReadingVariance(GaugeNoise.RepeatSdMm, survey.ResolutionMm) * Math.Max(1, Square(fleet.Noise.MeanScale)) / mean.Places + Square(FittingLines.WanderSdMm) + Square(bias.OwnSd) + Square(error * gap)) / p.Weight;
            sum += (mean.DepthMm - bias.Mm - now * (gap - earlier) - before * earlier) / variance;
            weights += 1 / variance;
            noise += (variance - Square(error * gap) / p.Weight) / (variance * variance);
            gaps += (gap - earlier) / variance;
        }
        if (weights <= 0) return null;
        // What all readers share stays, whatever the number of readings.
        var common = fleet.BiasOf(history.Surveys[last.Survey].Survey).CommonSd;
        var depth = new Estimate(sum / weights, Math.Sqrt(noise / (weights * weights) + common * common));
        var newMm = fitting.NewDepthMm ?? WearPrior.For(fitting.Class, fitting.Role).NewDepthMm;
        var measured = fitting.Points.Where(p => p.Km >= course.SinceKm).Select(p => p.Mean.Value).DefaultIfEmpty(last.Mean.Value).Average();
        return new(course.Weight, depth, new(now, error), gaps / weights * 1000, fleet.Noise.RunIn.RateAhead(measured, depth.Value, limitMm, newMm));
    }

    private TyreFigures Hand(TyreFigures figures, Fitting fitting)
    {
        var last = fitting.Points[^1];
        var rubs = fitting.Points.Select(p => p.Readings?.HandRub ?? HandRub.NotTaken).ToList();
        return figures with
        {
            RubsCatchingOutward = rubs.Count(r => r == HandRub.CatchesOutward),
            RubsCatchingInward = rubs.Count(r => r == HandRub.CatchesInward),
            RubsCatchingNeither = rubs.Count(r => r == HandRub.Neither),
            Seen = last.Readings?.Seen ?? [],
            PressureShare = Pressure(fitting),
        };
    }

    private Estimate? Pressure(Fitting fitting)
    {
        if (vehicle.Vehicle.AxleAt(fitting.Position.Axle)?.PressureKpa is not { } set || !(set > 0)) return null;
        var read = fitting.Points.LastOrDefault(p => p.Readings?.PressureKpa is not null)?.Readings;
        if (read?.PressureKpa is not { } kpa) return null;
        var cold = read.PressureWarm ? kpa / WarmFactor : kpa;
        return new((cold - set) / set, read.PressureWarm ? Math.Sqrt(PressureSd * PressureSd + WarmSd * WarmSd) : PressureSd);
    }

    private static double Square(double x) => x * x;
}
