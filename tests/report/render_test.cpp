#include "lagscape/report/render.h"

#include <gtest/gtest.h>

#include <nlohmann/json.hpp>

#include "lagscape/base/text.h"
#include "lagscape/measures/trend_test.h"
#include "lagscape/version.h"
#include "support/sample_reports.h"

namespace lagscape {
namespace {

std::string one_line(const std::string& text) {
  std::string out;
  for (const std::string& line : split(text, '\n')) out += std::string(trim(line)) + " ";
  return out;
}

void expect_narrow(const std::string& text) {
  for (const std::string& line : split(text, '\n')) EXPECT_LE(line.size(), 90U) << line;
}

TEST(Summary, IsWhatOneWouldPasteIntoAnEmail) {
  EXPECT_EQ(summary_text(test::harrow_report()), R"(Soil wetness memory, Harrow Basin

Record
  variable   soil_wetness: volumetric soil wetness, unit m3 m-3
  time       480 monthly steps, 1981-01-15 to 2020-12-15 (40 years), standard
             calendar; 3 of them in no file (missing)
  place      2 x 3 cells, lat 50.75 to 51.25, lon -4.25 to -3.25
  input      4 files
  prepared   season: calendar; remove: linear
  set aside  values: 1 234 marked missing in the files, 2 infinite, 7 equal to
             missing_values of the job
             1 value in seasons that have fewer than two values

6 cells in all, 1 outside the mask or box, 4 with estimates
  fine                                       3
  no data                                    1
  near unit root                             1
  many gaps                                  1
  A cell counts under each status that it has.

Memory                                5 %    median      95 %      cells  unit
  decorrelation time                 2.04      4.32        20          4  month
  effective sample size              24.1       111     1 234          4  values
  autocorrelation at lag 1           0.31     0.612      0.93          4  1
  In the median cell 480 steps are worth 111 independent values; a new one takes
  4.32 months (0.36 years).
  In 1 cell the autoregression has order 4 or more: no correction for
  small-sample bias there.

Trend: test by-hand, level 0.05, false discovery rate 0.1 (bh)
  cells tested                                                 4     100 %
  trends, if every value were independent                      3      75 %
  trends, memory allowed for, each cell by itself              2      50 %
  trends that stand after all corrections                      1      25 %
    rising                                                     1      25 %
    falling                                                    0       0 %
  Of those that stand, up to about 0.1 may be false alarms: that is what the
  rate allows.

What the p-values rest on
  Over the map: cells are independent or positively dependent, and the cells
  tested were chosen beforehand.

Result
  results/harrow.nc
  Open it in a GIS as a raster, one layer a map; a first look:
    gdalinfo -mm 'NETCDF:"results/harrow.nc":decorrelation_time'

Take care
  Maps of significance steer decisions. A trend that does not stand is no proof
  that nothing changes; one that stands does not tell its cause. Where people
  could be hurt, let the qualified practice of your trade decide, with this as
  one input.

lagscape )" LAGSCAPE_VERSION R"(: 6 cells in 0.5 s, 12 cells/s, 12.0 MiB of memory
)");
}

TEST(Summary, NamesTheAssumptionsOfTheTestInUse) {
  RunReport report = test::harrow_report();
  report.trend.test = "ols-neff";
  const std::string assumptions(find_trend_test("ols-neff")->assumptions);
  ASSERT_FALSE(assumptions.empty());
  EXPECT_NE(one_line(summary_text(report)).find("In each cell: " + one_line(assumptions).substr(0, assumptions.size())),
            std::string::npos);
  expect_narrow(summary_text(report));
}

TEST(Summary, OfSitesSpeaksOfSites) {
  RunReport report = test::harrow_report();
  report.plan.panel.geometry.kind = GeometryKind::sites;
  report.plan.panel.geometry.rows = 1;
  report.plan.panel.geometry.cols = 6;
  report.files = {"my results/h.nc", "my results/h.csv"};
  const std::string text = summary_text(report);
  EXPECT_NE(text.find("\n6 sites in all, 1 outside the mask or box, 4 with estimates\n"), std::string::npos) << text;
  EXPECT_NE(text.find("ogrinfo -so -al 'my results/h.nc'\n"), std::string::npos) << text;
}

TEST(Summary, OfNothingSaysSo) {
  RunReport report = test::harrow_report();
  report.decorrelation_time = report.effective_sample_size = report.lag1 = {};
  report.trend = {.test = "by-hand"};
  const std::string text = summary_text(report);
  EXPECT_NE(text.find("decorrelation time            no value\n"), std::string::npos) << text;
  EXPECT_NE(text.find("no cell could be tested\n"), std::string::npos) << text;
}

TEST(Summary, WithoutControlPromisesNoRate) {
  RunReport report = test::harrow_report();
  report.plan.job.field.control = FieldControl::none;
  const std::string text = summary_text(report);
  EXPECT_EQ(text.find("rate allows"), std::string::npos) << text;
  EXPECT_NE(text.find("some trends stand by chance alone"), std::string::npos) << text;
}

TEST(Summary, AsJsonHoldsTheSameFigures) {
  const auto document = nlohmann::json::parse(summary_json({test::harrow_report(), test::harrow_report()}));
  EXPECT_EQ(document["lagscape"], LAGSCAPE_VERSION);
  ASSERT_EQ(document["results"].size(), 2U);
  const auto& result = document["results"][1];
  EXPECT_EQ(result["job"], "jobs/harrow.toml");
  EXPECT_EQ(result["record"]["steps"], 480);
  EXPECT_EQ(result["record"]["first"], "1981-01-15");
  EXPECT_EQ(result["record"]["step"], "P1M");
  EXPECT_EQ(result["cells"]["all"], 6);
  EXPECT_EQ(result["cells"]["by_status"]["near unit root"], 1);
  EXPECT_EQ(result["decorrelation_time"]["median"], 4.318);
  EXPECT_EQ(result["effective_sample_size"]["percentile_95"], 1234.4);
  EXPECT_EQ(result["trend"]["standing"], 1);
  EXPECT_EQ(result["trend"]["control"], "bh");
  EXPECT_EQ(result["files"], nlohmann::json({"results/harrow.nc"}));
}

TEST(Plan, TellsEverythingARunWouldDo) {
  EXPECT_EQ(plan_text(test::harrow_plan()), R"(Plan of jobs/harrow.toml - Soil wetness memory, Harrow Basin

Input
  variable     soil_wetness: volumetric soil wetness, unit m3 m-3
  time         480 monthly steps, 1981-01-15 to 2020-12-15 (40 years), standard
               calendar; 3 of them in no file (missing)
  place        2 x 3 cells, lat 50.75 to 51.25, lon -4.25 to -3.25
  left out     1 cell outside the mask or box
  storage      netCDF-4, chunks 1 x 2 x 3, deflate 1
  files        4 files, in order of time:
               harrow_1981.nc, 4.2 KiB, steps 1981-01-15 to 1990-12-15
               harrow_1991.nc, 4.2 KiB, steps 1991-01-15 to 2000-12-15
               harrow_2001.nc, 4.2 KiB, steps 2001-01-15 to 2010-12-15
               harrow_2011.nc, 4.2 KiB, steps 2011-01-15 to 2020-12-15

Settings
  prepare.season        calendar (auto: monthly steps)
  prepare.remove        linear

Maps (3)
  status, decorrelation_time, trend_class

Cubes (1)
  autocorrelation
  lags 0 to 120 steps

Work
  trend tests  5 at most, over the map
  reading      each file once, in 2 bands of cells
  memory       about 3.0 MiB of 1.0 GiB allowed (5.6 KiB a band)
  threads      2

Result
  results/harrow.nc

Worth knowing
  - 3 months are in no file; they count as missing values and are never closed
    up, as memory would change.
)");
}

TEST(Plan, OfManyFilesShowsTheFirstAndCountsTheRest) {
  JobPlan plan = test::harrow_plan();
  plan.panel.sources.assign(1200, "part.nc");
  EXPECT_NE(plan_text(plan).find("... and 1 193 more\n"), std::string::npos) << plan_text(plan);
}

TEST(Plan, AsJsonHoldsTheSame) {
  const auto document = nlohmann::json::parse(plan_json({test::harrow_plan()}));
  const auto& plan = document["plans"][0];
  EXPECT_EQ(plan["settings"][0]["reason"], "auto: monthly steps");
  EXPECT_EQ(plan["maps"].size(), 3U);
  EXPECT_EQ(plan["sources"].size(), 4U);
  EXPECT_EQ(plan["bands"], 2);
  EXPECT_EQ(plan["threads"], 2);
  EXPECT_EQ(plan["calendar"], "standard");
}

TEST(Survey, EndsWithTheCommandToGiveNext) {
  EXPECT_EQ(survey_text(test::harrow_survey()), R"(2 files, looked at together
  harrow_1981.nc   netCDF-4 (classic model)
  harrow_1991.nc   netCDF-4 (classic model)

Variables that can be analysed
  soil_wetness: volumetric soil wetness, unit m3 m-3
    time        480 monthly steps, 1981-01-15 to 2020-12-15 (40 years), standard
                calendar; 3 of them in no file (missing)
    place       2 x 3 cells, lat 50.75 to 51.25, lon -4.25 to -3.25
    missing     3.1 % of the values in 12 sampled steps
    storage     netCDF-4, chunks 1 x 2 x 3, deflate 1
    in the job  select = { level = 10 }

Other variables
  orography: it has no time dimension

Worth knowing
  - 3 months are in no file.

Next: have a job written to start from
  lagscape survey harrow_1981.nc harrow_1991.nc --write-job job.toml
)");
}

TEST(Survey, WithAWrittenJobSaysHowToRunIt) {
  const std::string text = survey_text(test::harrow_survey(), "", "my wet.toml");
  EXPECT_NE(text.find("  lagscape plan 'my wet.toml'\n  lagscape run 'my wet.toml'\n"), std::string::npos) << text;
}

TEST(Survey, OfSitesKeepsTheirCoordinatesInTheNextCommand) {
  const std::string text = survey_text(test::harrow_survey(), "sites.csv");
  EXPECT_NE(text.find("harrow_1991.nc --sites sites.csv --write-job job.toml\n"), std::string::npos) << text;
}

TEST(Survey, OfManyFilesDoesNotRepeatThemAll) {
  SurveyReport report = test::harrow_survey();
  report.files.assign(300, "a.nc");
  report.kinds.assign(300, "CDF-1");
  const std::string text = survey_text(report);
  EXPECT_NE(text.find("... and 293 more\n"), std::string::npos) << text;
  EXPECT_NE(text.find("lagscape survey FILE... --write-job job.toml\n"), std::string::npos) << text;
}

TEST(Survey, WithoutAUsableVariableSaysSo) {
  SurveyReport report = test::harrow_survey();
  report.variables.pop_back();
  const std::string text = survey_text(report);
  EXPECT_NE(text.find("No variable can be analysed as it is.\n"), std::string::npos) << text;
  EXPECT_EQ(text.find("--write-job"), std::string::npos) << text;
}

TEST(Survey, AsJsonHoldsTheSame) {
  const auto document = nlohmann::json::parse(survey_json(test::harrow_survey()));
  EXPECT_EQ(document["files"][0]["kind"], "netCDF-4 (classic model)");
  EXPECT_EQ(document["variables"][0]["usable"], false);
  EXPECT_EQ(document["variables"][1]["steps"], 480);
  EXPECT_EQ(document["variables"][1]["missing_share"], 0.0312);
  EXPECT_EQ(document["worth_knowing"].size(), 1U);
}

}  // namespace
}  // namespace lagscape
