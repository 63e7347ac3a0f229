#include "lagscape/job/options.h"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>

#include "lagscape/base/text.h"
#include "lagscape/measures/analysis.h"

namespace lagscape {
namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();
constexpr NumberBounds kFree{0, 0};

// Order inside a choice is the order of its enum in job_spec.h. Defaults are those of JobSpec (a test compares them).
constexpr std::array kOptions = {
    JobOption{"title", "text", "", "", kFree, "", "Title of the work; it goes into the result."},

    JobOption{
        "input.files", "text or list of texts", "", "", kFree, "",
        "Paths or globs of the files, in any order; they are joined along time. Relative to the job file. Required."},
    JobOption{
        "input.variable", "text or list of texts", "", "", kFree, "",
        "The variable to analyse. With a list, each variable gives a result and output.file must contain {variable}. "
        "Required."},
    JobOption{
        "input.select", "table of numbers", "", "", kFree, "of the dimension",
        "Which entry of a further dimension to take, by coordinate: select = { level = 850 }. Needed when another "
        "dimension is longer than 1."},
    JobOption{
        "input.period", "list of two dates", "", "", kFree, "ISO 8601 dates",
        "First and last date to use, both included: [\"1981-01-01\", \"2020-12-31\"]. Default: the whole record."},
    JobOption{
        "input.box", "list of four numbers", "", "", kFree, "degrees",
        "West, south, east, north of the cells to use; west > east goes across the 180 degree meridian. Default: all "
        "cells."},
    JobOption{"input.mask.file", "text", "", "", kFree, "", "NetCDF file with a mask on the same grid."},
    JobOption{"input.mask.variable", "text", "", "", kFree, "", "Variable of the mask file."},
    JobOption{"input.mask.min", "number", "", "", kFree, "of the mask variable",
              "Cells with a mask value of at least this are used."},
    JobOption{"input.mask.max", "number", "", "", kFree, "of the mask variable",
              "Cells with a mask value of at most this are used."},
    JobOption{"input.mask.values", "list of numbers", "", "", kFree, "of the mask variable",
              "Cells whose mask value is one of these are used (instead of min and max)."},
    JobOption{"input.missing_values", "list of numbers", "", "", kFree, "of the variable, unpacked",
              "Values that mean missing, beside those that the file declares."},
    JobOption{"input.valid_range", "list of two numbers", "", "", kFree, "of the variable, unpacked",
              "Values outside this range count as missing. inf leaves an end open: [0.0, inf]."},
    JobOption{"input.sites", "text", "", "", kFree, "",
              "CSV file with names and coordinates of the sites of a CSV panel."},
    JobOption{"input.duplicates", "choice", "refuse", "refuse | first | mean", kFree, "",
              "When two files hold the same time step with different values: refuse to go on, take the first, or their "
              "mean."},
    JobOption{"input.longitude", "choice", "auto", "auto | as-input", kFree, "",
              "auto: a global grid that runs from 0 to 360 degrees is rolled to -180 to 180, as GIS programs expect."},
    JobOption{"input.time.unit", "text", "", "", kFree, "", "Mends a broken time axis: \"days since 1981-01-01\"."},
    JobOption{"input.time.calendar", "text", "", "", kFree, "",
              "Mends a broken time axis: the CF calendar, such as \"noleap\"."},
    JobOption{"input.time.step", "duration", "", "", kFree, "",
              "Mends a broken time axis: the time step, such as \"P1M\"."},

    JobOption{"prepare.season", "choice", "auto", "auto | none | calendar | harmonics", kFree, "",
              "The season to take out. auto: calendar months for monthly or longer steps, harmonics for shorter ones; "
              "needs a record of two years or more, else no yearly season is taken out."},
    JobOption{"prepare.harmonics",
              "whole number",
              "4",
              "",
              {1, 12},
              "per year",
              "Number of yearly harmonics when the season is described by harmonics."},
    JobOption{
        "prepare.remove", "choice", "linear",
        "none | mean | linear | quadratic | difference | season-difference | running-mean", kFree, "",
        "What else is taken out before memory is measured. mean, linear, quadratic: fitted together with the season; "
        "difference, season-difference: the change from the step, or the same season, before; running-mean: slow "
        "change, "
        "by a centred mean over window."},
    JobOption{"prepare.window",
              "duration or whole number",
              "",
              "",
              {2, kInfinity},
              "steps",
              "Length of the running mean; only with remove = \"running-mean\", which needs it."},
    JobOption{"prepare.min_share",
              "number",
              "0.8",
              "",
              {0, 1},
              "share of the steps",
              "Cells with a smaller share of valid values have no estimates. By default the share is counted between a "
              "cell's own first and last value; see prepare.share_of."},
    JobOption{"prepare.share_of", "choice", "span", "span | period", kFree, "",
              "What min_share refers to: the steps between a cell's first and last value, or the whole period."},
    JobOption{"prepare.min_count",
              "whole number",
              "30",
              "",
              {kFewestValues, kInfinity},
              "values",
              "Cells with fewer valid values have no estimates."},

    JobOption{
        "memory.max_lag",
        "duration or whole number, or \"auto\"",
        "auto",
        "",
        {1, kInfinity},
        "steps",
        "Longest lag of the cubes. auto: 10 log10(n) steps, but at least 24 monthly steps or a year of daily ones, and "
        "never more than a quarter of the record. Estimates do not depend on it."},
    JobOption{"memory.confidence", "number", "0.95", "", {0.5, 1, true}, "", "Confidence of all limits."},
    JobOption{"memory.limits", "choice", "bartlett", "bartlett | independent", kFree, "",
              "Limits of the autocorrelation: Bartlett's, which allow for the memory at shorter lags, or those of an "
              "independent series."},
    JobOption{"memory.order",
              "choice or whole number",
              "bic",
              "bic | aicc | aic",
              {1, 30},
              "",
              "How the order of the autoregression is chosen, or the order itself (1 to max_order)."},
    JobOption{"memory.max_order", "whole number", "10", "", {1, 30}, "steps", "Largest order of the autoregression."},

    JobOption{"trend.tests", "list of texts", "ols-neff", "", kFree, "",
              "Trend tests; the first one gives the limits and feeds the field step."},
    JobOption{"trend.alpha", "number", "0.05", "", {0, 1, true}, "", "Level of the trend test in a single cell."},
    JobOption{"trend.per", "choice", "year", "year | decade", kFree, "", "Time unit of trends."},
    JobOption{"trend.target",
              "number",
              "",
              "",
              {0, kInfinity, true},
              "variable's unit per year or decade (trend.per)",
              "A trend to be detected: years_to_detect tells how long a record has to be to show it."},

    JobOption{
        "field.control", "choice", "bh", "none | bh | by", kFree, "",
        "Correction for testing many cells: false discovery rate after Benjamini and Hochberg, or after Benjamini and "
        "Yekutieli (holds under any dependence, but is stricter)."},
    JobOption{"field.rate",
              "number",
              "0.1",
              "",
              {0, 1, true},
              "",
              "False discovery rate: the share of false alarms accepted among the trends that stand."},

    JobOption{"output.file", "text", "", "", kFree, "",
              "The result, a name that ends in .nc; may contain {variable}. Relative to the job file. Required."},
    JobOption{"output.maps", "list of texts", "standard", "", kFree, "",
              "Maps to write: names, groups of maps, or \"all\"."},
    JobOption{"output.cubes", "list of texts", "", "", kFree, "",
              "Cubes to write, one layer a lag (or order). They make the result much larger."},
    JobOption{"output.deflate", "whole number", "1", "", {0, 9}, "", "Compression of the result: 0 none, 9 slowest."},
};

constexpr std::array<std::string_view, 4> kLaterOptions = {"extends", "input.quality", "input.unit", "input.dims"};
constexpr std::array<std::string_view, 6> kLaterTests = {"calibrated", "reml",          "hac",
                                                         "rank",       "rank-adjusted", "seasonal-rank"};

}  // namespace

std::span<const JobOption> job_options() { return kOptions; }

const JobOption* find_option(std::string_view key) {
  const auto found =
      std::find_if(kOptions.begin(), kOptions.end(), [&](const JobOption& option) { return option.key == key; });
  return found == kOptions.end() ? nullptr : &*found;
}

std::string range_text(const JobOption& option) {
  const auto [low, high, open] = option.bounds;
  std::string numbers;
  if (low < high) {
    numbers = open               ? fmt::format("above {}", low)
              : std::isinf(high) ? fmt::format("{} or more", low)
                                 : fmt::format("{} to {}", low, high);
    if (open && !std::isinf(high)) numbers += fmt::format(", below {}", high);
  }
  if (option.choices.empty()) return numbers;
  return numbers.empty() ? std::string(option.choices) : fmt::format("{}, or {}", option.choices, numbers);
}

std::vector<std::string> choice_words(std::string_view key) {
  std::vector<std::string> words;
  for (const std::string& word : split(find_option(key)->choices, '|')) words.emplace_back(trim(word));
  return words;
}

std::span<const std::string_view> later_options() { return kLaterOptions; }
std::span<const std::string_view> later_trend_tests() { return kLaterTests; }

}  // namespace lagscape
