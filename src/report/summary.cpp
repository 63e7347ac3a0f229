#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <filesystem>

#include "lagscape/base/text.h"
#include "lagscape/job/options.h"
#include "lagscape/measures/trend_test.h"
#include "lagscape/report/layout.h"
#include "lagscape/report/render.h"
#include "lagscape/version.h"
#include "report/json.h"
#include "report/words.h"

namespace lagscape {
namespace {

constexpr std::size_t kColumn = 13;

std::string line(std::string_view label, std::string_view text) { return listed(label, text, kColumn, kReportWidth); }

std::string heading_text(const RunReport& report) {
  const std::string title = report.plan.job.title.empty() ? report.plan.panel.variable : report.plan.job.title;
  return wrapped(title, kReportWidth) + "\n";
}

std::string values_words(const ValueCounts& values) {
  std::vector<std::string> parts;
  const auto add = [&](std::size_t count, std::string_view words) {
    if (count > 0) parts.push_back(fmt::format("{} {}", grouped(count), words));
  };
  add(values.fill, "marked missing in the files");
  add(values.infinite, "infinite");
  add(values.out_of_range, "outside the valid range");
  add(values.job_missing, "equal to missing_values of the job");
  return parts.empty() ? "no value" : "values: " + join(parts, ", ");
}

/// What preparation took out: "season: calendar (auto: calendar months); linear".
std::string preparation_words(const JobPlan& plan) {
  std::string season, remove;
  for (const EffectiveSetting& setting : plan.settings) {
    if (setting.key == "prepare.season") {
      season = fmt::format("season: {}", setting.value);
      if (setting.value == "none" && !setting.reason.empty()) season += fmt::format(" ({})", setting.reason);
    }
    if (setting.key == "prepare.remove") remove = fmt::format("remove: {}", setting.value);
  }
  return fmt::format("{}; {}", season, remove);
}

std::string record_text(const RunReport& report) {
  const Panel& panel = report.plan.panel;
  std::string out = "\nRecord\n";
  out += line("variable", variable_words(panel));
  out += line("time", time_words(panel));
  out += line("place", panel.geometry.describe());
  out += line("input", counted(panel.sources.size(), "file"));
  out += line("prepared", preparation_words(report.plan));
  out += line("set aside", values_words(report.values));
  if (report.values_in_short_seasons > 0) {
    out += line("", fmt::format("{} in seasons that have fewer than two values",
                                counted(report.values_in_short_seasons, "value")));
  }
  return out;
}

std::string cells_text(const RunReport& report) {
  const std::string_view noun = place_noun(report.plan.panel);
  const std::string masked =
      report.cells_masked > 0 ? fmt::format(", {} outside the mask or box", grouped(report.cells_masked)) : "";
  std::string out = fmt::format("\n{} in all{}, {} with estimates\n", counted(report.plan.cells, noun), masked,
                                grouped(report.cells_analysed));
  for (const auto& [words, count] : report.status_counts) out += fmt::format("  {:<32}{:>12}\n", words, grouped(count));
  if (report.status_counts.size() > 2) out += fmt::format("  A {} counts under each status that it has.\n", noun);
  return out;
}

std::string spread_line(std::string_view label, std::string_view unit, const Spread& spread) {
  if (spread.count == 0) return fmt::format("  {:<30}no value\n", label);
  return fmt::format("  {:<30}{:>9} {:>9} {:>9} {:>10}  {}\n", label, figure(spread.low), figure(spread.median),
                     figure(spread.high), grouped(spread.count), unit);
}

/// The median decorrelation time as "4.32 months (0.36 years)".
std::string time_in_two_units(const RunReport& report) {
  std::string years = fmt::format("{} years", figure(report.decorrelation_years_median));
  if (report.lag_unit == "year") return years;
  return fmt::format("{} {}s ({})", figure(report.decorrelation_time.median), report.lag_unit, years);
}

std::string memory_text(const RunReport& report) {
  std::string out = fmt::format("\n{:<32}{:>9} {:>9} {:>9} {:>10}  {}\n", "Memory", "5 %", "median", "95 %",
                                fmt::format("{}s", place_noun(report.plan.panel)), "unit");
  out += spread_line("decorrelation time", report.lag_unit, report.decorrelation_time);
  out += spread_line("effective sample size", "values", report.effective_sample_size);
  out += spread_line("autocorrelation at lag 1", "1", report.lag1);
  const Spread& time = report.decorrelation_time;
  const Spread& size = report.effective_sample_size;
  if (time.count > 0 && size.count > 0) {
    const std::string text = fmt::format(
        "In the median {} {} steps are worth {} independent values; a new one takes {}.", place_noun(report.plan.panel),
        grouped(report.plan.panel.axis.size()), figure(size.median), time_in_two_units(report));
    out += "  " + wrapped(text, kReportWidth, 2, 2) + "\n";
  }
  if (report.order_uncorrected > 0) {
    const std::string text =
        fmt::format("In {} the autoregression has order 4 or more: no correction for small-sample bias there.",
                    counted(report.order_uncorrected, place_noun(report.plan.panel)));
    out += "  " + wrapped(text, kReportWidth, 2, 2) + "\n";
  }
  return out;
}

std::string field_words(const JobSpec::Field& field) {
  if (field.control == FieldControl::none) return "no correction for testing many cells";
  return fmt::format("false discovery rate {} ({})", number_text(field.rate),
                     choice_word("field.control", field.control));
}

std::string count_line(std::string_view label, std::size_t count, std::size_t whole) {
  return fmt::format("  {:<52}{:>10}  {:>8}\n", label, grouped(count), percent(count, whole));
}

std::string trend_text(const RunReport& report) {
  const RunReport::TrendCounts& trend = report.trend;
  const JobSpec& job = report.plan.job;
  std::string out =
      fmt::format("\nTrend: test {}, level {}, {}\n", trend.test, number_text(job.trend.alpha), field_words(job.field));
  const std::string_view noun = place_noun(report.plan.panel);
  if (trend.tested == 0) return out + fmt::format("  no {} could be tested\n", noun);
  out += count_line(fmt::format("{}s tested", noun), trend.tested, trend.tested);
  out += count_line("trends, if every value were independent", trend.independent, trend.tested);
  out += count_line(fmt::format("trends, memory allowed for, each {} by itself", noun), trend.local, trend.tested);
  out += count_line("trends that stand after all corrections", trend.standing, trend.tested);
  if (trend.standing > 0) {
    out += count_line("  rising", trend.rising, trend.tested) + count_line("  falling", trend.falling, trend.tested);
  }
  if (trend.standing > 0 && job.field.control != FieldControl::none) {
    const std::string text =
        fmt::format("Of those that stand, up to about {} may be false alarms: that is what the rate allows.",
                    figure(trend.expected_false));
    out += "  " + wrapped(text, kReportWidth, 2, 2) + "\n";
  }
  if (trend.beyond_order > 0) {
    const std::string text = fmt::format(
        "In {} of those that stand the memory found is of higher order than the test assumes (map ar_order): "
        "its p-values are too small there, and false alarms can be more than the rate allows.",
        grouped(trend.beyond_order));
    out += "  " + wrapped(text, kReportWidth, 2, 2) + "\n";
  }
  return out;
}

/// What the field step adds to the assumptions of the test in a cell.
std::string_view field_assumption(FieldControl control) {
  switch (control) {
    case FieldControl::none:
      return "Nothing was done about testing many cells: some trends stand by chance alone.";
    case FieldControl::bh:
      return "Over the map: cells are independent or positively dependent, and the cells tested were chosen "
             "beforehand.";
    case FieldControl::by:
      return "Over the map: any dependence between cells, and the cells tested were chosen beforehand.";
  }
  return "";
}

std::string assumptions(const RunReport& report) {
  const TrendTest* test = find_trend_test(report.trend.test);
  const std::string local = test == nullptr ? std::string() : fmt::format("In each cell: {}", test->assumptions);
  const std::string stop = local.empty() ? "" : local.back() == '.' ? " " : ". ";
  return local + stop + std::string(field_assumption(report.plan.job.field.control));
}

/// The map to look at first.
std::string first_map(const std::vector<std::string>& maps) {
  for (const char* name : {"decorrelation_time", "trend_class"}) {
    if (std::find(maps.begin(), maps.end(), name) != maps.end()) return name;
  }
  return maps.empty() ? "" : maps.front();
}

std::string result_text(const RunReport& report) {
  std::string out = "\nResult\n";
  for (const std::string& file : report.files) out += "  " + file + "\n";
  if (report.files.empty()) return out;
  const std::string& file = report.files.front();
  const std::string map = first_map(report.plan.maps);
  if (report.plan.panel.geometry.is_sites()) {
    out += "  Open it in a GIS as points, or the .csv in a spreadsheet; a first look:\n";
    return out + fmt::format("    ogrinfo -so -al {}\n", shell_word(file));
  }
  out += "  Open it in a GIS as a raster, one layer a map; a first look:\n";
  return out + fmt::format("    gdalinfo -mm {}\n", shell_word(fmt::format("NETCDF:\"{}\":{}", file, map)));
}

constexpr std::string_view kCaution =
    "Maps of significance steer decisions. A trend that does not stand is no proof that nothing changes; one that "
    "stands does "
    "not tell its cause. Where people could be hurt, let the qualified practice of your trade decide, with this as one "
    "input.";

std::string json_spread(const Spread& spread) {
  if (spread.count == 0) return json::object({{"cells", json::number(spread.count)}});
  return json::object({{"cells", json::number(spread.count)},
                       {"percentile_5", json::number(spread.low)},
                       {"median", json::number(spread.median)},
                       {"percentile_95", json::number(spread.high)}});
}

std::string json_record(const Panel& panel) {
  const TimeAxis& axis = panel.axis;
  const bool any = axis.size() > 0;
  return json::object({{"variable", json::text(panel.variable)},
                       {"long_name", json::text(panel.long_name)},
                       {"unit", json::text(panel.units)},
                       {"steps", json::number(axis.size())},
                       {"steps_present", json::number(panel.steps_present)},
                       {"step", json::text(duration_text(axis.step()))},
                       {"first", any ? json::text(axis.label(0)) : "null"},
                       {"last", any ? json::text(axis.label(axis.size() - 1)) : "null"},
                       {"calendar", json::text(calendar_name(axis.calendar()))},
                       {"place", json::text(panel.geometry.describe())},
                       {"files", json::number(panel.sources.size())}});
}

std::string json_cells(const RunReport& report) {
  std::vector<std::pair<std::string_view, std::string>> status;
  for (const auto& [words, count] : report.status_counts) status.emplace_back(words, json::number(count));
  return json::object({{"all", json::number(report.plan.cells)},
                       {"outside_mask_or_box", json::number(report.cells_masked)},
                       {"with_estimates", json::number(report.cells_analysed)},
                       {"by_status", json::object(status)}});
}

std::string json_values(const RunReport& report) {
  return json::object({{"missing", json::number(report.values.fill)},
                       {"infinite", json::number(report.values.infinite)},
                       {"out_of_range", json::number(report.values.out_of_range)},
                       {"missing_by_job", json::number(report.values.job_missing)},
                       {"in_short_seasons", json::number(report.values_in_short_seasons)}});
}

std::string json_trend(const RunReport& report) {
  const RunReport::TrendCounts& trend = report.trend;
  const JobSpec& job = report.plan.job;
  return json::object({{"test", json::text(trend.test)},
                       {"alpha", json::number(job.trend.alpha)},
                       {"control", json::text(choice_word("field.control", job.field.control))},
                       {"rate", json::number(job.field.rate)},
                       {"tested", json::number(trend.tested)},
                       {"if_independent", json::number(trend.independent)},
                       {"memory_allowed_for", json::number(trend.local)},
                       {"standing", json::number(trend.standing)},
                       {"rising", json::number(trend.rising)},
                       {"falling", json::number(trend.falling)},
                       {"standing_with_memory_beyond_the_test", json::number(trend.beyond_order)},
                       {"false_alarms_allowed", json::number(trend.expected_false)},
                       {"assumptions", json::text(assumptions(report))}});
}

std::string json_report(const RunReport& report) {
  return json::object({{"job", json::text(report.plan.job.path)},
                       {"title", json::text(report.plan.job.title)},
                       {"record", json_record(report.plan.panel)},
                       {"values_set_aside", json_values(report)},
                       {"cells", json_cells(report)},
                       {"lag_unit", json::text(report.lag_unit)},
                       {"decorrelation_time", json_spread(report.decorrelation_time)},
                       {"effective_sample_size", json_spread(report.effective_sample_size)},
                       {"lag1_autocorrelation", json_spread(report.lag1)},
                       {"cells_without_bias_correction", json::number(report.order_uncorrected)},
                       {"trend", json_trend(report)},
                       {"files", json::texts(report.files)},
                       {"seconds", json::number(report.wall_seconds)},
                       {"cpu_seconds", json::number(report.cpu_seconds)},
                       {"peak_memory_bytes", json::number(report.peak_rss_bytes)}});
}

}  // namespace

std::string summary_text(const RunReport& report) {
  std::string out =
      heading_text(report) + record_text(report) + cells_text(report) + memory_text(report) + trend_text(report);
  out += "\n" + paragraph("What the p-values rest on", assumptions(report));
  out += result_text(report);
  out += "\n" + paragraph("Take care", kCaution);
  const double rate = report.wall_seconds > 0 ? static_cast<double>(report.plan.cells) / report.wall_seconds : 0;
  out += fmt::format("\nlagscape {}: {} in {}, {} {}s/s, {} of memory\n", LAGSCAPE_VERSION,
                     counted(report.plan.cells, place_noun(report.plan.panel)), duration_words(report.wall_seconds),
                     grouped(static_cast<std::size_t>(std::llround(rate))), place_noun(report.plan.panel),
                     human_bytes(static_cast<double>(report.peak_rss_bytes)));
  return out;
}

std::string summary_json(const std::vector<RunReport>& reports) {
  std::vector<std::string> results;
  for (const RunReport& report : reports) results.push_back(json_report(report));
  return json::object({{"lagscape", json::text(LAGSCAPE_VERSION)}, {"results", json::list(results)}}) + "\n";
}

}  // namespace lagscape
