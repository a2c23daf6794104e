using System.IO.Compression;
using System.Text;
using WearWatch.Import;

namespace WearWatch.Services.Tests.Import;

/// <summary>Files that are not as they should be: each says what is wrong, and where, and costs nothing beside it.</summary>
public sealed class FolderTests : IDisposable
{
    private readonly string _folder = Directory.CreateTempSubdirectory("wearwatch-folder-").FullName;

    public void Dispose() => Directory.Delete(_folder, recursive: true);

    private void Write(string file, params string[] lines) => File.WriteAllLines(Path.Combine(_folder, file), lines);

    private (Dictionary<string, int> Facts, List<RowProblem> Problems) Read()
    {
        var folder = new FolderFacts(_folder);
        var facts = folder.Files().ToDictionary(f => f.File, f => f.Facts.Count);
        return (facts, folder.Problems);
    }

    [Fact]
    public void A_decimal_comma_is_refused_with_a_hint_and_the_row_beside_it_is_sent()
    {
        Write("prices.csv", "id,depot_id,kind,amount,currency,from", "p1,D1,fuel,\"1,62\",EUR,2026-01-01", "p2,D1,fuel,1.62,EUR,2026-01-01");
        var (facts, problems) = Read();
        Assert.Equal(1, facts["prices.csv"]);
        var problem = Assert.Single(problems);
        Assert.Equal(("prices.csv", 2, "amount"), (problem.File, problem.Line, problem.Column));
        Assert.Contains("decimal comma", problem.Message);
    }

    [Fact]
    public void A_decimal_comma_that_splits_a_field_is_refused_with_the_same_hint()
    {
        Write("readings.csv", "survey_id,position,groove,depth", "s1,1L,1,7,4");
        Assert.Contains(Read().Problems, p => p.Message.Contains("decimal comma"));
    }

    [Fact]
    public void An_unknown_column_refuses_the_file_by_its_name()
    {
        Write("driver_reports.csv", "id,vehicle_id,at,symptom,mood", "r1,V1,2026-03-02T07:40:00Z,shakes,bad");
        Assert.Equal("mood", Assert.Single(Read().Problems).Column);
    }

    [Fact]
    public void A_missing_column_is_named()
    {
        Write("driver_reports.csv", "id,vehicle_id,at", "r1,V1,2026-03-02T07:40:00Z");
        Assert.Equal("symptom", Assert.Single(Read().Problems).Column);
    }

    [Fact]
    public void An_empty_file_says_so()
    {
        File.WriteAllText(Path.Combine(_folder, "surveys.csv"), "");
        Assert.Equal("the file is empty", Assert.Single(Read().Problems).Message);
    }

    [Theory]
    [InlineData(0.3)]
    [InlineData(0.9)]
    public void A_gzip_that_was_half_written_is_refused_whole(double share)
    {
        var whole = new MemoryStream();
        using (var gzip = new GZipStream(whole, CompressionLevel.Fastest, leaveOpen: true))
        {
            var random = new Random(1);
            gzip.Write(Encoding.UTF8.GetBytes("id,vehicle_id,at,symptom\n"));
            for (var i = 0; i < 2000; i++) gzip.Write(Encoding.UTF8.GetBytes($"r{random.Next()},V1,2026-03-02T07:40:00Z,shakes\n"));
        }
        File.WriteAllBytes(Path.Combine(_folder, "driver_reports.csv.gz"), whole.ToArray()[..(int)(whole.Length * share)]);
        var (facts, problems) = Read();
        Assert.Equal(0, facts.GetValueOrDefault("driver_reports.csv.gz"));
        Assert.Equal("driver_reports.csv.gz", Assert.Single(problems).File);
    }

    [Fact]
    public void Readings_of_a_survey_that_is_not_there_are_not_dropped_in_silence()
    {
        Write("readings.csv", "survey_id,position,groove,depth", "s9,1L,1,7.4", "s9,1R,1,7.3");
        var problem = Assert.Single(Read().Problems);
        Assert.Contains("'s9' is not in surveys (2 rows)", problem.Message);
    }

