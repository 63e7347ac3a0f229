#include "pipeline/describe.h"

#include <fmt/chrono.h>
#include <fmt/format.h>
#include <sys/stat.h>

#include <algorithm>
#include <cstdlib>
#include <ctime>

#include "lagscape/base/text.h"
#include "lagscape/base/units.h"
#include "lagscape/job/job_file.h"
#include "lagscape/measures/trend_test.h"
#include "lagscape/version.h"

namespace lagscape {
namespace {

std::string unit_of(UnitRule rule, const JobPlan& plan) {
  const std::string& input = plan.panel.units;
  const TimeAxis& axis = plan.panel.axis;
  switch (rule) {
    case UnitRule::one:
      return "1";
    case UnitRule::none:
      return "";
    case UnitRule::input:
      return dimensionless(input) ? "1" : input;
    case UnitRule::input_difference:
      return difference_unit(input);
    case UnitRule::input_squared:
      return squared_unit(input);
    case UnitRule::input_rate:
      return rate_unit(input, plan.job.trend.per == RatePer::decade ? "decade" : "year");
    case UnitRule::lag_time:
      return axis.lag_unit();
    case UnitRule::calendar_time:
      return axis.cf_units();
  }
  return "";
}

MapSpec describe_map(const Measure& measure, const JobPlan& plan) {
  MapSpec map;
  map.name = measure.name;
  map.type = measure.type;
  map.axis = measure.axis;
  map.long_name = measure.long_name;
  map.standard_name = measure.standard_name;
  map.units = unit_of(measure.unit, plan);
  map.cell_methods = measure.cell_methods;
  map.comment = measure.meaning;
  if (!measure.formula.empty()) map.comment += fmt::format(" Formula: {}.", measure.formula);
  if (!measure.cautions.empty()) map.comment += fmt::format(" Caution: {}", measure.cautions);
  map.references = measure.source;
  map.ancillary = measure.ancillary;
  map.valid_range = measure.valid_range;
  std::vector<std::string> meanings;
  if (measure.name == "status") {
    for (const StatusBit& bit : status_bits()) {
      map.flag_masks.push_back(bit.mask);
      meanings.emplace_back(bit.name);
    }
  } else if (measure.name == "trend_class") {
    for (const TrendClass& one : trend_classes()) {
      map.flag_values.push_back(one.value);
      meanings.emplace_back(one.name);
    }
  }
  map.flag_meanings = join(meanings, " ");
  return map;
}

/// Time of history and date_created. Equal work gives equal files, so this is not the clock: it is SOURCE_DATE_EPOCH
/// where set (reproducible-builds.org), else the time of the newest input file.
std::string stamp(const JobSpec& job) {
  std::time_t time = 0;
  if (const char* fixed = std::getenv("SOURCE_DATE_EPOCH"); fixed != nullptr && to_number(fixed)) {
    time = static_cast<std::time_t>(*to_number(fixed));
  } else {
    for (const std::string& file : job.input.files) {
      struct stat info {};
      if (stat(file.c_str(), &info) == 0) time = std::max(time, info.st_mtime);
    }
  }
  return fmt::format("{:%Y-%m-%dT%H:%M:%SZ}", fmt::gmtime(time));
}

std::string assumptions(const JobSpec& job) {
  std::string text;
  const TrendTest& test = *find_trend_test(job.trend.tests.front());
  text += fmt::format("trend_p, trend_p_field, trend_class (test {}): {}. ", test.name, test.assumptions);
  text += "trend_p_independent: values are independent. ljung_box_p: independent values under the null. ";
  if (job.field.control == FieldControl::bh) {
    text += "trend_p_field (Benjamini-Hochberg): cells are independent or positively dependent. ";
  } else if (job.field.control == FieldControl::by) {
    text += "trend_p_field (Benjamini-Yekutieli): any dependence between cells. ";
  } else {
    text += "trend_p_field: no correction for testing many cells was asked for. ";
  }
  return text +
         "All limits hold for one cell at a time. A p-value is not the probability that a trend is real, nor does it "
         "tell a cause.";
}

struct GlobalAttributes {
  Attributes list;
  void text(const std::string& name, const std::string& value) {
    if (!value.empty()) list.push_back({name, value});
  }
  void number(const std::string& name, double value) { list.push_back({name, std::vector<double>{value}}); }
};

void add_extent(GlobalAttributes& out, const Geometry& geometry) {
  const auto range = [&](const std::string& name, const std::vector<double>& values, const std::string& units) {
    if (values.empty()) return;
    const auto [low, high] = std::ranges::minmax_element(values);
    out.number("geospatial_" + name + "_min", *low);
    out.number("geospatial_" + name + "_max", *high);
    out.text("geospatial_" + name + "_units", units);
  };
  const bool axes = geometry.kind == GeometryKind::latlon;
  range("lat", axes ? geometry.y.values : geometry.lat, "degrees_north");
  range("lon", axes ? geometry.x.values : geometry.lon, "degrees_east");
}

}  // namespace

MapSet describe_result(const JobPlan& plan, const std::vector<const Measure*>& measures, const std::string& command) {
  const JobSpec& job = plan.job;
  const Panel& panel = plan.panel;
  const TimeAxis& axis = panel.axis;
  MapSet set;
  set.geometry = panel.geometry;
  set.time = axis;
  set.deflate = job.output.deflate;
  for (const Measure* measure : measures) {
    set.maps.push_back(describe_map(*measure, plan));
    if (measure->axis == LayerAxis::lag) set.lags = plan.max_lag + 1;
    if (measure->axis == LayerAxis::order) set.orders = static_cast<std::size_t>(job.memory.max_order);
  }
  const TrendTest& test = *find_trend_test(job.trend.tests.front());
  const std::string what = panel.long_name.empty() ? panel.variable : panel.long_name;
  const std::string now = stamp(job);
  GlobalAttributes out;
  out.text("Conventions", "CF-1.10, ACDD-1.3");
  out.text("title", job.title.empty() ? fmt::format("Memory and trend of {}", what) : job.title);
  out.text(
      "summary",
      fmt::format("Cell by cell statistics of {} ({}), {}, {} to {}: what there is to work with, how long the record "
                  "remembers, how many independent values it is worth, and which trends stand once memory and the "
                  "number of cells are allowed for.",
                  what, panel.variable, step_words(axis.step()), axis.label(0), axis.label(axis.size() - 1)));
  out.text("keywords", "autocorrelation, decorrelation time, effective sample size, trend, false discovery rate");
  std::string history =
      fmt::format("{} lagscape {}: {}", now, LAGSCAPE_VERSION, command.empty() ? "lagscape run" : command);
  if (!panel.input_history.empty()) history += "\n" + panel.input_history;
  out.text("history", history);
  out.text("source", fmt::format("variable {} of\n{}", panel.variable, join(panel.sources, "\n")));
  out.text("date_created", now);
  out.text("lagscape_dates",
           "history and date_created carry the time of the newest input file (or SOURCE_DATE_EPOCH), not of the "
           "run, so that equal work gives equal files");
  out.text("processing_level", "statistics over time of the source variable");
  add_extent(out, panel.geometry);
  out.text("time_coverage_start", axis.label(0));
  out.text("time_coverage_end", axis.label(axis.size() - 1));
  const bool calendar_step = axis.step().kind != StepKind::seconds;
  const auto steps = static_cast<std::int64_t>(axis.size());
  out.text("time_coverage_duration", duration_text({axis.step().kind, axis.step().count * steps}));
  out.text("time_coverage_resolution", duration_text(axis.step()));
  out.text("time_coverage_comment", calendar_step ? "steps are calendar months or years" : "");
  out.text("cdm_data_type", panel.geometry.is_sites() ? "Station" : "Grid");
  out.text("lagscape_version", LAGSCAPE_VERSION);
  out.text("lagscape_job", job_text(job));
  std::string settings;
  for (const EffectiveSetting& setting : plan.settings) {
    settings += fmt::format("{} = {}{}\n", setting.key, setting.value,
                            setting.reason.empty() ? "" : fmt::format(" ({})", setting.reason));
  }
  out.text("lagscape_settings", std::string(trim(settings)));
  out.text("lagscape_trend_test", fmt::format("{}: {} [{}]", test.name, test.summary, test.source));
  out.text("lagscape_assumptions", assumptions(job));
  out.text("lagscape_cautions",
           "Maps of significance steer decisions. Read status first; a trend not established is not a trend "
           "absent (see detectable_trend). Results of the field step depend on the domain chosen. Where people "
           "could be hurt, leave the decision to qualified practice.");
  out.text("lagscape_random_seeds", "none: nothing in this result is random");
  out.text("lagscape_notes", join(plan.notes, "\n"));
  for (const Attribute& attribute : panel.input_attributes) out.list.push_back(attribute);
  set.global = std::move(out.list);
  return set;
}

Attributes closing_attributes(const RunReport& report) {
  std::vector<std::string> counts;
  for (const auto& [words, count] : report.status_counts) counts.push_back(fmt::format("{}: {}", words, count));
  const RunReport::TrendCounts& trend = report.trend;
  return {
      {"lagscape_cells_by_status", join(counts, "; ")},
      {"lagscape_values_set_aside",
       fmt::format(
           "missing: {}; infinite: {}; out of range: {}; missing by the job: {}; in seasons with a single value: {}",
           report.values.fill, report.values.infinite, report.values.out_of_range, report.values.job_missing,
           report.values_in_short_seasons)},
      {"lagscape_trend_counts",
       fmt::format("tested: {}; p <= alpha as if independent: {}; p <= alpha by {}: {}; "
                   "standing after field control: {} ({} rising, "
                   "{} falling); false ones among them that the rate allows: {}; standing with memory of "
                   "higher order than the test assumes: {}",
                   trend.tested, trend.independent, trend.test, trend.local, trend.standing, trend.rising,
                   trend.falling, human_number(trend.expected_false), trend.beyond_order)},
  };
}

}  // namespace lagscape
