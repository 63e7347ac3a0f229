#include "support/sample_reports.h"

namespace lagscape::test {

Panel harrow_panel() {
  Panel panel;
  panel.variable = "soil_wetness";
  panel.long_name = "volumetric soil wetness";
  panel.units = "m3 m-3";
  const Calendar calendar = Calendar::standard;
  panel.axis = TimeAxis(calendar, {StepKind::months, 1}, seconds_of(calendar, {1981, 1, 15}), 480);
  panel.steps_present = 477;
  panel.geometry.kind = GeometryKind::latlon;
  panel.geometry.rows = 2;
  panel.geometry.cols = 3;
  panel.geometry.y.values = {51.25, 50.75};
  panel.geometry.x.values = {-4.25, -3.75, -3.25};
  for (int year = 1981; year < 2021; year += 10) {
    panel.sources.push_back("harrow_" + std::to_string(year) + ".nc, 4.2 KiB, steps " + std::to_string(year) +
                            "-01-15 to " + std::to_string(year + 9) + "-12-15");
  }
  panel.storage = "netCDF-4, chunks 1 x 2 x 3, deflate 1";
  return panel;
}

JobPlan harrow_plan() {
  JobPlan plan;
  plan.job.title = "Soil wetness memory, Harrow Basin";
  plan.job.path = "jobs/harrow.toml";
  plan.panel = harrow_panel();
  plan.output = "results/harrow.nc";
  plan.output_files = {"results/harrow.nc"};
  plan.settings = {{"prepare.season", "calendar", "auto: monthly steps"}, {"prepare.remove", "linear", ""}};
  plan.maps = {"status", "decorrelation_time", "trend_class"};
  plan.cubes = {"autocorrelation"};
  plan.max_lag = 120;
  plan.cells = 6;
  plan.excluded_cells = 1;
  plan.tests = 5;
  plan.bands = {{0, 3}, {3, 3}};
  plan.band_bytes = 5760;
  plan.peak_bytes = 3 << 20;
  plan.budget_bytes = std::size_t{1} << 30;
  plan.file_reads = 1;
  plan.threads = 2;
  plan.notes = {
      "3 months are in no file; they count as missing values and are never closed up, as memory would change."};
  return plan;
}

RunReport harrow_report() {
  RunReport report;
  report.plan = harrow_plan();
  report.cells_analysed = 4;
  report.status_counts = {{"fine", 3}, {"no data", 1}, {"near unit root", 1}, {"many gaps", 1}};
  report.cells_masked = 1;
  report.values = {.fill = 1234, .infinite = 2, .out_of_range = 0, .job_missing = 7};
  report.values_in_short_seasons = 1;
  report.order_uncorrected = 1;
  report.decorrelation_time = {4, 2.04, 4.318, 19.96};
  report.effective_sample_size = {4, 24.1, 110.6, 1234.4};
  report.lag1 = {4, 0.31, 0.612, 0.93};
  report.lag_unit = "month";
  report.decorrelation_years_median = 0.3598;
  report.trend = {.test = "by-hand",
                  .tested = 4,
                  .independent = 3,
                  .local = 2,
                  .standing = 1,
                  .rising = 1,
                  .falling = 0,
                  .expected_false = 0.1};
  report.wall_seconds = 0.5;
  report.cpu_seconds = 0.9;
  report.peak_rss_bytes = 12 << 20;
  report.files = {"results/harrow.nc"};
  return report;
}

SurveyReport harrow_survey() {
  SurveyReport report;
  report.files = {"harrow_1981.nc", "harrow_1991.nc"};
  report.kinds = {"netCDF-4 (classic model)", "netCDF-4 (classic model)"};
  SurveyedVariable wetness;
  wetness.name = "soil_wetness";
  wetness.long_name = "volumetric soil wetness";
  wetness.units = "m3 m-3";
  wetness.usable = true;
  wetness.to_do = "select = { level = 10 }";
  wetness.select = {{"level", 10}};
  wetness.panel = harrow_panel();
  wetness.missing_share = 0.0312;
  wetness.sampled_steps = 12;
  SurveyedVariable other;
  other.name = "orography";
  other.why_not = "it has no time dimension";
  report.variables = {other, wetness};
  report.quirks = {"3 months are in no file."};
  return report;
}

}  // namespace lagscape::test