    [Fact]
    public void A_reading_that_cannot_be_read_leaves_the_rest_of_its_walk()
    {
        Write("depots.csv", "id,depot_id,traffic_side,jurisdiction,time_zone,currency", "d1,D1,right,DE,Europe/Berlin,EUR");
        Write("surveys.csv", "id,vehicle_id,at,depth_unit", "s1,V1,2026-03-02T07:40:00Z,mm");
        Write("readings.csv", "survey_id,position,groove,depth", "s1,1L,1,7.4", "s1,1L,2,deep");
        var folder = new FolderFacts(_folder);
        var survey = folder.Files().Single(f => f.File == "surveys.csv").Facts.Single().Survey;
        Assert.Single(Assert.Single(survey.Tyres).Grooves);
        Assert.Equal("depth", Assert.Single(folder.Problems).Column);
    }

    [Fact]
    public void An_unknown_unit_is_refused_with_the_units_there_are()
    {
        Write("surveys.csv", "id,vehicle_id,at,depth_unit", "s1,V1,2026-03-02T07:40:00Z,furlong");
        Assert.Contains("not one of mm, 1/32in", Assert.Single(Read().Problems).Message);
    }

    [Fact]
    public void A_workbook_renamed_to_csv_is_refused_as_no_text()
    {
        File.WriteAllBytes(Path.Combine(_folder, "surveys.csv"), [0x50, 0x4B, 3, 4, 0x14, 0, 6, 0, 8, 0, 0, 0, 0x21, 0, 1, 2, 3]);
        var problem = Assert.Single(Read().Problems);
        Assert.Equal("surveys.csv", problem.File);
        Assert.Contains("not text", problem.Message);
    }

    [Theory]
    [InlineData("\r\n", false)]
    [InlineData("\n", true)]
    [InlineData("\r\n", true)]
    public void Line_ends_and_a_byte_order_mark_change_nothing(string end, bool mark)
    {
        var text = string.Join(end, "id,vehicle_id,at,symptom", "r1,V1,2026-03-02T07:40:00Z,shakes", "r2,V1,2026-03-03T07:40:00Z,shakes", "");
        File.WriteAllText(Path.Combine(_folder, "driver_reports.csv"), text, new UTF8Encoding(mark));
        var (facts, problems) = Read();
        Assert.Empty(problems);
        Assert.Equal(2, facts["driver_reports.csv"]);
    }

    [Fact]
    public void Columns_may_stand_in_any_order()
    {
        Write("driver_reports.csv", "symptom,at,id,vehicle_id", "shakes,2026-03-02T07:40:00Z,r1,V1");
        var folder = new FolderFacts(_folder);
        var report = folder.Files().Single(f => f.File == "driver_reports.csv").Facts.Single().DriverReport;
        Assert.Empty(folder.Problems);
        Assert.Equal("V1", report.VehicleId);
    }

    [Fact]
    public void What_could_not_be_read_keeps_its_text_and_the_id_of_the_fact_it_would_have_been()
    {
        Write("driver_reports.csv", "id,vehicle_id,at,symptom", "r1,V1,yesterday,shakes");
        var problem = Assert.Single(Read().Problems);
        Assert.Equal(("driver_reports.csv", 2, "at", "r1", "r1,V1,yesterday,shakes"), (problem.File, problem.Line, problem.Column, problem.Id, problem.Text));
    }

    [Theory]
    [InlineData("2LO.2=7.1", null)]
    [InlineData("2LO.2=", null)]
    [InlineData("distance=5000", null)]
    [InlineData("unit=1/32in", null)]
    [InlineData("2LO.3=7.1", "the survey has no depth at 2LO.3; it has 2LO.1, 2LO.2")]
    [InlineData("2LO.2=7,1", "'7,1' is not a number; use a point as the decimal mark")]
    [InlineData("unit=furlong", "'furlong' is neither mm nor 1/32in")]
    [InlineData("more", "'more' is not a change such as 2LO.2=7.1")]
    public void A_correction_typed_by_hand_is_made_or_says_what_is_wrong(string change, string? wrong)
    {
        var survey = new Contracts.V1.TreadSurvey { DepthUnit = Contracts.V1.DepthUnit.Mm, Tyres = { Sample.Tyre("2LO", 6.1, 1.7) } };
        Assert.Equal(wrong, Commands.CorrectCommand.Apply(survey, change));
        if (change == "2LO.2=7.1") Assert.Equal([6.1, 7.1], survey.Tyres[0].Grooves.Select(g => g.Depth));
        if (change == "2LO.2=") Assert.Equal([6.1], survey.Tyres[0].Grooves.Select(g => g.Depth));
    }
}
